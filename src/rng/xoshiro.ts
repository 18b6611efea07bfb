const TO_UNIT = 2 ** -32;

/**
 * The xoshiro128++ 1.0 generator: 32-bit outputs, period 2^128 - 1.
 *
 * Source: D. Blackman, S. Vigna, ACM Trans. Math. Softw. 47, 36 (2021), doi:10.1145/3460772.
 *
 * @example The published start of the sequence from state 1, 2, 3, 4
 * ```ts
 * import { Xoshiro128pp } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const generator = new Xoshiro128pp(Uint32Array.of(1, 2, 3, 4));
 * assert.deepEqual([generator.nextUint32(), generator.nextUint32()], [641, 1573767]);
 * ```
 */
export class Xoshiro128pp {
  readonly #state: Uint32Array;

  /**
   * Starts from a given state.
   *
   * @param state Four words, not all zero; copied.
   */
  constructor(state: Uint32Array) {
    if (state.length !== 4 || state.every((word) => word === 0)) {
      throw new RangeError(
        `Cannot make a generator as state must be four words, not all zero: current value is ${state}`,
      );
    }
    this.#state = Uint32Array.from(state);
  }

  /** Next output, a whole number 0..2^32 - 1. */
  nextUint32(): number {
    const s = this.#state;
    const s0 = s[0], s1 = s[1], s2 = s[2], s3 = s[3];
    const sum = (s0 + s3) | 0;
    const result = (((sum << 7) | (sum >>> 25)) + s0) >>> 0;
    const t2 = s2 ^ s0;
    const t3 = s3 ^ s1;
    s[1] = s1 ^ t2;
    s[0] = s0 ^ t3;
    s[2] = t2 ^ (s1 << 9);
    s[3] = (t3 << 11) | (t3 >>> 21);
    return result;
  }

  /** Next uniform number in the open interval (0, 1): never 0, never 1, 32 random bits. */
  nextUniform(): number {
    return (this.nextUint32() + 0.5) * TO_UNIT;
  }
}
