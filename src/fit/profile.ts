import { minimizePoisson, type PoissonFit, type PoissonProblem } from "./poisson.ts";

/** Interval of a parameter from the profile of the likelihood. */
export interface ProfileInterval {
  /** Lower end, or null when the deviance does not rise enough before a bound or a fit fails. */
  readonly lower: number | null;
  /** Upper end, or null likewise. */
  readonly upper: number | null;
}

const MOST_TRIES = 20;
/** The ends are found to this share of their distance. */
const END_TOLERANCE = 0.005;

/**
 * Interval of one parameter in which the deviance, minimized over all others, stays within `rise` of its minimum: 1 for
 * 68.3 %, 3.84 for 95 % (asymptotically, for one parameter). Unlike a standard error it may be asymmetric.
 *
 * Source: S. Wilks, Ann. Math. Stat. 9, 60 (1938); W. Eadie et al., Statistical Methods in Experimental Physics (1971),
 * ch. 9 (cited from memory).
 *
 * @param problem The problem that was fitted.
 * @param fit Its fit, converged.
 * @param name The parameter, neither fixed nor at a bound.
 * @param rise Rise of the deviance, > 0. Default: 1.
 * @returns The ends; each null where there is none.
 * @example The interval of a Poisson mean of 4 counts: the root of 2 (m - 4 - 4 ln(m/4)) = 1 on either side
 * ```ts
 * import { minimizePoisson, profileInterval } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const problem = {
 *   parameters: [{ name: "mean", start: 3 }],
 *   model: (p: Float64Array, out: Float64Array) => void out.fill(p[0] / 2),
 *   data: Float64Array.of(1, 3),
 * };
 * const { lower, upper } = profileInterval(problem, minimizePoisson(problem), "mean");
 * assert.deepEqual([lower?.toFixed(1), upper?.toFixed(1)], ["2.3", "6.3"]);
 * ```
 */
export function profileInterval(
  problem: PoissonProblem,
  fit: PoissonFit,
  name: string,
  rise = 1,
): ProfileInterval {
  const index = fit.names.indexOf(name);
  const best = fit.values[index];
  const target = Math.sqrt(rise);
  const { lower = -Infinity, upper = Infinity } = problem.parameters[index];

  function end(side: 1 | -1): number | null {
    let distance = target * fit.standardErrors[index];
    let near = 0; // distances that bracket the end
    let far = Infinity;
    let at = fit;
    for (let i = 0; i < MOST_TRIES; i++) {
      const value = best + side * distance;
      if (!(value > lower && value < upper)) return null;
      const next = minimizePoisson({
        ...problem,
        expected: at.fitted,
        parameters: problem.parameters.map((parameter, j) => ({
          ...parameter,
          start: j === index ? value : at.values[j],
          fixed: j === index || (parameter.fixed ?? false),
        })),
      });
      const root = Math.sqrt(Math.max(0, next.deviance - fit.deviance));
      if (!next.converged || !Number.isFinite(root)) return null;
      if (Math.abs(root - target) <= END_TOLERANCE * target) return value;
      at = next;
      if (root < target) near = distance;
      else far = distance;
      // The root of the rise is about proportional to the distance.
      const guess = distance * Math.min(3, target / Math.max(root, 0.1 * target));
      distance = guess > near && guess < far ? guess : far === Infinity ? 2 * near : 0.5 * (near + far);
    }
    return null;
  }
  return { lower: end(-1), upper: end(1) };
}
