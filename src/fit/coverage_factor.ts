import { cannot } from "../base/mod.ts";

/** Above this many degrees of freedom Student's distribution is the normal one to four digits of the factor. */
const MANY = 20_000;

/**
 * Coverage factor of Student's distribution for the probability that k = 2 has in a normal one, 95.45 %.
 *
 * Source: JCGM 100:2008, G.3 and table G.2; distribution by M. Abramowitz, I. Stegun, Handbook of Mathematical Functions
 * (1964), eqs. 26.7.3 and 26.7.4.
 *
 * @param degreesOfFreedom Whole number >= 1, or Infinity.
 * @returns Factor, >= 2.
 * @throws {RangeError} If the degrees of freedom are not such a number.
 * @example JCGM 100, table G.2: 2.28 for 10 degrees of freedom
 * ```ts
 * import { coverageFactor } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(coverageFactor(10).toFixed(2), "2.28");
 * ```
 */
export function coverageFactor(degreesOfFreedom: number): number {
  if (degreesOfFreedom > MANY) return 2;
  if (!Number.isInteger(degreesOfFreedom) || degreesOfFreedom < 1) {
    throw new RangeError(
      cannot("give a coverage factor", "degrees of freedom must be a whole number >= 1", degreesOfFreedom),
    );
  }
  const probability = 0.954499736103642; // 2 Phi(2) - 1
  let low = 2;
  let high = 20;
  while (high - low > 1e-9) {
    const middle = 0.5 * (low + high);
    if (withinProbability(middle, degreesOfFreedom) < probability) low = middle;
    else high = middle;
  }
  return 0.5 * (low + high);
}

/** Probability of |t| below a value. */
function withinProbability(t: number, degreesOfFreedom: number): number {
  const theta = Math.atan(t / Math.sqrt(degreesOfFreedom));
  const cosine = Math.cos(theta);
  const isOdd = degreesOfFreedom % 2 === 1;
  let term = isOdd ? cosine : 1;
  let sum = degreesOfFreedom === 1 ? 0 : term;
  for (let n = isOdd ? 3 : 2; n < degreesOfFreedom; n += 2) {
    term *= ((n - 1) / n) * cosine * cosine;
    sum += term;
  }
  return isOdd ? (2 / Math.PI) * (theta + Math.sin(theta) * sum) : Math.sin(theta) * sum;
}
