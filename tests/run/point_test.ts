import assert from "node:assert/strict";
import { readSpectrumCsv } from "../../src/formats/mod.ts";
import { PointRunner } from "../../src/run/mod.ts";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { parseSweep, planPoint, type PointJob } from "../../src/sweep/mod.ts";
import { QUICK_GOLD, sweepText } from "../support/sweep_text.ts";
import { inFolder, twoedge } from "../support/twoedge.ts";

async function job(settings: Record<string, string | number>, value = "peakCounts"): Promise<PointJob> {
  const sweep = parseSweep(sweepText({ record: { values: [value], spectra: true } }), "sweep.json");
  const point = await planPoint(
    sweep,
    0,
    settings,
    (set) => resolveScenario(parseScenario(QUICK_GOLD, "gold.json", set)),
  );
  assert.ok(point.job !== null, point.reason);
  return point.job;
}

Deno.test("PointRunner gives the same bits from a shared tally as from a run of its own", async () => {
  const settings = [
    {},
    { "light.photonFluxPerS": 4e9 },
    { "analyzer.resolution.fwhmEv": 0.2, "acquisition.stepEv": 0.08 },
    { "acquisition.dwellS": 3, "acquisition.deadTimeS": 1e-6, "acquisition.darkRateCountsPerS": 2 },
    { "analyzer.transmissionExponent": 1 },
    { biasV: -8, "analyzer.workFunctionEv": 3.4 },
  ];
  const jobs = await Promise.all(settings.map((one) => job(one)));
  assert.equal(new Set(jobs.map(({ engineKey }) => engineKey)).size, 1);
  const shared = new PointRunner();
  const results = jobs.map((one) => shared.run(one));
  jobs.forEach((one, i) =>
    assert.deepEqual(results[i], new PointRunner().run(one), JSON.stringify(settings[i]))
  );
  assert.equal(new Set(results.map((result) => String(result?.spectrum?.counts))).size, jobs.length);
});

Deno.test("PointRunner goes on to other tables, seeds and histories without a trace of the earlier ones", async () => {
  const jobs = await Promise.all(
    [{}, { biasV: -7 }, { biasV: -7, "simulation.histories": 20000 }, {}].map((one) => job(one)),
  );
  const runner = new PointRunner();
  const results = jobs.map((one) => runner.run(one));
  assert.deepEqual(results[3], results[0]);
  results.slice(0, 3).forEach((result, i) => assert.deepEqual(result, new PointRunner().run(jobs[i])));
  assert.deepEqual(results.map((result) => result?.values.histories), [8192, 8192, 20480, 8192]);
});

Deno.test("PointRunner gives nothing when stopped", async () => {
  let asked = 0;
  assert.equal(new PointRunner().run(await job({}), () => ++asked > 1), null);
});

Deno.test("PointRunner gives what simulate and fit give with the recorded seed and replicate", async () => {
  const settings = {
    biasV: -8,
    "light.photonFluxPerS": 5e9,
    "analyzer.resolution.fwhmEv": 0.15,
    "acquisition.startEv": 7.8,
    "acquisition.stepEv": 0.05,
    "simulation.energyStepEv": 0.05,
    "simulation.histories": 400_000,
  };
  const one = await job(settings, "fit.workFunctionEv");
  const result = new PointRunner().run(one);
  await inFolder({ "gold.json": QUICK_GOLD }, async (folder) => {
    const set = Object.entries(settings).flatMap(([path, value]) => ["--set", `${path}=${value}`]);
    const seeds = ["--seed", `${one.resolved.seed}`, "--replicate", `${one.replicate}`];
    const args = ["simulate", "gold.json", "--out", "a", "--json", ...set, ...seeds];
    const simulated = await twoedge(folder, ...args);
    assert.equal(simulated.code, 0, simulated.stderr);
    const summary = JSON.parse(simulated.stdout);
    assert.equal(summary.scenarioHash, one.scenarioHash);
    assert.equal(summary.peakCounts, result?.values.peakCounts);
    assert.equal(summary.truth.cutoffEv, result?.values["truth.cutoffEv"]);
    assert.equal(summary.electronsPerPhoton.forced, result?.values["electronsPerPhoton.forced"]);
    const csv = Deno.readTextFileSync(`${folder}/a/spectrum.csv`);
    const columns = ["kinetic_energy_ev", "counts"] as const;
    assert.deepEqual(
      readSpectrumCsv(csv, "spectrum.csv", { columns }).regions[0].counts,
      result?.spectrum?.counts,
    );
    const fitted = JSON.parse((await twoedge(folder, "fit", "a/spectrum.csv", "--json")).stdout);
    assert.equal(fitted.verdict, result?.values["fit.verdict"]);
    assert.ok(fitted.workFunctionEv !== null);
    for (const quantity of ["workFunctionEv", "cutoffEv", "fermiEdgeEv"] as const) {
      assert.equal(fitted[quantity]?.value ?? null, result?.values[`fit.${quantity}`], quantity);
      assert.equal(
        fitted[quantity]?.standardUncertainty ?? null,
        result?.values[`fit.${quantity.replace(/Ev$/, "StandardUncertaintyEv")}`],
      );
    }
  });
});
