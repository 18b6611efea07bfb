import { chiSquareProbability, type FitResult, runsTest } from "../fit/mod.ts";

/** How well a series follows its model, and how far its answer is to be trusted. */
export interface Judgment {
  /** Weighted sum of squared residuals. */
  readonly chiSquare: number;
  /** Degrees of freedom. */
  readonly degreesOfFreedom: number;
  /** Probability of a larger chi-square by chance; 1 without degrees of freedom. */
  readonly chiSquareProbability: number;
  /** Probability of as few changes of sign among the residuals by chance. */
  readonly runsProbability: number;
  /** Good: within chance. Doubtful: a number with reasons to distrust it. Failed: no number. */
  readonly verdict: "good" | "doubtful" | "failed";
  /** Why the verdict is not good, each with what to look at. */
  readonly reasons: readonly string[];
  /**
   * What the standard uncertainties were multiplied by: the Birge ratio, the square root of chi-square per degree of
   * freedom, where chi-square is not chance; else 1. Source: R. T. Birge, Phys. Rev. 40, 207 (1932).
   */
  readonly inflation: number;
}

/** One good series in a hundred is called doubtful by each of the two tests. */
const DOUBT = 0.01;

/**
 * Judges residuals.
 *
 * @param chiSquare Weighted sum of squared residuals.
 * @param degreesOfFreedom Degrees of freedom, >= 0.
 * @param residuals Residuals in order of the abscissa.
 * @param reasons Further reasons for doubt.
 * @returns Good or doubtful.
 */
export function judgeResiduals(
  chiSquare: number,
  degreesOfFreedom: number,
  residuals: ArrayLike<number>,
  reasons: readonly string[] = [],
): Judgment {
  const probability = degreesOfFreedom === 0 ? 1 : chiSquareProbability(chiSquare, degreesOfFreedom);
  const runsProbability = runsTest(residuals).probability;
  const misfit = probability < DOUBT;
  const all = [
    ...reasons,
    ...(misfit
      ? [
        `chi-square is ${
          chiSquare.toPrecision(3)
        } with ${degreesOfFreedom} degrees of freedom: the model is ` +
        "wrong or the uncertainties are too small; they are enlarged to fit",
      ]
      : []),
    ...(runsProbability < DOUBT
      ? ["neighboring residuals have the same sign: the data bend away from the model, look at the figure"]
      : []),
  ];
  return {
    chiSquare,
    degreesOfFreedom,
    chiSquareProbability: probability,
    runsProbability,
    verdict: all.length === 0 ? "good" : "doubtful",
    reasons: all,
    inflation: misfit ? Math.sqrt(chiSquare / degreesOfFreedom) : 1,
  };
}

/**
 * Judges a least-squares fit.
 *
 * @param fit The fit.
 * @param data What was fitted.
 * @param reasons Further reasons for doubt.
 * @returns Failed where the minimum is none, else as {@link judgeResiduals}.
 */
export function judgeFit(fit: FitResult, data: Float64Array, reasons: readonly string[] = []): Judgment {
  const residuals = data.map((value, i) => value - fit.fitted[i]);
  const judgment = judgeResiduals(fit.chiSquare, fit.degreesOfFreedom, residuals, reasons);
  const trouble = [
    ...(fit.converged ? [] : [`the fit did not converge: ${fit.reason}`]),
    ...(fit.atBound.length > 0 ? [`the fit ended with ${fit.atBound.join(", ")} at a bound`] : []),
  ];
  if (trouble.length === 0) return judgment;
  return { ...judgment, verdict: "failed", reasons: [...trouble, ...judgment.reasons] };
}
