import assert from "node:assert/strict";
import { chiSquareProbability } from "../../src/fit/mod.ts";
import {
  countSpectrum,
  type ExpectedSpectrum,
  expectedSpectrum,
  pairEngineData,
} from "../../src/model/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import type { ResolvedScenario } from "../../src/scenario/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { assertMean } from "../support/assert_mean.ts";
import { FALSE_ALARM, histogramProbability } from "../support/chi_square.ts";
import { flatMetal } from "../support/flat_metal.ts";
import { sumOf } from "../support/tally_mean.ts";

/** Flat metal at -5 V, so that every energy that leaves is recorded well above zero. */
function biased(changes: Partial<ResolvedScenario> = {}): ResolvedScenario {
  const metal = flatMetal({ biasV: -5, energyStepEv: 0.05 });
  return { ...metal, acquisition: { ...metal.acquisition, startEv: 4, endEv: 12 }, ...changes };
}

function spectrumOf(scenario: ResolvedScenario, seed = 1, batches = 64): ExpectedSpectrum {
  const engine = pairEngineData(scenario);
  return expectedSpectrum(scenario, engine, runSeries(engine, seed, batches));
}

Deno.test("expectedSpectrum() records every electron: its area is flux x time x window x electrons per photon", () => {
  // A Gaussian response of unit peak has the area FWHM sqrt(pi/(4 ln 2)), and convolution keeps areas.
  const scenario = biased({ absorbedPhotonsPerS: 3e6, detectionFraction: 0.25 });
  const spectrum = spectrumOf({
    ...scenario,
    acquisition: { ...scenario.acquisition, dwellS: 0.5, sweeps: 4 },
  });
  const window = 0.1 * Math.sqrt(Math.PI / (4 * Math.LN2));
  const expected = 3e6 * 0.25 * 0.5 * 4 * window * spectrum.electronsPerPhoton;
  assertClose(sumOf(spectrum.counts) * 0.02, expected, { relative: 1e-9 }, "area");
  assert.ok(spectrum.electronsPerPhoton > 0.001);
  assert.ok(
    Math.abs(sumOf(spectrum.analogueCounts) * 0.02 / expected - 1) < 0.05,
    "and so does the analogue tally",
  );
});

Deno.test("expectedSpectrum() applies transmission E^-n, 1 at the Fermi edge", () => {
  const [flat, falling] = [0, 1.5].map((transmissionExponent) =>
    spectrumOf(biased({ transmissionExponent }))
  );
  // Fermi edge at h nu - W_A - e U = 10 - 4.5 + 5 eV.
  flat.kineticEnergiesEv.forEach((energyEv, c) =>
    assertClose(
      falling.counts[c],
      flat.counts[c] * (10.5 / energyEv) ** 1.5,
      { relative: 1e-12 },
      `${energyEv} eV`,
    )
  );
});

Deno.test("expectedSpectrum() records dark counts only at and below zero kinetic energy", () => {
  const scenario = flatMetal({ biasV: 2, energyStepEv: 0.05 }); // retards: what arrives is recorded from 0 to 3.5 eV
  const acquisition = { ...scenario.acquisition, startEv: -0.5, endEv: 5, darkRateCountsPerS: 3, dwellS: 2 };
  const { kineticEnergiesEv, counts } = spectrumOf({ ...scenario, acquisition });
  kineticEnergiesEv.forEach((energyEv, c) => {
    if (energyEv <= 0) assert.equal(counts[c], 6, `${energyEv} eV`);
    else if (energyEv < 3) assert.ok(counts[c] > 6.1, `${energyEv} eV`);
    else if (energyEv > 4.5) assertClose(counts[c], 6, { relative: 1e-12 }, `${energyEv} eV`);
  });
});

/** Probability that two spectra of counts have expectations in the ratio 1 : ratio (Pearson, common variance). */
function ratioProbability(one: Float64Array, other: Float64Array, ratio: number): number {
  let chiSquare = 0;
  let degrees = 0;
  one.forEach((count, c) => {
    const mean = (count + other[c]) / (1 + ratio); // the best estimate of the expectation of `one`
    if (mean < 50) return;
    chiSquare += (other[c] - ratio * count) ** 2 / (mean * ratio * (1 + ratio));
    degrees++;
  });
  assert.ok(degrees > 100, "enough channels to compare");
  return chiSquareProbability(chiSquare, degrees);
}

Deno.test("twice the light gives twice the counts and the same shape", () => {
  // Common practice: photoemission is linear in intensity.
  const faint = spectrumOf(biased({ absorbedPhotonsPerS: 1e8 }));
  const bright = spectrumOf(biased({ absorbedPhotonsPerS: 2e8 }));
  faint.counts.forEach((count, c) =>
    assertClose(bright.counts[c], 2 * count, { relative: 1e-12 }, `channel ${c}`)
  );
  // One false alarm in a million.
  const counts = countSpectrum(faint, 1, 0);
  assert.ok(ratioProbability(counts, countSpectrum(bright, 1, 1), 2) > FALSE_ALARM);
  const wrong = {
    "2 % more light": biased({ absorbedPhotonsPerS: 2.04e8 }),
    "another work function": {
      ...flatMetal({ biasV: -5, energyStepEv: 0.05, workFunctionEv: 4.55 }),
      acquisition: biased().acquisition,
      absorbedPhotonsPerS: 2e8,
    },
    "dead time": biased({
      absorbedPhotonsPerS: 2e8,
      acquisition: { ...biased().acquisition, deadTimeS: 1e-5 },
    }),
  };
  for (const [name, scenario] of Object.entries(wrong)) {
    assert.ok(ratioProbability(counts, countSpectrum(spectrumOf(scenario), 1, 1), 2) < FALSE_ALARM, name);
  }
});

Deno.test("expectedSpectrum() loses to a non-paralyzable dead time what a simulated counter loses", () => {
  // m = n/(1 + n tau): G. Knoll, Radiation Detection and Measurement, ch. 4. Here electrons are put on a time line.
  const deadTimeS = 2e-6;
  const timeS = 40;
  const acquisition = { ...biased().acquisition, darkRateCountsPerS: 100, dwellS: 10, sweeps: 4 };
  const live = spectrumOf(biased({ absorbedPhotonsPerS: 1e9, acquisition }));
  const dead = spectrumOf(biased({ absorbedPhotonsPerS: 1e9, acquisition: { ...acquisition, deadTimeS } }));
  const generator = new Xoshiro128pp(streamState(12, "replicate", 0));
  for (const energyEv of [6, 8, 10]) {
    const c = live.kineticEnergiesEv.findIndex((channel) => channel >= energyEv);
    const ratePerS = live.counts[c] / timeS;
    assert.ok(ratePerS * deadTimeS > 0.05, `${ratePerS} counts/s feel the dead time`);
    let counted = 0;
    let aliveAtS = 0;
    for (let at = 0; (at -= Math.log(generator.nextUniform()) / ratePerS) < timeS;) {
      if (at < aliveAtS) continue;
      counted++;
      aliveAtS = at + deadTimeS;
    }
    // Renewal process: variance of the count is n t/(1 + n tau)^3 (Knoll, as above; from memory). Its edge adds one.
    // One false alarm in 150 000 for each.
    const error = Math.sqrt(ratePerS * timeS / (1 + ratePerS * deadTimeS) ** 3) + 1;
    assertMean(counted, error, dead.counts[c], `${energyEv} eV`);
    assert.throws(() => assertMean(counted, error, live.counts[c]), "without dead time");
    // The error of the expectation shrinks by the slope dm/dn = 1/(1 + n tau)^2.
    const slope = 1 / (1 + ratePerS * deadTimeS) ** 2;
    assertClose(dead.standardErrors[c], live.standardErrors[c] * slope, { relative: 1e-9 }, "standard error");
  }
});

/** A spectrum of the same expectation in every channel. */
function constant(mean: number, channels: number): ExpectedSpectrum {
  const counts = new Float64Array(channels).fill(mean);
  return {
    kineticEnergiesEv: counts,
    counts,
    standardErrors: counts,
    directCounts: counts,
    analogueCounts: counts,
    analogueStandardErrors: counts,
    electronsPerPhoton: 0,
    analoguePerPhoton: { value: 0, standardError: 0 },
    levels: [],
  };
}

Deno.test("countSpectrum() draws Poisson counts: mean, variance and distribution", () => {
  const channels = 100_000;
  for (const expectation of [0.05, 1, 9.9, 10.1, 40, 2500, 1e7]) {
    const counts = countSpectrum(constant(expectation, channels), 3);
    const mean = sumOf(counts) / channels;
    const variance = counts.reduce((sum, count) => sum + (count - mean) ** 2, 0) / (channels - 1);
    const check = (trueMean: number, trueVariance: number): void => {
      // One false alarm in 150 000 for each. Fourth moment of Poisson: var(s^2) = m/n + 2 m^2/(n - 1).
      assertMean(mean, Math.sqrt(trueVariance / channels), trueMean, `mean of ${expectation}`);
      const error = Math.sqrt(trueVariance / channels + (2 * trueVariance ** 2) / (channels - 1));
      assertMean(variance, error, trueVariance, `variance of ${expectation}`);
    };
    check(expectation, expectation);
    assert.throws(
      () => check(expectation + 0.1 * Math.sqrt(expectation), expectation),
      "a tenth of sigma off",
    );
    assert.throws(() => check(expectation, 1.2 * expectation), "20 % more variance");
  }
});

Deno.test("countSpectrum() follows the Poisson distribution count by count", () => {
  const channels = 50_000;
  for (const expectation of [3, 25]) {
    const observed = new Float64Array(100);
    for (const count of countSpectrum(constant(expectation, channels), 4)) observed[count]++;
    const poisson = (mean: number): Float64Array => {
      let probability = Math.exp(-mean);
      return observed.map((_, n) => channels * (n === 0 ? probability : probability *= mean / n));
    };
    // One false alarm in a million.
    assert.ok(histogramProbability(observed, poisson(expectation)) > FALSE_ALARM, `${expectation}`);
    assert.ok(
      histogramProbability(observed, poisson(1.02 * expectation)) < FALSE_ALARM,
      `${expectation}, 2 % more`,
    );
  }
});

Deno.test("countSpectrum() repeats a seed and replicate and differs for others", () => {
  const spectrum = constant(1000, 200);
  const [counts, again, seed, replicate] = [[1, 0], [1, 0], [2, 0], [1, 1]].map(([s, r]) =>
    countSpectrum(spectrum, s, r)
  );
  assert.deepEqual(counts, again);
  assert.notDeepEqual(counts, seed);
  assert.notDeepEqual(counts, replicate);
  assert.notDeepEqual(seed, replicate);
});

Deno.test("expectedSpectrum() gives the standard errors that independent seeds show", () => {
  const scenario = biased();
  const engine = pairEngineData(scenario);
  const seeds = 100;
  const runs = Array.from(
    { length: seeds },
    (_, seed) => expectedSpectrum(scenario, engine, runSeries(engine, seed, 8)),
  );
  // Channels 1 eV apart, ten resolutions: all but independent.
  const channels = [5.2, 6.2, 7.2, 8.2, 9.2].map((energyEv) =>
    runs[0].kineticEnergiesEv.findIndex((channel) => channel >= energyEv)
  );
  for (
    const [value, error] of [["counts", "standardErrors"], [
      "analogueCounts",
      "analogueStandardErrors",
    ]] as const
  ) {
    let chiSquare = 0;
    for (const c of channels) {
      const mean = runs.reduce((sum, run) => sum + run[value][c], 0) / seeds;
      const scatter = runs.reduce((sum, run) => sum + (run[value][c] - mean) ** 2, 0);
      chiSquare += scatter / (runs.reduce((sum, run) => sum + run[error][c] ** 2, 0) / seeds);
    }
    const degrees = channels.length * (seeds - 1);
    const agrees = (factor: number): boolean => {
      const probability = chiSquareProbability(chiSquare / factor ** 2, degrees);
      return probability > FALSE_ALARM && probability < 1 - FALSE_ALARM;
    };
    // Two false alarms in a million were the errors exact; their own scatter (3500 degrees of freedom) makes it ten.
    assert.ok(agrees(1), `${value}: chi-square ${chiSquare} for ${degrees}`);
    assert.ok(!agrees(1.3) && !agrees(1 / 1.3), `${value}: errors 30 % off`);
  }
});
