import assert from "node:assert/strict";
import fc from "fast-check";
import { InputError } from "../../src/base/mod.ts";
import { LAMP_NAMES, MATERIAL_IDS } from "../../src/data/mod.ts";
import { parseScenario, resolveScenario, type Scenario } from "../../src/scenario/mod.ts";
import { problemsOf } from "../support/input_problems.ts";
import { SCENARIO_TEXT } from "../support/scenario_text.ts";

const parse = (text: string, overrides: readonly string[] = []): Scenario =>
  parseScenario(text, "a.json", overrides);
/** Problems as `place: message`, without what all messages have in common. */
const refused = (text: string, overrides: readonly string[] = []): string[] =>
  problemsOf(() => parse(text, overrides)).map(({ place, message }) =>
    `${place}: ${message.replace(/^Cannot (read|use) scenario as /, "")}`
  );

const KINDS = "lamp, anode, monochromatedAluminum, band, table, thermal, laser";

Deno.test("parseScenario() fills in the defaults", () => {
  const scenario = parse(SCENARIO_TEXT);
  assert.equal(scenario.note, "");
  assert.deepEqual(scenario.sample, {
    material: "Au",
    materialFile: null,
    face: "polycrystalline",
    temperatureK: 300,
    workFunctionEv: null,
    barrier: "classical",
    transportMeanFreePathNm: null,
    densityOfStatesFile: null,
    meanFreePathFile: null,
    layers: [],
    surface: {
      patches: [],
      patchField: "strong",
      workFunctionSpreadEv: 0,
      facetTiltDeg: 0,
      extractionFieldVPerM: 0,
      dipoleDensityPerNm2: 0,
      dipoleMomentDebye: 0,
    },
    valenceMaximumBelowFermiEv: null,
    bandBending: null,
    charging: { shiftEv: 0, fwhmEv: 0 },
    fastMeanFreePath: "TPP-2M",
    lossFile: null,
    surfaceExcitationFactor: null,
  });
  assert.deepEqual(scenario.light, {
    kind: "lamp",
    lamp: "He I",
    satellites: true,
    photonFluxPerS: 5e9,
    polarization: "none",
  });
  assert.equal(scenario.acquisition.deadTimeS, 0);
  assert.equal(scenario.simulation.energyStepEv, 0.02);
  const short = parse(
    SCENARIO_TEXT.replace(/"(geometry|simulation)": \{.*\},?\n/g, "").replace(/,\s*\}$/, "}"),
  );
  assert.deepEqual(short.geometry, { incidenceAngleDeg: 45, emissionAngleDeg: 0 });
  assert.deepEqual(short.simulation, { histories: 20_000_000, seed: 1, energyStepEv: 0.02, maxLossEv: 100 });
});

Deno.test("parseScenario() allows comments and trailing commas and changes nothing for them", () => {
  const commented = SCENARIO_TEXT.replace("{", "// first\n{ /* second */").replace("300 }", "300, }")
    .replace(/\}$/, "} // last\n");
  assert.deepEqual(parse(commented), parse(SCENARIO_TEXT));
});

Deno.test("parseScenario() reports every problem at once, each with pointer, rule and value", () => {
  const text = SCENARIO_TEXT.replace('"Au"', '"au"').replace('"temperatureK": 300', '"temperature": 300')
    .replace('"incidenceAngleDeg": 45', '"incidenceAngleDeg": 95').replace('"passEnergyEv"', '"passenergy"')
    .replace('"biasV": -9', '"biasv": -9').replace('"dwellS": 0.5', '"dwellS": 0, "sweeps": 1.5')
    .replace('"stepEv": 0.02', '"stepEv": "0.02 eV"').replace('"title": "gold"', '"title": ""');
  assert.deepEqual(refused(text), [
    `/sample/material: material must be one of ${
      MATERIAL_IDS.join(", ")
    } (did you mean Au?), or that of a materialFile: current value is "au"`,
    '/title: title must be >= 1 characters: current value is ""',
    '/sample/temperature: every key must be known (did you mean temperatureK?): current value is "temperature"',
    "/geometry/incidenceAngleDeg: incidenceAngleDeg must be <= 89 degrees: current value is 95",
    '/analyzer/resolution/passEnergyEv: passEnergyEv must be given: current value is "nothing"',
    '/analyzer/resolution/passenergy: every key must be known (did you mean passEnergyEv?): current value is "passenergy"',
    '/acquisition/stepEv: stepEv must be a number in eV: current value is "0.02 eV"',
    "/acquisition/dwellS: dwellS must be > 0 s: current value is 0",
    "/acquisition/sweeps: sweeps must be a whole number: current value is 1.5",
    '/biasv: every key must be known (did you mean biasV?): current value is "biasv"',
  ]);
});

Deno.test("parseScenario() puts problem and place into the message", () => {
  assert.throws(() => parse(SCENARIO_TEXT.replace("300", "-4")), {
    name: "InputError",
    message:
      "Cannot read scenario as temperatureK must be >= 0 K: current value is -4 (at /sample/temperatureK)",
  });
});

// A value in the wrong unit or of the wrong kind, and what the message says.
Deno.test.each([
  [
    "sample.temperatureK=300 K",
    '/sample/temperatureK: temperatureK must be a number in K: current value is "300 K"',
  ],
  [
    "sample.temperatureK=26.85C",
    '/sample/temperatureK: temperatureK must be a number in K: current value is "26.85C"',
  ],
  [
    "sample.temperatureK=1e999",
    "/sample/temperatureK: temperatureK must be a number in K: current value is Infinity",
  ],
  [
    "sample.temperatureK=NaN",
    '/sample/temperatureK: temperatureK must be a number in K: current value is "NaN"',
  ],
  [
    "sample.workFunctionEv=5100",
    "/sample/workFunctionEv: workFunctionEv must be <= 10 eV: current value is 5100",
  ],
  ["biasV=-9 V", '/biasV: biasV must be a number in V: current value is "-9 V"'],
  ["biasV=", '/biasV: biasV must be a number in V: current value is ""'],
  ["biasV=20", "/biasV: biasV must be <= 10 V: current value is 20"],
  [
    "acquisition.dwellS=500 ms",
    '/acquisition/dwellS: dwellS must be a number in s: current value is "500 ms"',
  ],
  ["acquisition.deadTimeS=100", "/acquisition/deadTimeS: deadTimeS must be <= 0.001 s: current value is 100"],
  ["light.photonFluxPerS=0", "/light/photonFluxPerS: photonFluxPerS must be > 0 1/s: current value is 0"],
  [
    "light.lamp=HeI",
    `/light/lamp: lamp must be one of ${LAMP_NAMES.join(", ")} (did you mean He I?): current value is "HeI"`,
  ],
  ["light.kind=sun", `/light/kind: kind must be one of ${KINDS}: current value is "sun"`],
  ["light=lamp", '/light: light must be an object: current value is "lamp"'],
  [
    "sample.barrier=Quantum",
    '/sample/barrier: barrier must be one of classical, quantum (did you mean quantum?): current value is "Quantum"',
  ],
  ["simulation.seed=1.5", "/simulation/seed: seed must be a whole number: current value is 1.5"],
  ["simulation.histories=100", "/simulation/histories: histories must be >= 8192: current value is 100"],
  ["acquisition.endEv=5", '/acquisition/endEv: endEv must be > startEv (8.8 eV): current value is "5 eV"'],
  [
    "acquisition.endEv=8.8",
    '/acquisition/endEv: endEv must be > startEv (8.8 eV): current value is "8.8 eV"',
  ],
  [
    "acquisition.stepEv=5",
    '/acquisition/stepEv: the window of 20.2 eV must hold 10..100000 channels: current value is "5 eV"',
  ],
  [
    "acquisition.stepEv=0.0002",
    '/acquisition/stepEv: the window of 20.2 eV must hold 10..100000 channels: current value is "0.0002 eV"',
  ],
])("parseScenario() refuses %s", (override, problem) => {
  assert.deepEqual(refused(SCENARIO_TEXT, [override]), [problem]);
});

Deno.test("parseScenario() asks for the keys of the kind of light that was chosen", () => {
  assert.deepEqual(refused(SCENARIO_TEXT, ["light.kind=band"]), [
    '/light/centerEv: centerEv must be given: current value is "nothing"',
    '/light/lamp: every key must be known (known here: kind, centerEv, fwhmEv, photonFluxPerS, polarization): current value is "lamp"',
  ]);
  assert.deepEqual(refused(SCENARIO_TEXT.replace('"kind": "lamp", ', "")), [
    `/light/kind: kind must be one of ${KINDS}: current value is "nothing"`,
  ]);
});

Deno.test("parseScenario() names line and reason when the file is not JSON", () => {
  const [empty] = problemsOf(() => parse(""));
  assert.deepEqual(empty, {
    place: "a.json:1",
    message: 'Cannot read scenario as the file must be JSON (it is empty): current value is ""',
  });
  assert.match(problemsOf(() => parse("\n// nothing here\n"))[0].message, /it is empty/);
  const [broken] = problemsOf(() => parse(SCENARIO_TEXT.replace('"sample":', '"sample"')));
  assert.equal(broken.place, "a.json:3");
  assert.match(broken.message, /the file must be JSON \(ColonExpected\)/);
  for (let length = 0; length < SCENARIO_TEXT.length; length += 13) {
    const [cut] = problemsOf(() => parse(SCENARIO_TEXT.slice(0, length)));
    assert.match(cut.place, /^a\.json:\d+$/, `cut after ${length} characters`);
  }
});

Deno.test("parseScenario() refuses JSON that is no object and lists what must be given", () => {
  for (const text of ["[]", "3", "null", '"text"']) {
    assert.match(refused(text)[0], /^\/: scenario must be an object/);
  }
  assert.deepEqual(refused("{}").map((problem) => problem.split(":")[0]), [
    "/title",
    "/sample",
    "/light",
    "/analyzer",
    "/acquisition",
  ]);
});

Deno.test("parseScenario() refuses a key that is given twice instead of taking the last", () => {
  const text = SCENARIO_TEXT.replace('"material": "Au"', '"material": "Au", "material": "Ag"')
    .replace('"biasV": -9', '"biasV": -9, "biasV": -5');
  assert.deepEqual(refused(text), [
    '/sample/material: each key may be given once: current value is "material"',
    '/biasV: each key may be given once: current value is "biasV"',
  ]);
});

Deno.test("parseScenario() refuses keys with special names and escapes them in pointers", () => {
  // RFC 6901, section 3: ~ becomes ~0 and / becomes ~1.
  for (
    const [key, place] of [["__proto__", "/__proto__"], ["constructor", "/constructor"], [
      "a/b~c",
      "/a~1b~0c",
    ]]
  ) {
    const text = SCENARIO_TEXT.replace('"biasV": -9', `"biasV": -9, "${key}": { "biasV": 3 }`);
    assert.deepEqual(problemsOf(() => parse(text)).map((problem) => problem.place), [place]);
  }
});

/** The value a pointer leads to, or undefined (RFC 6901). */
function pointedAt(data: unknown, pointer: string): { found: boolean } {
  let inner = data;
  for (const step of pointer.split("/").slice(1)) {
    const key = step.replaceAll("~1", "/").replaceAll("~0", "~");
    if (typeof inner !== "object" || inner === null || !Object.hasOwn(inner, key)) return { found: false };
    inner = (inner as Record<string, unknown>)[key];
  }
  return { found: true };
}

Deno.test("parseScenario() either reads or refuses with InputError, whatever the JSON", () => {
  fc.assert(
    fc.property(fc.oneof(fc.json(), fc.string()), (text) => {
      assert.throws(() => parse(text), InputError);
    }),
    { seed: 1, numRuns: 200 },
  );
});

Deno.test("parseScenario() with any one value changed reads, or points at that value or its neighborhood", () => {
  const base = JSON.parse(SCENARIO_TEXT);
  const paths = (value: unknown, path: readonly string[] = []): string[][] =>
    typeof value === "object" && value !== null
      ? [[...path], ...Object.entries(value).flatMap(([key, inner]) => paths(inner, [...path, key]))]
      : [[...path]];
  const all = paths(base).filter((path) => path.length > 0);
  fc.assert(
    fc.property(fc.constantFrom(...all), fc.jsonValue({ maxDepth: 2 }), (path, value) => {
      const data = structuredClone(base);
      const parent = path.slice(0, -1).reduce((inner, key) => inner[key], data);
      parent[path[path.length - 1]] = value;
      try {
        resolveScenario(parse(JSON.stringify(data)));
      } catch (error) {
        assert.ok(error instanceof InputError, String(error));
        for (const { place } of error.problems) {
          const near = place.startsWith(`/${path[0]}`) || ["biasV", "acquisition"].includes(path[0]);
          assert.ok(near, `${place} for a change at ${path}`);
          // A missing key is named below an object that is there; everything else is there.
          const holder = place.slice(0, place.lastIndexOf("/"));
          assert.ok(pointedAt(data, place).found || pointedAt(data, holder).found, place);
        }
      }
    }),
    { seed: 1, numRuns: 200 },
  );
});
