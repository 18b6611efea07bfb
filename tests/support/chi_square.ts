import { chiSquareProbability } from "../../src/fit/mod.ts";

/** Chance that a correct histogram fails one check of {@link histogramProbability}. */
export const FALSE_ALARM = 1e-6;

/**
 * Pearson's chi-square test of a histogram whose expectation is fully known: probability of a larger chi-square.
 * Neighboring cells are pooled until each expects at least ten (common practice asks for five).
 *
 * @param observed Counts, shape (cells).
 * @param expected Expected counts, the same total to 1e-6, shape (cells).
 */
export function histogramProbability(observed: ArrayLike<number>, expected: ArrayLike<number>): number {
  const pooled: [number, number][] = [];
  let seen = 0;
  let due = 0;
  let totalSeen = 0;
  let totalDue = 0;
  for (let i = 0; i < expected.length; i++) {
    seen += observed[i];
    due += expected[i];
    totalSeen += observed[i];
    totalDue += expected[i];
    if (due >= 10) {
      pooled.push([seen, due]);
      seen = due = 0;
    }
  }
  const last = pooled[pooled.length - 1];
  last[0] += seen;
  last[1] += due;
  if (Math.abs(totalSeen - totalDue) > 1e-6 * totalDue) {
    throw new RangeError(`histogram of ${totalSeen}, expectation of ${totalDue}`);
  }
  const chiSquare = pooled.reduce((sum, [count, mean]) => sum + (count - mean) ** 2 / mean, 0);
  return chiSquareProbability(chiSquare, pooled.length - 1);
}
