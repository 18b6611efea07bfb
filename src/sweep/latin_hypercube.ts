import { streamState, Xoshiro128pp } from "../rng/mod.ts";

/**
 * Latin hypercube sample: in every dimension each of `count` equal slices holds exactly one point, at a random place in it.
 *
 * Source: M. D. McKay, R. J. Beckman, W. J. Conover, Technometrics 21, 239 (1979); the slices are shuffled after
 * R. Durstenfeld, Commun. ACM 7, 420 (1964).
 *
 * @param count Points, >= 1.
 * @param dimensions Dimensions, >= 1.
 * @param seed Seed, a whole number 0..2^53 - 1.
 * @returns Coordinates in (0, 1), row by row, shape (count) x (dimensions).
 * @example One point in each half
 * ```ts
 * import { latinHypercubePoints } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const [low, high] = latinHypercubePoints(2, 1, 7).toSorted();
 * assert.ok(low < 0.5 && high > 0.5);
 * ```
 */
export function latinHypercubePoints(count: number, dimensions: number, seed: number): Float64Array {
  const points = new Float64Array(count * dimensions);
  for (let d = 0; d < dimensions; d++) {
    const generator = new Xoshiro128pp(streamState(seed, "sampling", d));
    const slices = Uint32Array.from({ length: count }, (_, i) => i);
    for (let i = count - 1; i > 0; i--) {
      const j = Math.floor(generator.nextUniform() * (i + 1));
      [slices[i], slices[j]] = [slices[j], slices[i]];
    }
    slices.forEach((slice, i) => points[i * dimensions + d] = (slice + generator.nextUniform()) / count);
  }
  return points;
}
