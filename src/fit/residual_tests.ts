import { erfc } from "../math/mod.ts";
import type { FitResult } from "./minimize.ts";

/** Result of a runs test. */
export interface RunsTest {
  /** Runs of residuals of one sign. */
  readonly runs: number;
  /** Runs expected of a random order. */
  readonly expectedRuns: number;
  /** Probability of as few runs or fewer by chance. */
  readonly probability: number;
}

/** How well a model describes counts. */
export interface ResidualTests {
  /** Pearson chi-square. */
  readonly chiSquare: number;
  /** Degrees of freedom. */
  readonly degreesOfFreedom: number;
  /** Chi-square over degrees of freedom. */
  readonly reducedChiSquare: number;
  /** Probability of a larger chi-square by chance. */
  readonly chiSquareProbability: number;
  /** Order of the signs. */
  readonly runs: RunsTest;
}

/**
 * Probability that chi-square exceeds a value by chance: the regularized incomplete gamma function Q(dof/2, x/2).
 *
 * Source: M. Abramowitz, I. Stegun, Handbook of Mathematical Functions (1964), eqs. 26.4.19, 6.5.29 and 6.5.31.
 *
 * @param chiSquare Value, >= 0.
 * @param degreesOfFreedom Degrees of freedom, > 0.
 * @returns Probability, 0..1.
 * @throws {RangeError} If an argument is out of range.
 * @example Two degrees of freedom have a closed form, exp(-x/2)
 * ```ts
 * import { chiSquareProbability } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(chiSquareProbability(2, 2).toFixed(12), Math.exp(-1).toFixed(12));
 * ```
 */
export function chiSquareProbability(chiSquare: number, degreesOfFreedom: number): number {
  if (!(chiSquare >= 0) || !(degreesOfFreedom > 0)) {
    throw new RangeError(
      `Cannot give a probability as chi-square must be >= 0 and its degrees of freedom > 0: current value is ${chiSquare}, ${degreesOfFreedom}`,
    );
  }
  const a = degreesOfFreedom / 2;
  const x = chiSquare / 2;
  if (x === 0) return 1;
  if (x === Infinity) return 0;
  const front = Math.exp(a * Math.log(x) - x - logGamma(a));
  if (x < a + 1) {
    let term = 1 / a;
    let sum = term;
    for (let n = 1; term > sum * 1e-16; n++) {
      term *= x / (a + n);
      sum += term;
    }
    return Math.max(0, 1 - front * sum);
  }
  // Continued fraction by the method of W. Lentz, Appl. Opt. 15, 668 (1976).
  let b = x + 1 - a;
  let c = 1e300;
  let d = 1 / b;
  let fraction = d;
  for (let n = 1; n < 10_000; n++) {
    const numerator = -n * (n - a);
    b += 2;
    d = 1 / (numerator * d + b);
    c = b + numerator / c;
    const factor = c * d;
    fraction *= factor;
    if (Math.abs(factor - 1) < 1e-15) break;
  }
  return front * fraction;
}

/** ln Gamma(x) for x > 0 by Stirling's series after raising the argument (Abramowitz & Stegun 6.1.15, 6.1.41). */
function logGamma(x: number): number {
  let shift = 0;
  let z = x;
  while (z < 12) shift += Math.log(z++);
  const z2 = z * z;
  const series = (1 / 12 - (1 / 360 - (1 / 1260 - 1 / (1680 * z2)) / z2) / z2) / z;
  return (z - 0.5) * Math.log(z) - z + 0.5 * Math.log(2 * Math.PI) + series - shift;
}

/**
 * Runs test: too few runs of one sign mean that the model bends differently from the data.
 *
 * Normal approximation, good for more than about ten residuals of each sign.
 *
 * Source: A. Wald, J. Wolfowitz, Ann. Math. Stat. 11, 147 (1940).
 *
 * @param residuals Residuals in order; zeros are left out.
 * @returns Runs and the probability of as few.
 */
export function runsTest(residuals: ArrayLike<number>): RunsTest {
  const signs = Array.from(residuals, Math.sign).filter((sign) => sign !== 0);
  const positive = signs.filter((sign) => sign > 0).length;
  const negative = signs.length - positive;
  const runs = signs.filter((sign, i) => i === 0 || sign !== signs[i - 1]).length;
  const total = positive + negative;
  if (positive === 0 || negative === 0) {
    return { runs, expectedRuns: runs, probability: total > 1 ? 2 ** (1 - total) : 1 };
  }
  const product = 2 * positive * negative;
  const expectedRuns = 1 + product / total;
  const variance = (product * (product - total)) / (total * total * (total - 1));
  const z = variance > 0 ? (runs + 0.5 - expectedRuns) / Math.sqrt(variance) : 0;
  return { runs, expectedRuns, probability: 0.5 * erfc(-z * Math.SQRT1_2) };
}

/**
 * All tests of a fit to counts.
 *
 * @param fit The fit.
 * @param data The counts.
 * @returns Chi-square and runs.
 */
export function residualTests(fit: FitResult, data: Float64Array): ResidualTests {
  const degreesOfFreedom = Math.max(1, fit.degreesOfFreedom);
  return {
    chiSquare: fit.chiSquare,
    degreesOfFreedom,
    reducedChiSquare: fit.chiSquare / degreesOfFreedom,
    chiSquareProbability: chiSquareProbability(fit.chiSquare, degreesOfFreedom),
    runs: runsTest(data.map((count, i) => count - fit.fitted[i])),
  };
}
