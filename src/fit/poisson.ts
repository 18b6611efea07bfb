import { type FitProblem, type FitResult, minimize } from "./minimize.ts";

/** A Poisson problem: the data are counts, and the model predicts them. */
export type PoissonProblem = Omit<FitProblem, "sigma">;

/** A maximum-likelihood fit; `chiSquare` is Pearson's, with the variance of the model. */
export interface PoissonFit extends FitResult {
  /** Twice the log of the likelihood ratio to a perfect model, `2 sum [m - n + n ln(n/m)]`. */
  readonly deviance: number;
}

/**
 * Smallest expectation used as a variance, counts. A channel that expects less than this hardly ever counts; the floor
 * keeps the weight of one unlucky count finite and changes the score only where the model is below it.
 */
const LEAST_EXPECTATION = 0.05;
const MOST_ROUNDS = 15;
/** Steps of a round end below this, in standard errors: the next round moves the target anyway. */
const STEP_TOLERANCE = 1e-3;
/** Rounds end when no parameter moves by more than this share of its standard error. */
const ROUND_TOLERANCE = 1e-3;

/**
 * Maximum-likelihood fit of a model to Poisson counts, zero counts included.
 *
 * Least squares with the variance of the model from the previous round, repeated until nothing moves (iteratively
 * reweighted least squares, which is Fisher scoring): the stationary point satisfies the Poisson score equations
 * `sum (n - m)/m dm/dp = 0`. Weights from the counts themselves would pull the model low where counts are few.
 *
 * Source: J. Nelder, R. Wedderburn, J. R. Stat. Soc. A 135, 370 (1972); deviance: S. Baker, R. Cousins, Nucl. Instrum.
 * Meth. 221, 437 (1984).
 *
 * @param problem Model, counts and start values.
 * @returns The fit; `converged` also says that the rounds settled.
 * @throws {RangeError} As {@link minimize}, or if a count is negative.
 */
export function minimizePoisson(problem: PoissonProblem): PoissonFit {
  const { data, model } = problem;
  const negative = data.find((count) => count < 0);
  if (negative !== undefined) {
    throw new RangeError(`Cannot fit as counts must be >= 0: current value is ${negative}`);
  }
  let parameters = problem.parameters;
  // The first weights come from the counts, averaged over three channels so that empty ones get a fair weight.
  let expected = data.map((count, i) => (count + (data[i - 1] ?? count) + (data[i + 1] ?? count)) / 3 + 0.5);
  let fit: FitResult;
  let evaluations = 0;
  let settled = false;
  for (let round = 0;; round++) {
    const previous = parameters;
    fit = minimize({
      ...problem,
      parameters,
      tolerance: problem.tolerance ?? STEP_TOLERANCE,
      sigma: expected.map((mean) => Math.sqrt(Math.max(mean, LEAST_EXPECTATION))),
    });
    evaluations += fit.evaluations;
    const moved = previous.reduce((most, parameter, j) => {
      const error = fit.standardErrors[j];
      return Number.isFinite(error)
        ? Math.max(most, Math.abs(fit.values[j] - parameter.start) / error)
        : most;
    }, 0);
    settled = round > 0 && moved < ROUND_TOLERANCE;
    if (settled || round === MOST_ROUNDS) break;
    parameters = parameters.map((parameter, j) => ({ ...parameter, start: fit.values[j] }));
    expected = new Float64Array(data.length);
    model(fit.values, expected);
  }
  let deviance = 0;
  for (let i = 0; i < data.length; i++) {
    const mean = Math.max(fit.fitted[i], LEAST_EXPECTATION);
    deviance += 2 * (mean - data[i] + (data[i] > 0 ? data[i] * Math.log(data[i] / mean) : 0));
  }
  return {
    ...fit,
    evaluations,
    deviance,
    converged: fit.converged && settled,
    reason: fit.converged && !settled ? "the weights did not settle" : fit.reason,
  };
}
