import { cannot } from "../base/mod.ts";

/** A straight line y = offset + slope x. */
export interface StraightLine {
  /** Value at x = 0 with standard uncertainty. */
  readonly offset: { readonly value: number; readonly standardUncertainty: number };
  /** Slope with standard uncertainty. */
  readonly slope: { readonly value: number; readonly standardUncertainty: number };
  /** Covariance of the two. */
  readonly covariance: number;
  /** Weighted sum of squared residuals; with weights 1 where no uncertainties were given. */
  readonly chiSquare: number;
  /** Points less 2. */
  readonly degreesOfFreedom: number;
}

/**
 * Straight line by weighted least squares in closed form.
 *
 * With uncertainties of y the standard uncertainties follow from them; without, from the scatter about the line.
 *
 * Source: JCGM 100:2008, H.3 (calibration curve, unweighted); P. Bevington, D. Robinson, Data Reduction and Error Analysis
 * (weights; cited from memory).
 *
 * @param xs Abscissas, shape (n).
 * @param ys Ordinates, shape (n).
 * @param sigmas Standard uncertainties of y, each > 0, shape (n); null where not known.
 * @returns The line.
 * @throws {RangeError} If there are fewer than 2 points (3 without uncertainties), or all x are equal.
 * @example Two points with uncertainties
 * ```ts
 * import { fitStraightLine } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const { slope } = fitStraightLine([0, 10], [1, 21], [0.1, 0.1]);
 * assert.equal(slope.value, 2);
 * assert.equal(slope.standardUncertainty.toFixed(9), (Math.SQRT2 / 100).toFixed(9));
 * ```
 */
export function fitStraightLine(
  xs: ArrayLike<number>,
  ys: ArrayLike<number>,
  sigmas: ArrayLike<number> | null,
): StraightLine {
  const n = xs.length;
  const least = sigmas === null ? 3 : 2;
  if (n < least) throw new RangeError(cannot("fit a line", `there must be at least ${least} points`, n));
  let sum = 0, sumX = 0, sumY = 0;
  const weight = (i: number): number => sigmas === null ? 1 : 1 / sigmas[i] ** 2;
  for (let i = 0; i < n; i++) {
    sum += weight(i);
    sumX += weight(i) * xs[i];
    sumY += weight(i) * ys[i];
  }
  const meanX = sumX / sum;
  let spread = 0, product = 0;
  for (let i = 0; i < n; i++) {
    spread += weight(i) * (xs[i] - meanX) ** 2;
    product += weight(i) * (xs[i] - meanX) * (ys[i] - sumY / sum);
  }
  if (!(spread > 0)) throw new RangeError(cannot("fit a line", "the x must differ", xs[0]));
  const slope = product / spread;
  const offset = sumY / sum - slope * meanX;
  let chiSquare = 0;
  for (let i = 0; i < n; i++) chiSquare += weight(i) * (ys[i] - offset - slope * xs[i]) ** 2;
  const scale = sigmas === null ? chiSquare / (n - 2) : 1;
  return {
    offset: { value: offset, standardUncertainty: Math.sqrt(scale * (1 / sum + (meanX * meanX) / spread)) },
    slope: { value: slope, standardUncertainty: Math.sqrt(scale / spread) },
    covariance: (-scale * meanX) / spread,
    chiSquare,
    degreesOfFreedom: n - 2,
  };
}
