import type { Tally } from "../../src/transport/mod.ts";

/**
 * Mean of a score per history and its standard error from the scatter between groups, which must all hold the same
 * number of histories. Written out here so that it shares nothing with the statistics that are tested.
 */
export function tallyMean(
  tally: Tally,
  score: (group: Tally["groups"][number]) => number,
): { mean: number; standardError: number } {
  const { histories } = tally.groups[0];
  if (tally.groups.some((group) => group.histories !== histories)) {
    throw new RangeError("groups must hold the same number of histories");
  }
  const values = tally.groups.map((group) => score(group) / histories);
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  const squares = values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  return { mean, standardError: Math.sqrt(squares / (values.length - 1) / values.length) };
}

/** Sum of the entries first..end - 1. */
export function sumOf(values: ArrayLike<number>, first = 0, end = values.length): number {
  let sum = 0;
  for (let i = first; i < end; i++) sum += values[i];
  return sum;
}
