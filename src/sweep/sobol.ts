/**
 * Degree s, coefficients a of the primitive polynomial and first direction numbers m_i of dimensions 2..10.
 *
 * Source: S. Joe, F. Y. Kuo, SIAM J. Sci. Comput. 30, 2635 (2008), doi:10.1137/070709359, table `new-joe-kuo-6.21201`.
 */
const DIRECTIONS: readonly { readonly a: number; readonly m: readonly number[] }[] = [
  { a: 0, m: [1] },
  { a: 1, m: [1, 3] },
  { a: 1, m: [1, 3, 1] },
  { a: 2, m: [1, 1, 1] },
  { a: 1, m: [1, 1, 3, 3] },
  { a: 4, m: [1, 3, 5, 13] },
  { a: 2, m: [1, 1, 5, 5, 17] },
  { a: 4, m: [1, 1, 5, 5, 5] },
  { a: 7, m: [1, 1, 7, 11, 19] },
];

const BITS = 32;

/** Most dimensions that {@link sobolPoints} knows. */
export const SOBOL_DIMENSIONS: number = DIRECTIONS.length + 1;

/**
 * First points of the Sobol sequence, the origin included, in Gray-code order.
 *
 * The first 2^k points fill the box evenly in every dimension; other counts do not. The origin is kept, since leaving it
 * out spoils the balance (A. B. Owen, arXiv:2008.08051).
 *
 * Source: I. M. Sobol, USSR Comput. Math. Math. Phys. 7, 86 (1967); order: I. A. Antonov, V. M. Saleev, USSR Comput. Math.
 * Math. Phys. 19, 252 (1979); direction numbers: S. Joe, F. Y. Kuo, SIAM J. Sci. Comput. 30, 2635 (2008).
 *
 * @param count Points, 1..2^31.
 * @param dimensions Dimensions, 1..10.
 * @returns Coordinates in [0, 1), row by row, shape (count) x (dimensions).
 * @throws {RangeError} If there are more dimensions than direction numbers.
 * @example The first points of the published sequence
 * ```ts
 * import { sobolPoints } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.deepEqual([...sobolPoints(4, 2)], [0, 0, 0.5, 0.5, 0.75, 0.25, 0.25, 0.75]);
 * ```
 */
export function sobolPoints(count: number, dimensions: number): Float64Array {
  if (!(dimensions >= 1 && dimensions <= SOBOL_DIMENSIONS)) {
    throw new RangeError(
      `Cannot sample as dimensions must be in 1..${SOBOL_DIMENSIONS}: current value is ${dimensions}`,
    );
  }
  const points = new Float64Array(count * dimensions);
  for (let d = 0; d < dimensions; d++) {
    const directions = directionNumbers(d);
    let bits = 0;
    for (let i = 1; i < count; i++) {
      // The lowest zero bit of i - 1 is the lowest one bit of i.
      bits ^= directions[31 - Math.clz32(i & -i)];
      points[i * dimensions + d] = (bits >>> 0) * 2 ** -BITS;
    }
  }
  return points;
}

/** Direction numbers v_1..v_32 as 32-bit fractions; the recurrence is eq. 2 of Joe and Kuo. */
function directionNumbers(dimension: number): Uint32Array {
  const directions = new Uint32Array(BITS);
  if (dimension === 0) return directions.map((_, k) => 2 ** (BITS - 1 - k));
  const { a, m } = DIRECTIONS[dimension - 1];
  const degree = m.length;
  for (let k = 0; k < BITS; k++) {
    if (k < degree) {
      directions[k] = m[k] * 2 ** (BITS - 1 - k);
      continue;
    }
    let value = directions[k - degree] ^ (directions[k - degree] >>> degree);
    for (let j = 1; j < degree; j++) {
      if ((a >> (degree - 1 - j)) & 1) value ^= directions[k - j];
    }
    directions[k] = value;
  }
  return directions;
}
