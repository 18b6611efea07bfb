import { levenbergMarquardt } from "ml-levenberg-marquardt";
import { cannot } from "../base/mod.ts";
import { dot, type Tangent, tangent } from "./tangent.ts";

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
  /**
   * Typical size, > 0; with |value|, where that is larger, it sets the steps of the numerical derivatives. Default:
   * |start|, or 1 where that is 0.
   */
  readonly scale?: number;
  /** `true` when the value stays at its start. Default: false. */
  readonly fixed?: boolean;
}

/** A weighted least-squares problem. */
export interface FitProblem {
  /** Parameters, in the order the model takes them. */
  readonly parameters: readonly FitParameter[];
  /** Fills `out` with the model values, shape (n); never called outside the bounds. */
  readonly model: (parameters: Float64Array, out: Float64Array) => void;
  /**
   * Fills `out` with the derivative of the model by parameter `index` and returns `true`, or returns `false` to have it
   * taken by central differences. Default: central differences for all.
   */
  readonly derivative?: (index: number, parameters: Float64Array, out: Float64Array) => boolean;
  /** Data, shape (n). */
  readonly data: Float64Array;
  /** Standard deviations of the data, each > 0, shape (n). */
  readonly sigma: Float64Array;
  /**
   * Largest distance to the minimum, in standard errors, from which the last step is taken. Standard errors count as
   * larger by sqrt(chi-square / degrees of freedom) where that is above 1. Default: 1e-8.
   */
  readonly tolerance?: number;
  /** Steps after which it stops without convergence. Default: 200. */
  readonly mostSteps?: number;
}

/** A minimum, or the best point that was reached. */
export interface FitResult {
  /** Names of the parameters. */
  readonly names: readonly string[];
  /** Best values, shape (p). */
  readonly values: Float64Array;
  /**
   * Covariance, row by row, shape (p x p): the inverse of J^T W J at the best point, not scaled by chi-square. Rows and
   * columns of parameters that are fixed or at a bound are zero; all are zero when the data do not determine a parameter.
   */
  readonly covariance: Float64Array;
  /**
   * Standard errors, shape (p): square roots of the diagonal of the covariance; 0 for fixed parameters, Infinity for
   * those at a bound, and Infinity for all when the data do not determine one of them. Never NaN.
   */
  readonly standardErrors: Float64Array;
  /** Weighted sum of squared residuals. */
  readonly chiSquare: number;
  /** Data minus parameters that are neither fixed nor at a bound. */
  readonly degreesOfFreedom: number;
  /** Model at the best point, shape (n). */
  readonly fitted: Float64Array;
  /**
   * `true` when the distance to the minimum is within the tolerance, or cannot be lowered and is below 0.001 standard
   * errors, and the covariance exists. `false` usually means that the model cannot tell its parameters apart or that the
   * start was far off: fix a parameter or start closer.
   */
  readonly converged: boolean;
  /** Names of parameters at a bound. */
  readonly atBound: readonly string[];
  /** Why it stopped or what is wrong, in one sentence. */
  readonly reason: string;
  /** Evaluations of the model. */
  readonly evaluations: number;
}

const DEFAULT_TOLERANCE = 1e-8;
/** Distance that is good enough where rounding errors forbid a smaller one: Bates & Watts (1981). */
const CLOSE = 1e-3;
/** A relative change of chi-square that is nothing but rounding errors. */
const ROUNDING = 1e-14;
const MOST_STEPS = 200;
/** Central differences are best near the cube root of the rounding error. */
const DERIVATIVE_STEP = 6e-6;
const DAMPING_START = 1e-3;
const DAMPING_UP = 6;
const DAMPING_DOWN = 8;
const DAMPING_LEAST = 1e-14;
const DAMPING_MOST = 1e8;

/** Parameters with the whitened model and chi-square there; chi-square is not finite where the model is not. */
interface Point {
  readonly values: Float64Array;
  readonly model: Float64Array;
  readonly residuals: Float64Array;
  readonly chiSquare: number;
}

/**
 * Weighted nonlinear least squares by the Levenberg-Marquardt method (D. Marquardt, J. Soc. Indust. Appl. Math. 11, 431
 * (1963)).
 *
 * Each step is one iteration of the library ml-levenberg-marquardt on residuals divided by their standard deviations,
 * reduced to as many equations as there are parameters, and on parameters scaled by the columns of the Jacobian, which
 * makes its damping Marquardt's. Whether a step is taken, the
 * damping, bounds, convergence and covariance are decided here, since the library never rejects a step and knows no
 * covariance. A step to where the model is not finite is rejected.
 *
 * Convergence: the residuals are orthogonal to the tangent plane of the model, whatever the scales of the parameters (D.
 * Bates, D. Watts, Technometrics 23, 179 (1981)).
 *
 * @param problem Model, data and start values.
 * @returns Best values with covariance; a poor fit is told by `converged` and `reason`, not thrown.
 * @throws {RangeError} If there are fewer data than free parameters or than 2, a standard deviation is not > 0, a start
 * value is outside its bounds, a name is used twice, or the model is not finite at the start.
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
  const { parameters, sigma, tolerance = DEFAULT_TOLERANCE, mostSteps = MOST_STEPS } = problem;
  const n = problem.data.length;
  const lower = parameters.map((parameter) => parameter.lower ?? -Infinity);
  const upper = parameters.map((parameter) => parameter.upper ?? Infinity);
  const scales = parameters.map(({ scale, start }) => scale ?? (start === 0 ? 1 : Math.abs(start)));
  const data = problem.data.map((value, i) => value / sigma[i]);
  let evaluations = 0;

  function evaluate(values: Float64Array): Point {
    const model = new Float64Array(n);
    problem.model(values, model);
    evaluations++;
    const residuals = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      model[i] /= sigma[i];
      residuals[i] = data[i] - model[i];
    }
    return { values, model, residuals, chiSquare: dot(residuals, residuals) };
  }

  /** Derivatives of the whitened model; central differences are one-sided at a bound or beside a value not finite. */
  function jacobian(at: Point): Float64Array[] {
    return parameters.map(({ fixed }, j) => {
      const column = new Float64Array(n);
      if (fixed) return column;
      if (problem.derivative?.(j, at.values, column)) {
        for (let i = 0; i < n; i++) column[i] /= sigma[i];
        return column;
      }
      const h = DERIVATIVE_STEP * Math.max(scales[j], Math.abs(at.values[j]));
      const [high, low] = [h, -h].map((change) => {
        const value = clamp(at.values[j] + change, lower[j], upper[j]);
        const beside = value === at.values[j] ? at : evaluate(at.values.with(j, value));
        return Number.isFinite(beside.chiSquare) ? beside : at;
      });
      const width = high.values[j] - low.values[j];
      if (width > 0) { for (let i = 0; i < n; i++) column[i] = (high.model[i] - low.model[i]) / width; }
      return column;
    });
  }

  /** Parameters that may move: not fixed, not pressed against a bound by the gradient. */
  function freeParameters(at: Point, columns: readonly Float64Array[]): number[] {
    return parameters.flatMap(({ fixed }, j) => {
      const descent = dot(columns[j], at.residuals);
      const held = (at.values[j] <= lower[j] && descent <= 0) || (at.values[j] >= upper[j] && descent >= 0);
      return fixed || held ? [] : [j];
    });
  }

  /** One damped step of the library; its parameters are distances from the point, in lengths of the columns. */
  function libraryStep(from: Point, free: readonly number[], plane: Tangent, damping: number): Point {
    const { norms, reduced: { rows, target } } = plane;
    const { parameterValues } = levenbergMarquardt(
      { x: target.map((_, i) => i), y: target as number[] },
      (distances: number[]) => (i: number) => dot(rows[i], distances),
      {
        initialValues: free.map(() => 0),
        damping,
        maxIterations: 1,
        errorTolerance: 0,
        minValues: free.map((j, f) => (lower[j] - from.values[j]) * norms[f]),
        maxValues: free.map((j, f) => (upper[j] - from.values[j]) * norms[f]),
        jacobianFunction: () => (i: number) => rows[i] as number[],
      },
    );
    const values = from.values.slice();
    free.forEach((j, f) => values[j] = clamp(values[j] + parameterValues[f] / norms[f], lower[j], upper[j]));
    return values.every((value, j) => value === from.values[j]) ? from : evaluate(values);
  }

  let point = evaluate(Float64Array.from(parameters, (parameter) => parameter.start));
  const wrong = point.residuals.findIndex((value) => !Number.isFinite(value * value));
  if (wrong >= 0) {
    throw new RangeError(
      cannot("fit", `model value ${wrong} must be finite at the start`, point.model[wrong] * sigma[wrong]),
    );
  }
  let columns = jacobian(point);
  let damping = DAMPING_START;
  let settled = false;
  let stopped = `no minimum after ${mostSteps} steps`;
  let previous = { offset: Infinity, fall: Infinity };
  for (let step = 0; step < mostSteps && !settled; step++) {
    const free = freeParameters(point, columns);
    if (free.length === 0) {
      settled = true;
      break;
    }
    const plane = tangent(free.map((j) => columns[j]), point.residuals);
    const { offset } = plane;
    const inflation = Math.sqrt(Math.max(1, point.chiSquare / Math.max(1, n - free.length)));
    const isClose = offset <= CLOSE * inflation;
    const noise = ROUNDING * point.chiSquare;
    settled = offset <= tolerance * inflation ||
      (isClose && offset >= previous.offset && previous.fall <= noise);

    // Close to the minimum chi-square no longer falls visibly, but the distance does.
    const highest = point.chiSquare + (isClose ? noise : -noise);
    let next = libraryStep(point, free, plane, damping);
    // Also true of NaN.
    while (!(next.chiSquare <= highest) && !settled && damping < DAMPING_MOST) {
      damping *= DAMPING_UP;
      next = libraryStep(point, free, plane, damping);
    }
    if (next.chiSquare <= highest) {
      previous = { offset, fall: point.chiSquare - next.chiSquare };
      damping = Math.max(DAMPING_LEAST, damping / DAMPING_DOWN);
      point = next;
      columns = jacobian(point);
    } else if (!settled) {
      stopped = "no step lowers chi-square";
      break;
    }
  }

  const count = parameters.length;
  const isAtBound = parameters.map(({ fixed }, j) =>
    !fixed && (point.values[j] <= lower[j] || point.values[j] >= upper[j])
  );
  const free = parameters.flatMap(({ fixed }, j) => fixed || isAtBound[j] ? [] : [j]);
  const plane = free.length === 0 ? null : tangent(free.map((j) => columns[j]), point.residuals);
  const lost = plane !== null && plane.covariance === null ? parameters[free[plane.weakest]].name : null;
  const covariance = new Float64Array(count * count);
  const standardErrors = Float64Array.from(parameters, ({ fixed }) => fixed && lost === null ? 0 : Infinity);
  free.forEach((a, row) => {
    if (!plane?.covariance) return;
    free.forEach((b, column) => covariance[a * count + b] = plane.covariance!.get(row, column));
    standardErrors[a] = Math.sqrt(covariance[a * count + a]);
  });
  const atBound = parameters.filter((_, j) => isAtBound[j]).map(({ name }) => name);
  const success = atBound.length > 0 ? `converged with ${atBound.join(", ")} at a bound` : "converged";
  return {
    names: parameters.map(({ name }) => name),
    values: point.values,
    covariance,
    standardErrors,
    chiSquare: point.chiSquare,
    degreesOfFreedom: n - free.length,
    fitted: point.model.map((value, i) => value * sigma[i]),
    converged: settled && lost === null,
    atBound,
    reason: lost !== null ? `the data do not determine ${lost}` : settled ? success : stopped,
    evaluations,
  };
}

function clamp(value: number, lower: number, upper: number): number {
  return Math.min(upper, Math.max(lower, value));
}

function check({ parameters, data, sigma }: FitProblem): void {
  const least = Math.max(2, parameters.filter(({ fixed }) => !fixed).length);
  if (data.length < least) {
    throw new RangeError(cannot("fit", `there must be at least ${least} data`, data.length));
  }
  const bad = sigma.findIndex((value) => !(value > 0) || !Number.isFinite(value));
  if (sigma.length !== data.length || bad >= 0) {
    throw new RangeError(
      cannot("fit", `there must be ${data.length} sigmas, each > 0`, sigma[bad] ?? sigma.length),
    );
  }
  const wrong = data.findIndex((value) => !Number.isFinite(value));
  if (wrong >= 0) throw new RangeError(cannot("fit", `datum ${wrong} must be finite`, data[wrong]));
  const names = new Set<string>();
  for (const { name, start, lower = -Infinity, upper = Infinity, scale = 1 } of parameters) {
    if (names.has(name)) throw new RangeError(cannot("fit", "parameter names must be unique", name));
    names.add(name);
    if (!(Number.isFinite(start) && start >= lower && start <= upper && lower < upper)) {
      throw new RangeError(cannot("fit", `the start of ${name} must be in ${lower}..${upper}`, start));
    }
    if (!(scale > 0 && scale < Infinity)) {
      throw new RangeError(cannot("fit", `the scale of ${name} must be > 0`, scale));
    }
  }
}

/**
 * Correlation coefficient of two fitted parameters.
 *
 * @param fit The fit.
 * @param nameA One parameter.
 * @param nameB Another.
 * @returns Coefficient, -1..1.
 * @throws {RangeError} If a name is unknown, or the parameter has no variance: fixed, at a bound or not determined.
 */
export function correlation(fit: FitResult, nameA: string, nameB: string): number {
  const count = fit.names.length;
  const [a, b] = [nameA, nameB].map((name) => {
    const index = fit.names.indexOf(name);
    if (index < 0) {
      throw new RangeError(cannot("correlate", `the name must be one of ${fit.names.join(", ")}`, name));
    }
    const variance = fit.covariance[index * count + index];
    if (!(variance > 0)) {
      throw new RangeError(cannot("correlate", `${name} must have a variance > 0`, variance));
    }
    return index;
  });
  return fit.covariance[a * count + b] /
    Math.sqrt(fit.covariance[a * count + a] * fit.covariance[b * count + b]);
}
