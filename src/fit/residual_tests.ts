import { cannot } from "../base/mod.ts";
import type { FitResult } from "./minimize.ts";

/** Result of a runs test. */
export interface RunsTest {
  /** Runs of residuals of one sign. */
  readonly runs: number;
  /** Runs expected of a random order. */
  readonly expectedRuns: number;
  /** Runs above the expected number, in standard deviations; negative when too few. 0 where there is no spread. */
  readonly z: number;
  /** Probability of as few runs or fewer by chance. */
  readonly probability: number;
}

/** How well a model describes counts. */
export interface ResidualTests {
  /** Pearson chi-square. */
  readonly chiSquare: number;
  /** Degrees of freedom, at least 1 so that an exact solution has a reduced chi-square. */
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
      cannot(
        "give a probability",
        "chi-square must be >= 0 and its degrees of freedom > 0",
        `${chiSquare}, ${degreesOfFreedom}`,
      ),
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
 * Exact, given how many residuals have each sign. Where all have the same sign that test knows nothing; then the signs
 * are compared with the tosses of a coin.
 *
 * Source: A. Wald, J. Wolfowitz, Ann. Math. Stat. 11, 147 (1940).
 *
 * @param residuals Residuals in order; zeros are left out.
 * @returns Runs and the probability of as few.
 * @throws {RangeError} If a residual is NaN.
 * @example Of the 6 orders of two plus and two minus signs, 2 have two runs
 * ```ts
 * import { runsTest } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(runsTest([0.3, 0.1, -0.2, -0.4]).probability.toFixed(6), "0.333333");
 * ```
 */
export function runsTest(residuals: ArrayLike<number>): RunsTest {
  const signs = Array.from(residuals, Math.sign).filter((sign) => sign !== 0);
  if (signs.some(Number.isNaN)) throw new RangeError(cannot("count runs", "residuals must be numbers", NaN));
  const total = signs.length;
  const positive = signs.filter((sign) => sign > 0).length;
  const negative = total - positive;
  const runs = signs.filter((sign, i) => sign !== signs[i - 1]).length;
  if (total < 2) return { runs, expectedRuns: runs, z: 0, probability: 1 };
  if (runs === 1) {
    const expectedRuns = (total + 1) / 2;
    const z = (runs - expectedRuns) / Math.sqrt((total - 1) / 4);
    return { runs, expectedRuns, z, probability: 2 ** (1 - total) };
  }
  const product = 2 * positive * negative;
  const expectedRuns = 1 + product / total;
  const variance = (product * (product - total)) / (total * total * (total - 1));
  const z = variance > 0 ? (runs - expectedRuns) / Math.sqrt(variance) : 0;
  return { runs, expectedRuns, z, probability: fewRunsProbability(runs, positive, negative) };
}

/** Probability of at most `runs` runs among all orders of the signs. */
function fewRunsProbability(runs: number, positive: number, negative: number): number {
  const logFactorials = [0];
  for (let n = 1; n <= positive + negative; n++) logFactorials.push(logFactorials[n - 1] + Math.log(n));
  const logChoose = (n: number, k: number): number =>
    k > n ? -Infinity : logFactorials[n] - logFactorials[k] - logFactorials[n - k];
  const all = logChoose(positive + negative, positive);
  /** Share of orders with these numbers of runs that begin with a given sign. */
  const share = (positiveRuns: number, negativeRuns: number): number =>
    Math.exp(logChoose(positive - 1, positiveRuns - 1) + logChoose(negative - 1, negativeRuns - 1) - all);
  let probability = 0;
  for (let n = 2; n <= runs; n++) {
    const more = Math.ceil(n / 2);
    const fewer = n - more;
    probability += share(more, fewer) + share(fewer, more);
  }
  return Math.min(1, probability);
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
