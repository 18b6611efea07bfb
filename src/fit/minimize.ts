import { levenbergMarquardt } from "ml-levenberg-marquardt";
import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { cannot } from "../base/mod.ts";

/** One parameter of a fit. */
export interface FitParameter {
  /** Name, unique in the problem. */
  readonly name: string;
  /** Start value, inside the bounds. */
  readonly start: number;
  /** Lower bound. Default: none. */
  readonly lower?: number;
  /** Upper bound. Default: none. */
  readonly upper?: number;
  /** Typical size, which sets the steps of the numerical derivatives. Default: |start|, or 1 where that is 0. */
  readonly scale?: number;
}

/** A weighted least-squares problem. */
export interface FitProblem {
  /** Parameters, in the order the model takes them. */
  readonly parameters: readonly FitParameter[];
  /** Fills `out` with the model values, shape (n). */
  readonly model: (parameters: Float64Array, out: Float64Array) => void;
  /** Data, shape (n). */
  readonly data: Float64Array;
  /** Standard deviations of the data, each > 0, shape (n). */
  readonly sigma: Float64Array;
  /** Largest last step, in standard errors, that counts as converged. Default: 1e-6. */
  readonly tolerance?: number;
}

/** A minimum, or the best point that was reached. */
export interface FitResult {
  /** Names of the parameters. */
  readonly names: readonly string[];
  /** Best values, shape (p). */
  readonly values: Float64Array;
  /**
   * Covariance, row by row, shape (p x p): the inverse of J^T W J, not scaled by chi-square. Rows of parameters at a bound
   * are zero.
   */
  readonly covariance: Float64Array;
  /** Square roots of the diagonal, shape (p); Infinity for parameters at a bound or not determined by the data. */
  readonly standardErrors: Float64Array;
  /** Weighted sum of squared residuals. */
  readonly chiSquare: number;
  /** Data minus parameters not at a bound. */
  readonly degreesOfFreedom: number;
  /** Model at the best point, shape (n). */
  readonly fitted: Float64Array;
  /**
   * `true` when the last step was below the tolerance and the covariance exists. `false` usually means that the model
   * cannot tell its parameters apart or that the start was far off: fix a parameter or start closer.
   */
  readonly converged: boolean;
  /** Names of parameters at a bound. */
  readonly atBound: readonly string[];
  /** Why it stopped, in one sentence. */
  readonly reason: string;
  /** Evaluations of the model. */
  readonly evaluations: number;
}

const DEFAULT_TOLERANCE = 1e-6;
const MOST_STEPS = 200;
/** Central differences are best near the cube root of the rounding error. */
const DERIVATIVE_STEP = 6e-6;
const DAMPING_START = 1e-3;
const DAMPING_UP = 6;
const DAMPING_DOWN = 8;
const DAMPING_LEAST = 1e-14;
const DAMPING_MOST = 1e10;
/** Smallest eigenvalue of the normalized J^T J, relative to the largest, below which directions are not determined. */
const SINGULAR = 1e-13;

/**
 * Weighted nonlinear least squares by the Levenberg-Marquardt method (D. Marquardt, J. Soc. Indust. Appl. Math. 11, 431
 * (1963)).
 *
 * Each step is one iteration of the library ml-levenberg-marquardt on residuals divided by their standard deviations and
 * on parameters scaled by the columns of the Jacobian, which makes its damping Marquardt's. Whether a step is taken, the
 * damping, bounds, convergence and covariance are decided here, since the library never rejects a step and knows no
 * covariance.
 *
 * @param problem Model, data and start values.
 * @returns Best values with covariance; a poor fit is told by `converged` and `reason`, not thrown.
 * @throws {RangeError} If there are fewer data than parameters, a standard deviation is not > 0, a start value is outside
 * its bounds, or the model is not finite at the start.
 * @example A straight line through three points
 * ```ts
 * import { minimize } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const fit = minimize({
 *   parameters: [{ name: "offset", start: 0 }, { name: "slope", start: 0 }],
 *   model: (p, out) => [0, 1, 2].forEach((x, i) => out[i] = p[0] + p[1] * x),
 *   data: Float64Array.of(1, 3, 5),
 *   sigma: Float64Array.of(0.1, 0.1, 0.1),
 * });
 * assert.deepEqual(Array.from(fit.values, (value) => value.toFixed(6)), ["1.000000", "2.000000"]);
 * ```
 */
export function minimize(problem: FitProblem): FitResult {
  check(problem);
  const { parameters, data, sigma } = problem;
  const tolerance = problem.tolerance ?? DEFAULT_TOLERANCE;
  const count = parameters.length;
  const n = data.length;
  const lower = parameters.map((parameter) => parameter.lower ?? -Infinity);
  const upper = parameters.map((parameter) => parameter.upper ?? Infinity);
  const scales = parameters.map(({ scale, start }) => scale ?? (start === 0 ? 1 : Math.abs(start)));
  let evaluations = 0;

  function evaluate(values: Float64Array): Float64Array {
    const out = new Float64Array(n);
    problem.model(values, out);
    evaluations++;
    for (let i = 0; i < n; i++) out[i] /= sigma[i];
    return out;
  }
  const whiteData = data.map((value, i) => value / sigma[i]);
  const sumOfSquares = (model: Float64Array): number => {
    let sum = 0;
    for (let i = 0; i < n; i++) sum += (whiteData[i] - model[i]) ** 2;
    return sum;
  };

  let values: Float64Array = Float64Array.from(parameters, (parameter) => parameter.start);
  let model = evaluate(values);
  let chiSquare = sumOfSquares(model);
  if (!Number.isFinite(chiSquare)) {
    throw new RangeError(cannot("fit", "the model must be finite at the start values", values.join(", ")));
  }

  /** Derivatives of the whitened model, one column per parameter; one-sided at a bound. */
  function jacobian(): Float64Array[] {
    return parameters.map((_, j) => {
      const h = DERIVATIVE_STEP * Math.max(scales[j], Math.abs(values[j]));
      const up = Math.min(values[j] + h, upper[j]);
      const down = Math.max(values[j] - h, lower[j]);
      const high = evaluate(values.with(j, up));
      const low = evaluate(values.with(j, down));
      for (let i = 0; i < n; i++) high[i] = (high[i] - low[i]) / (up - down);
      return high;
    });
  }

  /** Parameters that are not pressed against a bound by the gradient. */
  function freeParameters(columns: Float64Array[]): number[] {
    return parameters.flatMap((_, j) => {
      let descent = 0;
      for (let i = 0; i < n; i++) descent += columns[j][i] * (whiteData[i] - model[i]);
      const held = (values[j] <= lower[j] && descent <= 0) || (values[j] >= upper[j] && descent >= 0);
      return held ? [] : [j];
    });
  }

  let damping = DAMPING_START;
  let settled = false;
  let stopped = `no minimum after ${MOST_STEPS} steps`;
  let columns = jacobian();
  for (let step = 0; step < MOST_STEPS && !settled; step++) {
    const free = freeParameters(columns);
    const norms = free.map((j) => Math.sqrt(columns[j].reduce((sum, value) => sum + value * value, 0)) || 1);
    if (free.length === 0) {
      settled = true;
      break;
    }
    let accepted = false;
    while (!accepted && damping <= DAMPING_MOST) {
      const trial = libraryStep(free, norms, damping);
      const moved = free.reduce(
        (most, j, f) => Math.max(most, Math.abs(trial.values[j] - values[j]) * norms[f]),
        0,
      );
      if (trial.chiSquare <= chiSquare) {
        accepted = true;
        damping = Math.max(DAMPING_LEAST, damping / DAMPING_DOWN);
        // A column norm is one over the standard error that a parameter would have alone.
        settled = moved < tolerance;
        values = trial.values;
        model = trial.model;
        chiSquare = trial.chiSquare;
      } else if (moved < tolerance) {
        accepted = true;
        settled = true;
      } else {
        damping *= DAMPING_UP;
      }
    }
    if (!accepted) {
      stopped = "no step lowers chi-square";
      break;
    }
    columns = jacobian();
  }
  return finish();

  /** One damped step of the library from the current point, on scaled free parameters. */
  function libraryStep(
    free: readonly number[],
    norms: readonly number[],
    lambda: number,
  ): { values: Float64Array; model: Float64Array; chiSquare: number } {
    const full = (scaled: ArrayLike<number>): Float64Array => {
      const next = values.slice();
      free.forEach((j, f) => next[j] = Math.min(upper[j], Math.max(lower[j], scaled[f] / norms[f])));
      return next;
    };
    const start = free.map((j, f) => values[j] * norms[f]);
    let latest: { values: Float64Array; model: Float64Array } = { values, model };
    const { parameterValues } = levenbergMarquardt(
      { x: Float64Array.from({ length: n }, (_, i) => i), y: whiteData },
      (scaled: number[]) => {
        const at = full(scaled);
        const same = at.every((value, j) => value === values[j]);
        latest = same ? { values, model } : { values: at, model: evaluate(at) };
        const { model: current } = latest;
        return (i: number) => current[i];
      },
      {
        initialValues: start,
        damping: lambda,
        maxIterations: 1,
        errorTolerance: 0,
        minValues: free.map((j, f) => lower[j] * norms[f]),
        maxValues: free.map((j, f) => upper[j] * norms[f]),
        jacobianFunction: () => (i: number) => free.map((j, f) => columns[j][i] / norms[f]),
      },
    );
    // The library returns its start where the step does not help; then the step it tried is the latest evaluation.
    const taken = parameterValues.every((value, f) => value === start[f]) ? latest : {
      values: full(parameterValues),
      model: latest.model,
    };
    const squares = sumOfSquares(taken.model);
    return { ...taken, chiSquare: Number.isNaN(squares) ? Infinity : squares };
  }

  function finish(): FitResult {
    const free = freeParameters(columns).filter((j) => values[j] > lower[j] && values[j] < upper[j]);
    const { covariance, undetermined } = covarianceOf(columns, free, count);
    const standardErrors = Float64Array.from(
      { length: count },
      (_, j) => free.includes(j) && undetermined === null ? Math.sqrt(covariance[j * count + j]) : Infinity,
    );
    const atBound = parameters.filter((_, j) => values[j] <= lower[j] || values[j] >= upper[j]).map((
      { name },
    ) => name);
    const lost = undetermined === null ? null : parameters[undetermined].name;
    return {
      names: parameters.map(({ name }) => name),
      values,
      covariance,
      standardErrors,
      chiSquare,
      degreesOfFreedom: n - free.length,
      fitted: model.map((value, i) => value * sigma[i]),
      converged: settled && lost === null,
      atBound,
      reason: lost !== null
        ? `the data do not determine ${lost}`
        : settled
        ? atBound.length > 0 ? `converged with ${atBound.join(", ")} at a bound` : "converged"
        : stopped,
      evaluations,
    };
  }
}

function check({ parameters, data, sigma }: FitProblem): void {
  if (data.length < parameters.length || data.length < 2) {
    throw new RangeError(
      cannot("fit", `there must be at least ${Math.max(2, parameters.length)} data`, data.length),
    );
  }
  const bad = sigma.findIndex((value) => !(value > 0) || !Number.isFinite(value));
  if (sigma.length !== data.length || bad >= 0) {
    throw new RangeError(
      cannot("fit", `there must be ${data.length} sigmas, each > 0`, sigma[bad] ?? sigma.length),
    );
  }
  const wrong = data.findIndex((value) => !Number.isFinite(value));
  if (wrong >= 0) throw new RangeError(cannot("fit", `datum ${wrong} must be finite`, data[wrong]));
  for (const { name, start, lower = -Infinity, upper = Infinity } of parameters) {
    if (!(start >= lower && start <= upper && lower < upper)) {
      throw new RangeError(cannot("fit", `the start of ${name} must be in ${lower}..${upper}`, start));
    }
  }
}

/** Inverse of J^T J over the free parameters by eigenvalues of the matrix with unit diagonal. */
function covarianceOf(
  columns: readonly Float64Array[],
  free: readonly number[],
  count: number,
): { covariance: Float64Array; undetermined: number | null } {
  const covariance = new Float64Array(count * count);
  if (free.length === 0) return { covariance, undetermined: null };
  const norms = free.map((j) => Math.sqrt(columns[j].reduce((sum, value) => sum + value * value, 0)));
  const flat = norms.findIndex((norm) => !(norm > 0));
  if (flat >= 0) return { covariance, undetermined: free[flat] };
  const normalized = Matrix.zeros(free.length, free.length);
  for (let a = 0; a < free.length; a++) {
    for (let b = 0; b <= a; b++) {
      let sum = 0;
      for (let i = 0; i < columns[0].length; i++) sum += columns[free[a]][i] * columns[free[b]][i];
      normalized.set(a, b, sum / norms[a] / norms[b]);
      normalized.set(b, a, sum / norms[a] / norms[b]);
    }
  }
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(normalized, {
    assumeSymmetric: true,
  });
  const largest = Math.max(...realEigenvalues);
  const weak = realEigenvalues.findIndex((value) => !(value > SINGULAR * largest));
  if (weak >= 0) {
    const direction = eigenvectorMatrix.getColumn(weak).map(Math.abs);
    return { covariance, undetermined: free[direction.indexOf(Math.max(...direction))] };
  }
  for (let a = 0; a < free.length; a++) {
    for (let b = 0; b < free.length; b++) {
      let sum = 0;
      realEigenvalues.forEach((value, e) => {
        sum += (eigenvectorMatrix.get(a, e) * eigenvectorMatrix.get(b, e)) / value;
      });
      covariance[free[a] * count + free[b]] = sum / norms[a] / norms[b];
    }
  }
  return { covariance, undetermined: null };
}

/**
 * Correlation coefficient of two fitted parameters.
 *
 * @param fit The fit.
 * @param nameA One parameter.
 * @param nameB Another.
 * @returns -1..1; NaN where one of them has no standard error.
 */
export function correlation(fit: FitResult, nameA: string, nameB: string): number {
  const [a, b] = [nameA, nameB].map((name) => {
    const index = fit.names.indexOf(name);
    if (index < 0) {
      throw new RangeError(cannot("correlate", `the name must be one of ${fit.names.join(", ")}`, name));
    }
    return index;
  });
  const count = fit.names.length;
  return fit.covariance[a * count + b] /
    Math.sqrt(fit.covariance[a * count + a] * fit.covariance[b * count + b]);
}
