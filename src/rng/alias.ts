import type { Xoshiro128pp } from "./xoshiro.ts";

const THRESHOLD_STEPS = 65536;
const TO_UNIT = 2 ** -32;

/**
 * Writes one row of an alias table: entry i holds, packed in one word, the threshold (upper 16 bits) below which i
 * itself is drawn and the other outcome (lower 16 bits) drawn above it. Thresholds are rounded to 2^-16, so a
 * probability is off by at most 2^-17 of the mean one.
 *
 * Source: A. Walker, ACM Trans. Math. Softw. 3, 253 (1977), built in linear time as in M. Vose, IEEE Trans. Softw.
 * Eng. 17, 972 (1991).
 *
 * @param weights Weights of the outcomes, >= 0, not all zero, shape (n), n <= 65535.
 * @param table Where to write.
 * @param offset First word of the row in `table`.
 */
export function writeAliasRow(weights: ArrayLike<number>, table: Uint32Array, offset: number): void {
  const count = weights.length;
  let total = 0;
  let least = 0;
  for (let i = 0; i < count; i++) {
    total += weights[i];
    if (weights[i] < least) least = weights[i];
  }
  if (!(total > 0) || least < 0 || !Number.isFinite(total) || count >= THRESHOLD_STEPS) {
    throw new RangeError(
      `Cannot build an alias row as it needs 1..65535 weights >= 0 with a positive sum: current value is ${count} weights of sum ${total}, least ${least}`,
    );
  }
  const scaled = Float64Array.from(weights, (weight) => (weight * count) / total);
  const work = new Int32Array(count);
  let small = 0;
  let large = count;
  for (let i = 0; i < count; i++) {
    if (scaled[i] < 1) work[small++] = i;
    else work[--large] = i;
  }
  const put = (index: number, share: number, other: number): void => {
    const threshold = Math.round(share * THRESHOLD_STEPS);
    // A full entry refers to itself, so that the largest 16-bit threshold loses nothing.
    table[offset + index] = threshold >= THRESHOLD_STEPS
      ? (((THRESHOLD_STEPS - 1) << 16) | index) >>> 0
      : ((threshold << 16) | other) >>> 0;
  };
  while (small > 0 && large < count) {
    const poor = work[--small];
    const rich = work[large];
    put(poor, scaled[poor], rich);
    scaled[rich] += scaled[poor] - 1;
    if (scaled[rich] < 1) {
      large++;
      work[small++] = rich;
    }
  }
  while (large < count) put(work[large], 1, work[large++]);
  while (small > 0) put(work[--small], 1, work[small]);
}

/**
 * Draws an outcome 0..count - 1 from a row written by {@link writeAliasRow}, with one 32-bit random number.
 *
 * @param table The table.
 * @param offset First word of the row.
 * @param count Number of outcomes of the row.
 * @param generator Source of randomness.
 * @returns Index of the outcome.
 */
export function sampleAlias(
  table: Uint32Array,
  offset: number,
  count: number,
  generator: Xoshiro128pp,
): number {
  const position = generator.nextUint32() * TO_UNIT * count;
  const index = position | 0;
  const entry = table[offset + index];
  return (position - index) * THRESHOLD_STEPS < entry >>> 16 ? index : entry & 0xffff;
}
