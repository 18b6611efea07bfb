import { cannot } from "../base/mod.ts";

/**
 * Shares of the time that make the variance of a sum smallest, when part i has the variance `varianceTimes[i] / time`:
 * proportional to the square roots.
 *
 * Source: J. Neyman, J. R. Stat. Soc. 97, 558 (1934), for samples of strata; the same minimum by Lagrange's multiplier.
 *
 * @param varianceTimes Variance times time of each part, eV^2 s, each > 0.
 * @returns Shares, adding up to one.
 * @throws {RangeError} If a number is not > 0.
 * @example A part with four times the variance gets twice the time
 * ```ts
 * import { optimalShares } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const [first, second] = optimalShares([4, 1]);
 * assert.equal((first / second).toFixed(9), "2.000000000");
 * ```
 */
export function optimalShares(varianceTimes: readonly number[]): number[] {
  const root = rootSum(varianceTimes);
  return varianceTimes.map((one) => Math.sqrt(one) / root);
}

/**
 * Standard uncertainty after a time that is split by {@link optimalShares}: `sqrt((sum sqrt(v_i))^2 / T + floor^2)`.
 *
 * @param varianceTimes Variance times time of each part, eV^2 s, each > 0.
 * @param floorEv What does not shrink with time, eV, >= 0.
 * @param timeS Time, s, > 0.
 * @returns Combined standard uncertainty, eV.
 * @example Without a floor four times the time halves the uncertainty
 * ```ts
 * import { uncertaintyAfter } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(uncertaintyAfter([1, 1], 0, 100) / uncertaintyAfter([1, 1], 0, 400), 2);
 * ```
 */
export function uncertaintyAfter(
  varianceTimes: readonly number[],
  floorEv: number,
  timeS: number,
): number {
  return Math.hypot(rootSum(varianceTimes) / Math.sqrt(timeS), floorEv);
}

/**
 * Least time for a target: `(sum sqrt(v_i))^2 / (target^2 - floor^2)`.
 *
 * @param varianceTimes Variance times time of each part, eV^2 s, each > 0.
 * @param floorEv What does not shrink with time, eV, >= 0.
 * @param targetEv Wanted combined standard uncertainty, eV, > 0.
 * @returns Time, s; Infinity where the target is not above the floor.
 * @throws {RangeError} If the target is not > 0.
 */
export function leastTimeS(varianceTimes: readonly number[], floorEv: number, targetEv: number): number {
  if (!(targetEv > 0)) throw new RangeError(cannot("plan", "the target must be > 0 eV", `${targetEv} eV`));
  const root = rootSum(varianceTimes);
  return targetEv > floorEv ? (root * root) / (targetEv * targetEv - floorEv * floorEv) : Infinity;
}

function rootSum(varianceTimes: readonly number[]): number {
  const wrong = varianceTimes.find((one) => !(one > 0 && one < Infinity));
  if (wrong !== undefined) {
    throw new RangeError(cannot("split time", "every variance must be > 0 and finite", wrong));
  }
  return varianceTimes.reduce((sum, one) => sum + Math.sqrt(one), 0);
}
