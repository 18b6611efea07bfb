import { cannot } from "../base/mod.ts";
import { type FitProblem, type FitResult, minimize } from "./minimize.ts";

/** A Poisson problem: the data are counts, each >= 0, and the model predicts them. */
export interface PoissonProblem extends Omit<FitProblem, "sigma"> {
  /** Expected counts near the answer, such as an earlier fit: the first variances. Default: smoothed counts. */
  readonly expected?: Float64Array;
  /**
   * Rounds end when no parameter moves by more than this share of its standard error, which counts as larger by
   * sqrt(chi-square / degrees of freedom) where that is above 1. Default: 0.001.
   */
  readonly roundTolerance?: number;
}

/** A maximum-likelihood fit; `chiSquare` is Pearson's, with the variance of the model. */
export interface PoissonFit extends FitResult {
  /**
   * Twice the log of the likelihood ratio to a perfect model, `2 sum [m - n + n ln(n/m)]`, distributed about as
   * chi-square where counts are many. Where the model m is below 0.05 counts, continued by a parabola.
   */
  readonly deviance: number;
}

/**
 * Smallest variance, counts. Estimating equations `sum (n - m)/v dm/dp = 0` are unbiased whatever the variances v that
 * do not depend on the counts, so a floor costs no bias, only information from channels below it. Those hold next to
 * none: a twentieth of a count each. Without a floor one stray count where nothing is expected would outweigh all others,
 * and the variance of an empty spectrum would be zero.
 */
const LEAST_VARIANCE = 0.05;
const MOST_ROUNDS = 40;
/** Steps of a round end below this, in standard errors: the next round moves the target anyway. */
const STEP_TOLERANCE = 1e-3;
/** A round need not reach its minimum; so many steps are enough near the answer. */
const STEPS_A_ROUND = 12;
const FIRST_STEPS = 60;
/** See {@link PoissonProblem}. */
const ROUND_TOLERANCE = 1e-3;

/**
 * Maximum-likelihood fit of a model to Poisson counts, zero counts included.
 *
 * Least squares with the variance of the model from the previous round, repeated until nothing moves (iteratively
 * reweighted least squares, which is Fisher scoring): the stationary point satisfies the Poisson score equations
 * `sum (n - m)/m dm/dp = 0`. Weights from the counts themselves would pull the model low where counts are few. The model
 * should be > 0; below 0.05 counts the variance stays at 0.05, which keeps the estimate unbiased and the standard errors
 * on the safe side.
 *
 * Source: J. Nelder, R. Wedderburn, J. R. Stat. Soc. A 135, 370 (1972); P. McCullagh, J. Nelder, Generalized Linear
 * Models, 2nd ed. (1989), ch. 2; deviance: S. Baker, R. Cousins, Nucl. Instrum. Meth. 221, 437 (1984).
 *
 * @param problem Model, counts and start values.
 * @returns The fit; `converged` also says that the rounds settled.
 * @throws {RangeError} As {@link minimize}, or if a count is negative.
 * @example The estimate of a constant is the mean of the counts
 * ```ts
 * import { minimizePoisson } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const fit = minimizePoisson({
 *   parameters: [{ name: "mean", start: 2 }],
 *   model: (p, out) => void out.fill(p[0]),
 *   data: Float64Array.of(0, 1, 0, 3),
 * });
 * assert.equal(fit.values[0].toFixed(6), "1.000000");
 * ```
 */
export function minimizePoisson(problem: PoissonProblem): PoissonFit {
  const { data } = problem;
  const negative = data.find((count) => count < 0);
  if (negative !== undefined) throw new RangeError(cannot("fit", "counts must be >= 0", negative));
  let parameters = problem.parameters;
  // The first variances come from the counts, averaged over three channels so that empty ones get a fair weight.
  let variance = problem.expected?.map((mean) => Math.max(mean, LEAST_VARIANCE)) ??
    data.map((count, i) => (count + (data[i - 1] ?? count) + (data[i + 1] ?? count)) / 3 + 0.5);
  let fit: FitResult;
  let evaluations = 0;
  let settled = false;
  for (let round = 0;; round++) {
    const previous = parameters;
    fit = minimize({
      ...problem,
      parameters,
      tolerance: problem.tolerance ?? STEP_TOLERANCE,
      mostSteps: round === 0 ? FIRST_STEPS : STEPS_A_ROUND,
      sigma: variance.map(Math.sqrt),
    });
    evaluations += fit.evaluations;
    const moved = previous.map(({ start }, j) =>
      Math.abs(fit.values[j] - start) / fit.standardErrors[j] || 0
    );
    const inflation = Math.sqrt(Math.max(1, fit.chiSquare / Math.max(1, fit.degreesOfFreedom)));
    settled = round > 0 && fit.converged &&
      Math.max(...moved) < (problem.roundTolerance ?? ROUND_TOLERANCE) * inflation;
    if (settled || round === MOST_ROUNDS) break;
    parameters = parameters.map((parameter, j) => ({ ...parameter, start: fit.values[j] }));
    variance = fit.fitted.map((mean) => Math.max(mean, LEAST_VARIANCE));
  }
  return {
    ...fit,
    evaluations,
    deviance: data.reduce((sum, count, i) => sum + devianceOf(count, fit.fitted[i]), 0),
    converged: fit.converged && settled,
    reason: fit.converged && !settled ? "the weights did not settle" : fit.reason,
  };
}

/**
 * Deviance of one channel. Below the least variance v its derivative is -2 (n - m)/v, so that the fit is its minimum
 * everywhere (quasi-likelihood: R. Wedderburn, Biometrika 61, 439 (1974)).
 */
function devianceOf(count: number, mean: number): number {
  const m = Math.max(mean, LEAST_VARIANCE);
  const below = m - mean;
  const exact = 2 * (m - count + (count > 0 ? count * Math.log(count / m) : 0));
  return exact + below * (2 * (count - m) + below) / LEAST_VARIANCE;
}
