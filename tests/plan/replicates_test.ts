import assert from "node:assert/strict";
import { engineData, expectedSpectrum } from "../../src/model/mod.ts";
import { planFacts, planRun, ratesFrom, replicateRun } from "../../src/plan/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { FACTS, RATES } from "../support/plan_edges.ts";

const RUNS = 150;

/**
 * Passes when the scatter is within 15 % of the prediction: 2.6 standard errors, 5.8 %, of a standard deviation of 150
 * normal values; false alarm 1 in 100 for a new seed. A prediction 40 % too large passes once in 2000.
 */
const agrees = (ratio: number): boolean => Math.abs(ratio - 1) < 0.15;

Deno.test("replicateRun() scatters as planRun() predicts for gold under the helium lamp", async () => {
  const file = new URL("../../scenarios/clean_gold_he1.json", import.meta.url);
  const resolved = resolveScenario(parseScenario(await Deno.readTextFile(file), "clean_gold_he1.json"));
  const engine = engineData(resolved);
  const { counts: expectedCounts, ...spectrum } = expectedSpectrum(
    resolved,
    engine,
    runSeries(engine, 1, 250),
  );
  const facts = planFacts(resolved);
  const rates = ratesFrom({ ...spectrum, expectedCounts }, facts.timePerChannelS);
  const plan = planRun(rates, facts, { targetEv: 0.005, limits: [] });
  assert.equal(plan.status, "reached", plan.reason);
  // What was put in, W = 5.1 eV: cutoff at W - W_A - e U, Fermi level at h nu - W_A - e U.
  assertClose(facts.cutoffEv, 5.1 - 4.4 + 9, { absolute: 1e-9 });
  assertClose(facts.fermiLevelEv, 21.218 - 4.4 + 9, { absolute: 1e-3 });
  const { quantity, statisticalEv } = plan.numbers!;
  const runs = replicateRun(rates, facts, plan.windows, { runs: RUNS, seed: 1, quantity, statisticalEv });
  assert.ok(agrees(runs.ratio), `ratio ${runs.ratio}`);
  assert.ok(!agrees(runs.ratio / 1.4), "a prediction 40 % too large must be refused");
  assert.ok(runs.failures <= 0.05 * RUNS);
  assertClose(runs.meanEv, 5.1, { absolute: 0.004 });
  assertClose(runs.ratioStandardError, runs.ratio / Math.sqrt(2 * (RUNS - runs.failures - 1)), {
    relative: 1e-12,
  });
});

Deno.test("replicateRun() gives the same runs for the same seed and others for another", () => {
  const plan = planRun(RATES, FACTS, { targetEv: 0.002, limits: [] });
  const run = (seed: number): Float64Array =>
    replicateRun(RATES, FACTS, plan.windows, { runs: 10, seed, quantity: "workFunctionEv", statisticalEv: 1 })
      .valuesEv;
  assert.deepEqual(run(1), run(1));
  assert.notDeepEqual(run(1), run(2));
});

Deno.test("replicateRun() refuses fewer than ten runs", () => {
  const options = { runs: 9, seed: 1, quantity: "workFunctionEv", statisticalEv: 1 } as const;
  assert.throws(() => replicateRun(RATES, FACTS, [], options), {
    name: "RangeError",
    message: "Cannot replicate a run as there must be at least 10 runs: current value is 9",
  });
});
