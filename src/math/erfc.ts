const TWO_OVER_SQRT_PI = 2 / Math.sqrt(Math.PI);
const SERIES_LIMIT = 2;

/** erf(x) exp(x^2) for 0 <= x <= 2 by the series with positive terms: M. Abramowitz, I. Stegun (1964), eq. 7.1.6. */
function scaledErfSeries(x: number): number {
  let term = x;
  let sum = x;
  for (let n = 1; term > sum * 1e-17; n++) {
    term *= (2 * x * x) / (2 * n + 1);
    sum += term;
  }
  return TWO_OVER_SQRT_PI * sum;
}

/** exp(x^2) erfc(x) for x >= 2 by the continued fraction, Abramowitz & Stegun eq. 7.1.14, from the far end. */
function scaledErfcFraction(x: number): number {
  let tail = x;
  for (let n = Math.ceil(20 + 160 / (x * x)); n >= 1; n--) tail = x + n / 2 / tail;
  return 1 / (Math.sqrt(Math.PI) * tail);
}

/**
 * Complementary error function, relative accuracy about 1e-14 for x < 26 (then it underflows to zero).
 *
 * Source: M. Abramowitz, I. Stegun, Handbook of Mathematical Functions (1964), eqs. 7.1.6 and 7.1.14.
 *
 * @param x Any real number.
 * @returns erfc(x), between 0 and 2.
 */
export function erfc(x: number): number {
  if (x < 0) return 2 - erfc(-x);
  const gaussian = Math.exp(-x * x);
  return x < SERIES_LIMIT ? 1 - gaussian * scaledErfSeries(x) : gaussian * scaledErfcFraction(x);
}

/**
 * Scaled complementary error function exp(x^2) erfc(x), which does not underflow for large x.
 *
 * Source: as {@link erfc}.
 *
 * @param x Any real number; overflows to Infinity below about -26.
 * @returns exp(x^2) erfc(x), positive.
 */
export function erfcx(x: number): number {
  return x < SERIES_LIMIT ? Math.exp(x * x) * erfc(x) : scaledErfcFraction(x);
}

/**
 * Standard normal distribution function.
 *
 * @param x Distance from the mean in standard deviations.
 * @returns Probability of a smaller value, 0..1.
 */
export function normalCdf(x: number): number {
  return 0.5 * erfc(-x * Math.SQRT1_2);
}

/**
 * Standard normal density.
 *
 * @param x Distance from the mean in standard deviations.
 * @returns Density at x.
 */
export function normalPdf(x: number): number {
  return Math.exp(-0.5 * x * x) / Math.sqrt(2 * Math.PI);
}
