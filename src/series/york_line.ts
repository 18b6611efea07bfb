import { cannot, type Estimate } from "../base/mod.ts";

/** Points with standard uncertainties in both coordinates. */
export interface UncertainPoints {
  /** Abscissas, shape (n). */
  readonly x: ArrayLike<number>;
  /** Ordinates, shape (n). */
  readonly y: ArrayLike<number>;
  /** Standard uncertainties of the abscissas, each >= 0, shape (n). */
  readonly xUncertainties: ArrayLike<number>;
  /** Standard uncertainties of the ordinates, each >= 0, shape (n); not zero where that of the abscissa is. */
  readonly yUncertainties: ArrayLike<number>;
}

/** A straight line `y = intercept + slope x`. */
export interface YorkLine {
  /** Ordinate at x = 0. */
  readonly intercept: Estimate;
  /** Slope. */
  readonly slope: Estimate;
  /** Covariance of intercept and slope. */
  readonly covariance: number;
  /** Weighted sum of squared distances; chi-square distributed where the uncertainties are right. */
  readonly chiSquare: number;
  /** Points minus 2. */
  readonly degreesOfFreedom: number;
  /** Distance of each point from the line in its standard deviations, shape (n). */
  readonly residuals: Float64Array;
}

const MOST_ROUNDS = 200;

/**
 * The most likely straight line through points with normal errors in both coordinates, independent of each other.
 *
 * Standard uncertainties come from the given ones and are not scaled by chi-square. Without errors in x it is the
 * ordinary weighted line.
 *
 * Source: D. York, Can. J. Phys. 44, 1079 (1966); in the form of D. York, N. Evensen, M. López Martínez, J. De Basabe
 * Delgado, Am. J. Phys. 72, 367 (2004), with correlations r = 0.
 *
 * @param points At least 3 points that do not share one abscissa.
 * @returns The line.
 * @throws {RangeError} If there are fewer than 3 points, lengths differ, a number is not finite, a point has no
 * uncertainty at all, all abscissas are equal, or the slope does not settle (points that are no line at all).
 * @example Without errors in x, three points on a line
 * ```ts
 * import { yorkLine } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const line = yorkLine({ x: [0, 1, 2], y: [1, 3, 5], xUncertainties: [0, 0, 0], yUncertainties: [1, 1, 1] });
 * assert.equal(line.slope.value.toFixed(9), "2.000000000");
 * assert.equal(line.slope.standardUncertainty.toFixed(6), Math.SQRT1_2.toFixed(6));
 * ```
 */
export function yorkLine({ x, y, xUncertainties, yUncertainties }: UncertainPoints): YorkLine {
  const n = x.length;
  check({ x, y, xUncertainties, yUncertainties });
  const mean = (values: ArrayLike<number>): number => Array.from(values).reduce((a, b) => a + b, 0) / n;
  const [centerX, centerY] = [mean(x), mean(y)];
  let [sxx, sxy] = [0, 0];
  for (let i = 0; i < n; i++) {
    sxx += (x[i] - centerX) ** 2;
    sxy += (x[i] - centerX) * (y[i] - centerY);
  }
  let slope = sxy / sxx;
  let round = 0;
  const weights = new Float64Array(n);
  const beta = new Float64Array(n);
  let [meanX, meanY] = [0, 0];
  for (let change = Infinity; change > 1e-14 * Math.abs(slope); round++) {
    if (round === MOST_ROUNDS) {
      throw new RangeError(cannot("draw a line", "the slope must settle", `${slope} after ${round} rounds`));
    }
    let [sum, sumX, sumY] = [0, 0, 0];
    for (let i = 0; i < n; i++) {
      weights[i] = 1 / (yUncertainties[i] ** 2 + (slope * xUncertainties[i]) ** 2);
      sum += weights[i];
      sumX += weights[i] * x[i];
      sumY += weights[i] * y[i];
    }
    [meanX, meanY] = [sumX / sum, sumY / sum];
    let [above, below] = [0, 0];
    for (let i = 0; i < n; i++) {
      const [u, v] = [x[i] - meanX, y[i] - meanY];
      beta[i] = weights[i] * (u * yUncertainties[i] ** 2 + slope * v * xUncertainties[i] ** 2);
      above += weights[i] * beta[i] * v;
      below += weights[i] * beta[i] * u;
    }
    const next = above / below;
    change = Math.abs(next - slope);
    slope = next;
    if (!Number.isFinite(slope)) {
      throw new RangeError(cannot("draw a line", "its slope must be finite", slope));
    }
    // A slope of zero is settled when it moves less than its uncertainty can tell.
    if (change < 1e-12 / Math.sqrt(below)) break;
  }
  const intercept = meanY - slope * meanX;
  // Uncertainties belong to the adjusted points, which lie on the line.
  const sum = weights.reduce((a, b) => a + b, 0);
  const adjusted = beta.map((value) => meanX + value);
  const adjustedMean = adjusted.reduce((total, value, i) => total + weights[i] * value, 0) / sum;
  const slopeVariance = 1 /
    adjusted.reduce((total, value, i) => total + weights[i] * (value - adjustedMean) ** 2, 0);
  const residuals = weights.map((weight, i) => Math.sqrt(weight) * (y[i] - intercept - slope * x[i]));
  return {
    intercept: {
      value: intercept,
      standardUncertainty: Math.sqrt(1 / sum + adjustedMean ** 2 * slopeVariance),
    },
    slope: { value: slope, standardUncertainty: Math.sqrt(slopeVariance) },
    covariance: -adjustedMean * slopeVariance,
    chiSquare: residuals.reduce((total, value) => total + value * value, 0),
    degreesOfFreedom: n - 2,
    residuals,
  };
}

function check(points: UncertainPoints): void {
  const { x, y, xUncertainties, yUncertainties } = points;
  const fail = (rule: string, value: unknown) => new RangeError(cannot("draw a line", rule, value));
  if (x.length < 3) throw fail("there must be at least 3 points", x.length);
  for (const [name, values] of Object.entries(points)) {
    if (values.length !== x.length) throw fail(`${name} must have ${x.length} values`, values.length);
    const wrong = Array.from(values as ArrayLike<number>).findIndex((value) =>
      !Number.isFinite(value) || (name.endsWith("Uncertainties") && value < 0)
    );
    if (wrong >= 0) {
      throw fail(`${name}[${wrong}] must be finite${name.endsWith("s") ? " and >= 0" : ""}`, values[wrong]);
    }
  }
  for (let i = 0; i < x.length; i++) {
    if (xUncertainties[i] === 0 && yUncertainties[i] === 0) {
      throw fail(`point ${i} must have an uncertainty > 0`, `${x[i]}, ${y[i]}`);
    }
  }
  if (Array.from(x).every((value) => value === x[0])) throw fail("abscissas must differ", x[0]);
}

/** A weighted mean with what is needed to test it. */
export interface WeightedMean {
  /** Mean and its standard uncertainty from the given ones. */
  readonly mean: Estimate;
  /** Weighted sum of squared deviations. */
  readonly chiSquare: number;
  /** Values minus 1. */
  readonly degreesOfFreedom: number;
}

/**
 * Mean weighted by inverse variances.
 *
 * Source: JCGM 100:2008 gives the propagation; the estimate is least squares with one constant.
 *
 * @param values At least one value with a standard uncertainty > 0, independent of each other.
 * @returns The mean.
 */
export function weightedMean(values: readonly Estimate[]): WeightedMean {
  const weights = values.map(({ standardUncertainty }) => standardUncertainty ** -2);
  const sum = weights.reduce((a, b) => a + b, 0);
  const mean = values.reduce((total, { value }, i) => total + weights[i] * value, 0) / sum;
  return {
    mean: { value: mean, standardUncertainty: sum ** -0.5 },
    chiSquare: values.reduce((total, { value }, i) => total + weights[i] * (value - mean) ** 2, 0),
    degreesOfFreedom: values.length - 1,
  };
}
