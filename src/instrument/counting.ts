import { samplePoisson, type Xoshiro128pp } from "../rng/mod.ts";

/** How long and with what counter each channel is measured. */
export interface Counting {
  /** Time per channel and sweep, s, > 0. */
  readonly dwellS: number;
  /** Number of sweeps, >= 1. */
  readonly sweeps: number;
  /** Rate without light, counts/s, >= 0. */
  readonly darkRateCountsPerS: number;
  /** Dead time of the non-paralyzable counter, s, >= 0. */
  readonly deadTimeS: number;
}

/** Expected counts and their standard errors, shape (channels) each. */
export interface ExpectedCounts {
  /** Expected counts in all sweeps together. */
  readonly counts: Float64Array;
  /** Standard errors of the expectation (of the Monte Carlo, not of the counting). */
  readonly standardErrors: Float64Array;
}

/**
 * Expected counts from the rate of electrons: dark rate added, then the dead time of a non-paralyzable counter,
 * `m = n / (1 + n tau)`.
 *
 * Source: G. Knoll, Radiation Detection and Measurement, ch. 4 (dead time; cited from memory).
 *
 * @param ratesPerS Electrons per second that would be counted without dead time, shape (channels).
 * @param rateErrorsPerS Standard errors of those rates, shape (channels).
 * @param counting Time and counter.
 * @returns Expected counts with standard errors carried through to first order.
 */
export function expectedCounts(
  ratesPerS: Float64Array,
  rateErrorsPerS: Float64Array,
  counting: Counting,
): ExpectedCounts {
  const timeS = counting.dwellS * counting.sweeps;
  const live = ratesPerS.map((rate) => 1 / (1 + (rate + counting.darkRateCountsPerS) * counting.deadTimeS));
  return {
    counts: ratesPerS.map((rate, c) => timeS * (rate + counting.darkRateCountsPerS) * live[c]),
    standardErrors: rateErrorsPerS.map((error, c) => timeS * error * live[c] * live[c]),
  };
}

/**
 * Poisson counts about an expectation. Dead time makes real counts slightly more regular than Poisson; this is left out.
 *
 * @param expected Expected counts, each >= 0, shape (channels).
 * @param generator Source of randomness.
 * @returns Whole counts, shape (channels).
 */
export function drawCounts(expected: Float64Array, generator: Xoshiro128pp): Float64Array {
  return expected.map((mean) => samplePoisson(mean, generator));
}
