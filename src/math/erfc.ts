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

/** Taylor expansions about equidistant nodes, `order + 1` coefficients each; any smooth function becomes a short sum. */
interface TaylorTable {
  readonly first: number;
  readonly perUnit: number;
  readonly order: number;
  readonly coefficients: Float64Array;
}

function taylorTable(
  first: number,
  last: number,
  perUnit: number,
  order: number,
  fill: (node: number, coefficients: Float64Array) => void,
): TaylorTable {
  const nodes = Math.round((last - first) * perUnit) + 1;
  const coefficients = new Float64Array(nodes * (order + 1));
  for (let i = 0; i < nodes; i++) {
    fill(first + i / perUnit, coefficients.subarray(i * (order + 1), (i + 1) * (order + 1)));
  }
  return { first, perUnit, order, coefficients };
}

function evaluate({ first, perUnit, order, coefficients }: TaylorTable, x: number): number {
  const node = Math.round((x - first) * perUnit);
  const distance = x - first - node / perUnit;
  let at = (node + 1) * (order + 1) - 1;
  let sum = coefficients[at];
  for (let n = 0; n < order; n++) sum = sum * distance + coefficients[--at];
  return sum;
}

const NORMAL_REACH = 9;
/** From `F'' = -x F'`. */
const NORMAL = taylorTable(-NORMAL_REACH, NORMAL_REACH, 16, 8, (x, c) => {
  c[0] = 0.5 * erfc(-x * Math.SQRT1_2);
  c[1] = normalPdf(x);
  for (let n = 0; n + 2 < c.length; n++) {
    c[n + 2] = -(x * (n + 1) * c[n + 1] + n * c[n]) / ((n + 1) * (n + 2));
  }
});

const SCALED_REACH = 6;
/** From `y' = 2 x y - 2/sqrt(pi)`. */
const SCALED = taylorTable(0, SCALED_REACH, 16, 9, (x, c) => {
  c[0] = erfcx(x);
  c[1] = 2 * x * c[0] - TWO_OVER_SQRT_PI;
  for (let n = 1; n + 1 < c.length; n++) c[n + 1] = (2 * x * c[n] + 2 * c[n - 1]) / (n + 1);
});

/**
 * {@link erfcx} for fits: from a table, many times faster, relative error below 1e-11 for x >= 0.
 *
 * @param x A real number >= 0.
 * @returns exp(x^2) erfc(x).
 */
export function fastErfcx(x: number): number {
  return x < SCALED_REACH ? evaluate(SCALED, x) : scaledErfcFraction(x);
}

/**
 * Standard normal distribution function, from a table; absolute error below 1e-14.
 *
 * @param x Distance from the mean in standard deviations.
 * @returns Probability of a smaller value, 0..1.
 */
export function normalCdf(x: number): number {
  return x <= -NORMAL_REACH ? 0 : x >= NORMAL_REACH ? 1 : evaluate(NORMAL, x);
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
