import assert from "node:assert/strict";
import { fowlerYieldEv2, planeRetardedYieldEv2 } from "../../src/emission/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { inFolder, namesIn, twoedge } from "../support/twoedge.ts";

/** Exact yields, currents and energies written with six digits; uncertainties far above that rounding. */
const FOWLER = [
  "# temperature_k: 300",
  "photon_energy_ev,yield,yield_uncertainty",
  ...[4.4, 4.5, 4.6, 4.7, 4.8, 4.9, 5].map((energy) =>
    `${energy},${fowlerYieldEv2(energy, 4.55, 300).toFixed(6)},0.001`
  ),
].join("\n");

const STOPPING = [
  "# temperature_k: 300",
  "# geometry: plane",
  "# contact_potential_v: 2.7",
  "# contact_potential_uncertainty_v: 0.02",
  "photon_energy_ev,retarding_v,current_a,current_uncertainty_a",
  ...[5.2, 5.6, 6].flatMap((energy) =>
    Array.from({ length: 40 }, (_, i) => {
      const voltage = Number((energy - 6.5 + 0.05 * i).toFixed(3));
      // Emitter 2.3 eV, collector 5.0 eV.
      const current = 1e-10 * planeRetardedYieldEv2(voltage + 2.7, energy - 2.3, 300) - 3e-12;
      return `${energy},${voltage},${current.toExponential(6)},1e-12`;
    })
  ),
].join("\n");

/** R. A. Millikan, Phys. Rev. 7, 355 (1916): sodium; frequencies from his wavelengths. */
const MILLIKAN = [
  "frequency_hz,frequency_uncertainty_hz,stopping_potential_v,stopping_potential_uncertainty_v",
  ...[[5461, -2.050], [4339, -1.492], [4047, -1.300], [3650, -0.919], [3126, -0.380]].map(
    ([angstrom, volt]) => `${299792458e10 / angstrom},0,${volt},0.007`,
  ),
].join("\n");

const BIAS =
  "bias_v,work_function_ev,work_function_uncertainty_ev\n-3,5.11,0.01\n-9,5.1,0.01\n-6,5.1,0.01\n-12,5.11,0.01\n";

async function answer(kind: string, csv: string) {
  return await inFolder({ "series.csv": csv }, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "series", kind, "series.csv", "--json");
    assert.deepEqual([code, stderr], [0, ""]);
    return JSON.parse(stdout);
  });
}

Deno.test("series fowler gives the emitter's work function", async () => {
  const result = await answer("fowler", FOWLER);
  assertClose(result.workFunctionEv.value, 4.55, { absolute: 1e-3 });
  assert.equal(result.workFunctionOf, "emitter");
  assert.equal(result.temperatureK, 300);
});

Deno.test("series stopping gives the collector's work function, and the emitter's by the contact potential", async () => {
  const result = await answer("stopping", STOPPING);
  assert.equal(result.curves.length, 3);
  for (const curve of result.curves) {
    assertClose(curve.workFunctionEv.value, 5, { absolute: 1e-3 });
    assert.equal(curve.workFunctionOf, "collector");
    assertClose(curve.emitterWorkFunctionEv.value, 2.3, { absolute: 1e-3 });
    assertClose(curve.backCurrentA.value, 3e-12, { relative: 0.01 });
  }
  assertClose(result.line.planckEvS.value, 4.135667697e-15, { relative: 1e-3 }, "CODATA 2022");
});

Deno.test("series stopping leaves out a curve without a number and says why", async () => {
  const leaking = STOPPING.split("\n").map((line) => {
    const [energy, voltage, current, uncertainty] = line.split(",");
    if (energy !== "6") return line;
    return [energy, voltage, Number(current) - 1e-10 * (Number(voltage) + 0.5) ** 2, uncertainty].join(",");
  }).join("\n");
  await inFolder({ "series.csv": leaking }, async (folder) => {
    const { code, stdout } = await twoedge(folder, "series", "stopping", "series.csv");
    assert.equal(code, 1);
    assert.match(
      stdout,
      /\nLeft out: 6 eV, as chi-square per degree of freedom is [^\n]+, above 10, in every part/,
    );
    assert.equal(stdout.match(/stopping potential +-?[\d.]+\(\d+\) V/g)?.length, 2);
  });
});

Deno.test("series kemax gives h/e within 1 % from the sodium line of 1916", async () => {
  const result = await answer("kemax", MILLIKAN);
  assertClose(result.planckEvS.value, 4.135667697e-15, { relative: 0.01 }, "CODATA 2022");
  assert.equal(result.workFunctionOf, "collector");
  assert.equal(result.planckExactEvS.toPrecision(10), "4.135667697e-15");
});

Deno.test("series bias and temperature sort their rows and give the mean or the slope", async () => {
  const bias = await answer("bias", BIAS);
  assert.equal(bias.verdict, "good");
  assertClose(bias.workFunctionEv.value, 5.105, { absolute: 1e-9 }, "mean of the four");
  const temperature = await answer(
    "temperature",
    "temperature_k,work_function_ev,work_function_uncertainty_ev\n300,4.54,0.01\n100,4.58,0.01\n200,4.56,0.01\n",
  );
  assertClose(temperature.slopeEvPerK.value, -2e-4, { relative: 1e-9 });
});

Deno.test("series --out writes the answer and a figure", async () => {
  await inFolder({ "steps.csv": BIAS }, async (folder) => {
    const { code, stdout } = await twoedge(folder, "series", "bias", "steps.csv", "--out", "out");
    assert.equal(code, 0);
    assert.match(stdout, /^Verdict: good\n[^]*work function +5\.1050\(50\) eV\n/);
    assert.deepEqual(namesIn(`${folder}/out`), ["series.json", "series.svg"]);
    const svg = await Deno.readTextFile(`${folder}/out/series.svg`);
    assert.match(svg, /Sample bias \/ V/);
    assert.match(svg, /Work function \/ eV/);
    assert.match(svg, /work function 5\.1050\(50\) eV, verdict: good/);
  });
});

Deno.test("series refuses files that break a rule, with place and value, and prints no number", async () => {
  const cases: [string, string, RegExp][] = [
    [
      "fowler",
      FOWLER.replace("# temperature_k: 300\n", ""),
      /a line "# temperature_k: NUMBER" must be in the file/,
    ],
    [
      "fowler",
      FOWLER.replace("temperature_k", "temperatur_k"),
      /did you mean temperature_k\?.*series\.csv:1\)/,
    ],
    ["fowler", FOWLER.replace("yield_uncertainty", "sigma"), /there must be a column yield_uncertainty/],
    ["fowler", FOWLER.replace("0.001", "0,001"), /it must have 3 cells like the header.*series\.csv:3\)/],
    ["fowler", FOWLER.replace("0.001", "nan"), /a cell must be a decimal number with a point.*"nan"/],
    ["fowler", FOWLER.replace("4.4,", "9.9,"), /photonEnergiesEv\[1\] must be > 0 eV and ascending/],
    ["stopping", STOPPING.replace("plane", "flat"), /it must be plane or sphere: current value is "flat"/],
    ["bias", "bias_v,work_function_ev,work_function_uncertainty_ev\n", /there must be rows of numbers/],
    ["bias", BIAS.replace("0.01", "0"), /standard uncertainty of work function \d must be > 0 eV/],
    [
      "bias",
      `# temperature_k: 300\n${BIAS}`,
      /read the key as there must be none: current value is "temperature_k"/,
    ],
    ["nothing", BIAS, /must be one of fowler, stopping, kemax, bias, temperature/],
  ];
  await Promise.all(cases.map(([kind, csv, message]) =>
    inFolder({ "series.csv": csv }, async (folder) => {
      const { code, stdout, stderr } = await twoedge(folder, "series", kind, "series.csv", "--out", "out");
      assert.deepEqual([code, stdout], [2, ""], stderr);
      assert.match(stderr, message);
      assert.deepEqual(namesIn(folder), ["series.csv"]);
    })
  ));
  await inFolder({}, async (folder) => {
    assert.equal((await twoedge(folder, "series", "bias", "missing.csv")).code, 3);
  });
});
