import assert from "node:assert/strict";
import { InputError } from "../../src/base/mod.ts";
import { parseScenario } from "../../src/scenario/mod.ts";
import { checkSweepPaths, parseSweep } from "../../src/sweep/mod.ts";
import { QUICK_GOLD, sweepText } from "../support/sweep_text.ts";

/** Messages with their places of what is refused. */
function problems(read: () => unknown): string[] {
  try {
    read();
  } catch (error) {
    if (error instanceof InputError) return error.message.split("\n");
    throw error;
  }
  return [];
}

Deno.test("parseSweep() fills defaults in and allows comments and trailing commas", () => {
  const sweep = parseSweep(`// invented\n${sweepText().replace(/}$/, ",}")}`, "sweep.json");
  assert.deepEqual([sweep.seeds, sweep.seed, sweep.record.spectra, sweep.note], [
    "independent",
    1,
    false,
    "",
  ]);
});

/** What is wrong, the changed keys, and the whole message. */
const REFUSED: readonly (readonly [string, Record<string, unknown>, string])[] = [
  [
    "an unknown key",
    { axis: [] },
    'Cannot read sweep as every key must be known: current value is "axis" (at /axis)',
  ],
  [
    "no axes",
    { axes: [] },
    'Cannot read sweep as axes must have a number of entries >= 1: current value is "[]" (at /axes)',
  ],
  [
    "an unknown kind of axis",
    { axes: [{ kind: "grid", path: "biasV" }] },
    'Cannot read sweep as kind must be one of list, range, zip, sample (in a zip: list, range): current value is "grid" (at /axes/0/kind)',
  ],
  [
    "a range of one value",
    { axes: [{ kind: "range", path: "biasV", from: 1, to: 2, count: 1 }] },
    "Cannot read sweep as count must be >= 2: current value is 1 (at /axes/0/count)",
  ],
  [
    "a range without length",
    { axes: [{ kind: "range", path: "biasV", from: 2, to: 2, count: 3 }] },
    "Cannot use sweep as to must differ from from: current value is 2 (at /axes/0/to)",
  ],
  [
    "a logarithmic range through zero",
    { axes: [{ kind: "range", path: "biasV", from: 0, to: 2, count: 3, scale: "log" }] },
    "Cannot use sweep as both ends of a logarithmic range must be > 0: current value is 0 (at /axes/0/from)",
  ],
  [
    "a value given twice",
    { axes: [{ kind: "list", path: "biasV", values: [1, 2, 1] }] },
    'Cannot use sweep as the values of a list must differ: current value is "1" (at /axes/0/values/2)',
  ],
  [
    "zipped axes of unequal length",
    {
      axes: [{
        kind: "zip",
        axes: [
          { kind: "list", path: "biasV", values: [1, 2] },
          { kind: "list", path: "sample.temperatureK", values: [1, 2, 3] },
        ],
      }],
    },
    'Cannot use sweep as axes that advance together must have equally many values: current value is "2 and 3" (at /axes/0/axes)',
  ],
  [
    "two axes over one value",
    {
      axes: [
        { kind: "list", path: "analyzer.resolution", values: [1] },
        { kind: "list", path: "analyzer.resolution.fwhmEv", values: [1, 2] },
      ],
    },
    'Cannot use sweep as each value of the scenario may be set by one axis (analyzer.resolution is at /axes/0/path): current value is "analyzer.resolution.fwhmEv" (at /axes/1/path)',
  ],
  [
    "seeds that would not be used",
    { axes: [{ kind: "list", path: "simulation.seed", values: [1, 2] }] },
    'Cannot use sweep as simulation.seed may be swept when seeds is "common", independent points have seeds of their own: current value is "simulation.seed" (at /axes/0/path)',
  ],
  [
    "a path that is none",
    { axes: [{ kind: "list", path: "sample.", values: [1] }] },
    'Cannot read sweep as path must be keys joined by dots such as sample.temperatureK: current value is "sample." (at /axes/0/path)',
  ],
  [
    "more than ten dimensions of a sample",
    {
      axes: [{
        kind: "sample",
        method: "sobol",
        count: 4,
        axes: Array.from({ length: 11 }, (_, i) => ({ path: `p${i}`, from: 0, to: 1 })),
      }],
    },
    "Cannot read sweep as axes must have a number of entries <= 10: current value is ",
  ],
  [
    "too many points",
    {
      axes: ["a", "b", "c"].map((path) => ({ kind: "range", path, from: 0, to: 1, count: 1000 })),
    },
    "Cannot use sweep as there must be at most 10000000 points: current value is 1000000000 (at /axes)",
  ],
];
for (const [what, changes, message] of REFUSED) {
  Deno.test(`parseSweep() refuses ${what} and says where`, () => {
    const [first, ...others] = problems(() => parseSweep(sweepText(changes), "sweep.json"));
    assert.deepEqual(others, []);
    assert.ok(first.startsWith(message), first);
  });
}

Deno.test("parseSweep() suggests the nearest name of a value to record", () => {
  const [message] = problems(() =>
    parseSweep(sweepText({ record: { values: ["fit.workFunction"] } }), "sweep.json")
  );
  assert.match(message, /did you mean fit\.workFunctionEv\?.* \(at \/record\/values\/0\)$/);
});

Deno.test("parseSweep() reports all problems at once, and the line of text that is no JSON", () => {
  const changes = { title: "", axes: [{ kind: "range", path: "biasV", from: "low", to: 1, count: 2 }] };
  assert.equal(problems(() => parseSweep(sweepText(changes), "sweep.json")).length, 2);
  assert.match(problems(() => parseSweep('{\n"title": oh no }', "sweep.json"))[0], /\(at sweep\.json:2\)$/);
  assert.match(problems(() => parseSweep("", "sweep.json"))[0], /must be JSON/);
  const twice = sweepText().replace('"title"', '"title": "other", "title"');
  assert.match(
    problems(() => parseSweep(twice, "sweep.json"))[0],
    /each key may be given once.* \(at \/title\)$/,
  );
});

Deno.test("checkSweepPaths() refuses a path that the scenario does not know, with the nearest one", () => {
  const scenario = parseScenario(QUICK_GOLD, "gold.json");
  const axes = [
    { kind: "list", path: "sample.temperature", values: [1] },
    { kind: "list", path: "geometry.emissionAngleDeg", values: [1] }, // a default of the scenario
    { kind: "list", path: "analyzer.resolution", values: [{ kind: "fwhm", fwhmEv: 0.1 }] },
  ];
  const sweep = parseSweep(sweepText({ axes }), "sweep.json");
  assert.deepEqual(problems(() => checkSweepPaths(sweep, scenario)), [
    'Cannot use sweep as path must be in the scenario with its defaults (did you mean sample.temperatureK?): current value is "sample.temperature" (at /axes/0/path)',
  ]);
});
