import assert from "node:assert/strict";
import { attenuated, planRun, type PlanTarget, planWithinRate, type RunPlan } from "../../src/plan/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { DARK, FACTS, RATES, STEP_EV } from "../support/plan_edges.ts";

const TARGET: PlanTarget = { targetEv: 0.001, limits: [] };
const plan = planRun(RATES, FACTS, TARGET);
const varianceTimes = ({ numbers }: RunPlan): number[] => numbers!.edges.map((edge) => edge.varianceTimeEv2S);
const totalS = ({ windows }: RunPlan): number => windows.reduce((sum, { timeS }) => sum + timeS, 0);

Deno.test("planRun() reaches the target in the least time, split as the square roots of the variances", () => {
  assert.equal(plan.status, "reached");
  assert.ok(plan.uncertaintyEv <= 0.001 * (1 + 1e-9));
  assertClose(plan.timeS, plan.leastTimeS, { relative: 1e-6 });
  const [cutoff, edge] = plan.windows;
  const [a, b] = varianceTimes(plan);
  // Neyman: t_1 / t_2 = sqrt(v_1 / v_2).
  assertClose(cutoff.timeS / edge.timeS, Math.sqrt(a / b), { relative: 1e-6 });
  // From the parts: v_1 / t_1 + v_2 / t_2 + floor^2 is the target squared; a tenth less time misses it.
  const after = (share: number): number =>
    Math.sqrt(a / (share * cutoff.timeS) + b / (share * edge.timeS) + plan.numbers!.floorEv ** 2);
  assertClose(after(1), 0.001, { relative: 1e-6 });
  assert.throws(() => assertClose(after(0.9), 0.001, { relative: 1e-6 }));
});

Deno.test("planRun() gives windows that can be set: whole sweeps, channels, and counts at which to stop", () => {
  for (
    const { fromEv, toEv, stepEv, channels, dwellS, sweeps, timeS, peakCounts, peakCountsPerS } of plan
      .windows
  ) {
    assert.ok(Number.isInteger(sweeps) && sweeps >= 2);
    assert.equal(stepEv, STEP_EV);
    assertClose((toEv - fromEv) / STEP_EV + 1, channels, { relative: 1e-9 });
    assert.ok(dwellS <= FACTS.dwellS);
    assertClose(channels * dwellS * sweeps, timeS, { relative: 1e-12 });
    assertClose(peakCounts, peakCountsPerS * dwellS * sweeps, { relative: 1e-12 });
  }
});

Deno.test("planRun() says what one minute more of its own windows changes, also where sweeps are not split ideally", () => {
  // So coarse a target takes a second or so, and the least dwell of a channel then sets the split.
  const coarse = planRun(RATES, FACTS, { ...TARGET, targetEv: 0.02 });
  for (const one of [plan, coarse]) {
    const { windows, timeS, numbers, uncertaintyEv, nextMinuteEv } = one;
    const variances = varianceTimes(one);
    const after = (times: readonly number[]): number =>
      Math.sqrt(variances.reduce((sum, v, i) => sum + v / times[i], numbers!.floorEv ** 2));
    const longer = windows.map((window) => window.timeS * (1 + 60 / timeS));
    assertClose(uncertaintyEv + nextMinuteEv, after(longer), { relative: 1e-9 });
    assert.throws(() =>
      assertClose(uncertaintyEv + nextMinuteEv, after(windows.map(({ timeS }) => timeS)), {
        relative: 1e-9,
      })
    );
  }
});

Deno.test("planRun() takes half the time to measure twice the rate", () => {
  // Poisson: the information of a window is proportional to rate times time.
  const bright = planRun({ ...RATES, countsPerS: RATES.countsPerS.map((rate) => 2 * rate) }, FACTS, TARGET);
  assertClose(bright.leastTimeS, plan.leastTimeS / 2, { relative: 0.01 });
});

Deno.test("planRun() takes the same time with every second channel", () => {
  // The step is a quarter of the standard deviation: sums over channels are still integrals (trapezoid rule).
  const half = (values: Float64Array): Float64Array => values.filter((_, i) => i % 2 === 0);
  const coarse = {
    energiesEv: half(RATES.energiesEv),
    countsPerS: half(RATES.countsPerS),
    standardErrors: half(RATES.standardErrors),
  };
  const same = planRun(coarse, { ...FACTS, stepEv: 2 * STEP_EV }, TARGET);
  assertClose(same.leastTimeS, plan.leastTimeS, { relative: 0.04 });
});

Deno.test("planRun() draws windows in where that saves time", () => {
  const narrow = planRun(RATES, FACTS, TARGET, { drawIn: true });
  assert.equal(narrow.status, "reached");
  assert.ok(narrow.leastTimeS < plan.leastTimeS, `${narrow.leastTimeS} against ${plan.leastTimeS}`);
  narrow.windows.forEach((window, i) => {
    const { positionEv } = narrow.numbers!.edges[i];
    assert.ok(window.fromEv < positionEv - 0.2 && window.toEv > positionEv + 0.2);
  });
});

Deno.test("planRun() keeps to the least limit, and names it, when the target takes longer", () => {
  const limits = [
    { name: "--hours", timeS: plan.leastTimeS / 4, byLight: false },
    { name: "--max-dose", timeS: plan.leastTimeS, byLight: true },
  ];
  const limited = planRun(RATES, FACTS, { ...TARGET, limits });
  assert.equal(limited.status, "limited");
  assert.match(limited.reason, /^1\.00 meV would take .* s, and --hours allows /);
  assert.ok(totalS(limited) <= limits[0].timeS * (1 + 1e-9));
  // A quarter of the time, twice the counting uncertainty.
  assertClose(limited.numbers!.statisticalEv, 2 * plan.numbers!.statisticalEv, { relative: 0.02 });
  assertClose(limited.leastTimeS, plan.leastTimeS, { relative: 0.02 });
});

Deno.test("planRun() names the term that no time lowers when the target is below the floor", () => {
  // A work function 10 meV from where the fit finds it: the floor is 10 meV.
  const facts = { ...FACTS, workFunctionEv: FACTS.workFunctionEv! + 0.01 };
  const stopped = planRun(RATES, facts, { targetEv: 0.01, limits: [] });
  assert.equal(stopped.status, "floor");
  assert.equal(stopped.leastTimeS, Infinity);
  assert.match(
    stopped.reason,
    /^no time reaches 10\.0 meV: 10\.0 meV do not shrink with time, most of it the fit's model/,
  );
  // Time goes into a third of the floor by counting, 5 % more together.
  assertClose(stopped.uncertaintyEv, 0.01 * Math.sqrt(1 + 1 / 9), { relative: 0.01 });
  assert.ok(stopped.findings.some(({ code }) => code === "fit-off"));
});

Deno.test("planRun() fails with a reason when there is no edge", () => {
  const flat = planRun({ ...RATES, countsPerS: RATES.countsPerS.map(() => DARK) }, FACTS, TARGET);
  assert.equal(flat.status, "failed");
  assert.match(flat.reason, /^the fit of the simulated spectrum fails: no secondary cutoff was found/);
  assert.deepEqual(flat.windows, []);
});

Deno.test("planRun() warns of a resolution much finer than the thermal width, and not of one that matches", () => {
  const codes = (resolutionFwhmEv: number): string[] =>
    planRun(RATES, { ...FACTS, resolutionFwhmEv }, TARGET).findings.map(({ code }) => code);
  // The thermal width at 300 K is 3.53 kT = 91 meV.
  assert.ok(codes(0.03).includes("resolution-finer-than-temperature"));
  assert.ok(!codes(0.0942).includes("resolution-finer-than-temperature"));
});

Deno.test("planRun() refuses targets and limits that are not above zero, all at once", () => {
  const limits = [{ name: "--hours", timeS: 0, byLight: false }];
  assert.throws(() => planRun(RATES, FACTS, { targetEv: 0, limits }), {
    name: "InputError",
    message: 'Cannot plan as --target-ev must be > 0 eV: current value is "0 eV" (at --target-ev)\n' +
      'Cannot plan as --hours must be > 0 s: current value is "0 s" (at --hours)',
  });
});

Deno.test("attenuated() takes dead time out and puts it in again", () => {
  const facts = { darkRateCountsPerS: 20, deadTimeS: 1e-5 };
  // 8020 electrons a second, 20 of them dark, of which a counter of 10 microseconds dead time records n / (1 + n tau).
  const recorded = (arriving: number): number => arriving / (1 + arriving * 1e-5);
  const rates = {
    energiesEv: Float64Array.of(1),
    countsPerS: Float64Array.of(recorded(8020)),
    standardErrors: Float64Array.of(1 / 1.0802 ** 2),
  };
  const { countsPerS, standardErrors } = attenuated(rates, facts, 0.25);
  assertClose(countsPerS[0], recorded(2020), { relative: 1e-12 });
  assertClose(standardErrors[0], 0.25 / 1.0202 ** 2, { relative: 1e-12 });
});

Deno.test("planWithinRate() takes the light that the count rate allows, for as much longer as a dose lasts", () => {
  const limits = [{ name: "--max-dose", timeS: plan.leastTimeS / 2, byLight: true }];
  const { plan: dim, lightShare } = planWithinRate(RATES, FACTS, { ...TARGET, limits }, {
    mostCountsPerS: 1010,
  });
  // 2000 counts/s of the top on 20 dark ones: (1010 - 20) / 2000.
  assertClose(lightShare, 0.495, { relative: 1e-3 });
  assertClose(Math.max(...dim.windows.map((window) => window.peakCountsPerS)), 1010, { relative: 1e-9 });
  assert.equal(dim.status, "limited");
  assertClose(totalS(dim), limits[0].timeS / lightShare, { relative: 1e-6 });
});

Deno.test("planWithinRate() takes all the light when the rate is no limit, and refuses a limit below the dark rate", () => {
  assert.equal(planWithinRate(RATES, FACTS, TARGET, { mostCountsPerS: 1e5 }).lightShare, 1);
  assert.throws(() => planWithinRate(RATES, FACTS, TARGET, { mostCountsPerS: 10 }), {
    name: "InputError",
    message: "Cannot plan as --max-rate must be above the dark rate of 20 counts/s: current value is " +
      '"10 counts/s" (at --max-rate)',
  });
});
