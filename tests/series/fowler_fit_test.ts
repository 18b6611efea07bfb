import assert from "node:assert/strict";
import { fowlerYieldEv2 } from "../../src/emission/mod.ts";
import { fitFowler, type FowlerSeries } from "../../src/series/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { normalDraws, pullsAreNormal } from "../support/normal.ts";

const WORK_FUNCTION_EV = 4.5;
const AMPLITUDE = 3e-4;
const ENERGIES_EV = Array.from({ length: 16 }, (_, i) => 4.4 + 0.06 * i);

/** Yields of a metal at 300 K: 3 % noise and a floor of a hundredth of the yield 0.3 eV above threshold. */
function series(normal: () => number, changes: Partial<FowlerSeries> = {}): FowlerSeries {
  const exact = ENERGIES_EV.map((energy) => AMPLITUDE * fowlerYieldEv2(energy, WORK_FUNCTION_EV, 300));
  const yieldUncertainties = exact.map((value) => Math.hypot(0.03 * value, AMPLITUDE * 4.5e-4));
  return {
    photonEnergiesEv: ENERGIES_EV,
    yields: exact.map((value, i) => value + yieldUncertainties[i] * normal()),
    yieldUncertainties,
    temperatureK: 300,
    bandFwhmEv: 0,
    ...changes,
  };
}

Deno.test("fitFowler() covers the work function as promised, and doubts good yields seldom", () => {
  // 400 replicates; false alarm: see pullsAreNormal(). Verdicts: at most 5 % may be doubtful, 2 % are expected.
  const normal = normalDraws(5);
  const fits = Array.from({ length: 400 }, () => fitFowler(series(normal)));
  const pulls = fits.map(({ workFunctionEv }) =>
    (workFunctionEv!.value - WORK_FUNCTION_EV) / workFunctionEv!.standardUncertainty
  );
  assert.ok(pullsAreNormal(pulls));
  assert.ok(!pullsAreNormal(pulls.map((pull) => 2 * pull)));
  const doubtful = fits.filter(({ verdict }) => verdict !== "good").length;
  assert.ok(doubtful <= 20, `${doubtful} of 400 good series are doubtful`);
  assert.equal(fits[0].workFunctionOf, "emitter");
  // The square law alone would give the same sign: a larger work function needs a larger amplitude.
  assert.ok(fits[0].correlation! > 0.5);
});

Deno.test("fitFowler() with a wrong temperature or a foreign background is doubtful", () => {
  // 100 replicates each; the wrong models must be found in at least 95 % of them.
  const normal = normalDraws(6);
  const verdicts = (change: (good: FowlerSeries) => FowlerSeries): number =>
    Array.from({ length: 100 }, () => fitFowler(change(series(normal))))
      .filter(({ verdict }) => verdict === "doubtful").length;
  assert.ok(verdicts((good) => ({ ...good, temperatureK: 900 })) >= 95, "temperature");
  const light = AMPLITUDE * 0.01;
  assert.ok(
    verdicts((good) => ({ ...good, yields: Array.from(good.yields, (value) => value + light) })) >= 95,
    "stray light",
  );
});

Deno.test("fitFowler() folds the band of the light in", () => {
  // At 0 K far above threshold a Gaussian band of variance s^2 adds s^2/2 to (h nu - W)^2/2 (exact). Points exact.
  const sigmaEv = 0.1;
  const photonEnergiesEv = [5.1, 5.3, 5.5, 5.7, 5.9];
  const yields = photonEnergiesEv.map((energy) => 0.5 * (energy - 4.5) ** 2 + 0.5 * sigmaEv ** 2);
  const exact: FowlerSeries = {
    photonEnergiesEv,
    yields,
    yieldUncertainties: yields.map(() => 1e-4),
    temperatureK: 0,
    bandFwhmEv: sigmaEv * 2 * Math.sqrt(2 * Math.LN2),
  };
  const fit = fitFowler(exact);
  assertClose(fit.workFunctionEv!.value, 4.5, { absolute: 1e-5 }, "work function");
  assertClose(fit.amplitudePerEv2!.value, 1, { relative: 1e-5 }, "amplitude");
  assert.equal(fit.verdict, "good");
  const without = fitFowler({ ...exact, bandFwhmEv: 0 });
  assert.ok(Math.abs(without.workFunctionEv!.value - 4.5) > 1e-3, "the band matters");
});

Deno.test("fitFowler() doubts photon energies far above threshold and yields that do not stand out", () => {
  const photonEnergiesEv = [4.6, 5, 5.5, 6, 6.5];
  const yields = photonEnergiesEv.map((energy) => fowlerYieldEv2(energy, 4.5, 300));
  const far = fitFowler({
    photonEnergiesEv,
    yields,
    yieldUncertainties: yields.map(() => 0.01),
    temperatureK: 300,
    bandFwhmEv: 0,
  });
  assert.equal(far.verdict, "doubtful");
  assert.match(far.reasons[0], /2\.0 eV above threshold/);
  const faint = fitFowler(series(normalDraws(7), {
    yieldUncertainties: ENERGIES_EV.map(() => AMPLITUDE),
  }));
  assert.notEqual(faint.verdict, "good");
  assert.match(faint.reasons.join(), /only \d yields stand out/);
});

Deno.test("fitFowler() never gives a confident number for yields without a threshold", () => {
  // A constant yield, and one that falls.
  for (const shape of [() => 1, (i: number) => 16 - i]) {
    const yields = ENERGIES_EV.map((_, i) => shape(i));
    const fit = fitFowler(series(normalDraws(8), { yields, yieldUncertainties: yields.map(() => 0.02) }));
    assert.notEqual(fit.verdict, "good");
  }
});

Deno.test("fitFowler() refuses numbers out of range", () => {
  const good = series(normalDraws(9));
  const cases: [Partial<FowlerSeries>, string][] = [
    [{ photonEnergiesEv: [1, 2, 3] }, "there must be at least 4 points: current value is 3"],
    [{ temperatureK: -1 }, "temperatureK must be >= 0 K: current value is -1"],
    [{ bandFwhmEv: NaN }, "bandFwhmEv must be >= 0 eV: current value is NaN"],
    [{ yields: ENERGIES_EV.map(() => 0) }, 'a yield must be > 0: current value is "none"'],
    [
      { photonEnergiesEv: ENERGIES_EV.toReversed() },
      `photonEnergiesEv[1] must be > 0 eV and ascending: current value is ${ENERGIES_EV[14]}`,
    ],
  ];
  for (const [change, message] of cases) {
    assert.throws(() => fitFowler({ ...good, ...change }), {
      name: "RangeError",
      message: `Cannot fit a Fowler plot as ${message}`,
    });
  }
});
