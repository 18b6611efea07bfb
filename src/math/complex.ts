/** A complex number. */
export interface Complex {
  /** Real part. */
  readonly re: number;
  /** Imaginary part. */
  readonly im: number;
}

/**
 * Sum of two complex numbers.
 *
 * @param a First term.
 * @param b Second term.
 * @returns a + b.
 */
export function complexAdd(a: Complex, b: Complex): Complex {
  return { re: a.re + b.re, im: a.im + b.im };
}

/**
 * Product of two complex numbers.
 *
 * @param a First factor.
 * @param b Second factor.
 * @returns a b.
 */
export function complexMultiply(a: Complex, b: Complex): Complex {
  return { re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re };
}

/**
 * Quotient of two complex numbers.
 *
 * @param a Dividend.
 * @param b Divisor, not zero.
 * @returns a/b.
 */
export function complexDivide(a: Complex, b: Complex): Complex {
  const square = b.re * b.re + b.im * b.im;
  return { re: (a.re * b.re + a.im * b.im) / square, im: (a.im * b.re - a.re * b.im) / square };
}

/**
 * Principal square root, with real part >= 0 and the sign of the imaginary part kept.
 *
 * @param z A complex number.
 * @returns Its root.
 * @example A wave that decays
 * ```ts
 * import { complexSqrt } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.deepEqual(complexSqrt({ re: -4, im: 0 }), { re: 0, im: 2 });
 * ```
 */
export function complexSqrt(z: Complex): Complex {
  const modulus = Math.hypot(z.re, z.im);
  // The larger part from the modulus, the smaller one from 2 re im = Im z: no cancellation.
  if (z.re >= 0) {
    const re = Math.sqrt(0.5 * (modulus + z.re));
    return { re, im: re === 0 ? 0 : z.im / (2 * re) };
  }
  const im = Math.sqrt(0.5 * (modulus - z.re));
  return { re: Math.abs(z.im) / (2 * im), im: z.im < 0 ? -im : im };
}

/**
 * Principal natural logarithm, imaginary part in (-pi, pi].
 *
 * @param z A complex number, not zero.
 * @returns Its logarithm.
 */
export function complexLog(z: Complex): Complex {
  return { re: Math.log(Math.hypot(z.re, z.im)), im: Math.atan2(z.im, z.re) };
}
