import type { BatchTally } from "../transport/mod.ts";

/**
 * The memory of tallies, to hand it over instead of copying it.
 *
 * @param tallies Tallies.
 * @returns Their buffers.
 */
export function buffersOf(tallies: readonly BatchTally[]): ArrayBuffer[] {
  return tallies.flatMap((tally) =>
    Object.values(tally).map((sums: Float64Array) => sums.buffer as ArrayBuffer)
  );
}
