import { cannot } from "../base/mod.ts";
import { FWHM_PER_SIGMA, gaussLegendre } from "../math/mod.ts";

/** Shape of a core-level line. */
export interface LineShape {
  /** Full width at half maximum of the Lorentzian (of the line with asymmetry 0), eV, >= 0. */
  readonly lorentzFwhmEv: number;
  /** Full width at half maximum of the Gaussian, eV, >= 0; not zero where the other is. */
  readonly gaussFwhmEv: number;
  /** Doniach-Sunjic asymmetry, 0..0.49; 0 is a Voigt line. */
  readonly asymmetry: number;
}

const LARGEST_ASYMMETRY = 0.49;

/** From this distance on, in standard deviations of the Gaussian, the tail series is exact to 1e-10 of the maximum. */
const TAIL = 8;
/** The Gaussian factor of the integrand ends at exp(-8.5^2/2), 2e-16. */
const REACH = 8.5;
const RULE = gaussLegendre(64);
/** Legendre polynomials at the nodes, times 2l + 1 and half the weight of the node: row l, column k. */
const PROJECTION = legendreRows(RULE.nodes).map((row, l) =>
  row.map((value, k) => (l + 0.5) * RULE.weights[k] * value)
);

/** Legendre polynomials of orders 0 to n - 1 at n points (Abramowitz & Stegun 8.5.3). */
function legendreRows(points: Float64Array): Float64Array[] {
  const rows = [points.map(() => 1), points.slice()];
  for (let l = 2; l < points.length; l++) {
    rows.push(points.map((x, k) => ((2 * l - 1) * x * rows[l - 1][k] - (l - 1) * rows[l - 2][k]) / l));
  }
  return rows;
}

/** Weights of the integral from 0 to 1 of t^-alpha g(t) over g at the nodes (product integration). */
function singularWeights(alpha: number): Float64Array {
  const weights = new Float64Array(RULE.nodes.length);
  // Moments of t^-alpha with shifted Legendre polynomials: (-1)^l (alpha)_l / (1 - alpha)_(l+1).
  let moment = 1 / (1 - alpha);
  for (let l = 0; l < PROJECTION.length && moment !== 0; l++) {
    for (let k = 0; k < weights.length; k++) weights[k] += moment * PROJECTION[l][k];
    moment *= -(alpha + l) / (l + 2 - alpha);
  }
  return weights;
}

/** Gamma function for x > 0 by Stirling's series after raising the argument (Abramowitz & Stegun 6.1.15, 6.1.37). */
function gamma(x: number): number {
  let product = 1;
  let z = x;
  while (z < 12) product *= z++;
  const z2 = z * z;
  const series = (1 / 12 - (1 / 360 - (1 / 1260 - 1 / (1680 * z2)) / z2) / z2) / z;
  return Math.exp((z - 0.5) * Math.log(z) - z + series) * Math.sqrt(2 * Math.PI) / product;
}

/**
 * The line shape of Doniach and Sunjic, `Gamma(1-a) cos[pi a/2 + (1-a) atan(e/g)] / (e^2 + g^2)^((1-a)/2)`.
 *
 * Its maximum lies at `-g tan[pi a/(2 (2-a))]`. For a > 0 it has no finite area.
 *
 * Source: S. Doniach, M. Sunjic, J. Phys. C 3, 285 (1970).
 *
 * @param offsetEv Kinetic energy minus the line's position e, eV; the long tail is at negative ones.
 * @param halfWidthEv Half-width g, half of the Lorentzian full width, eV, > 0.
 * @param asymmetry a, 0..0.49.
 * @returns Intensity, eV^(a-1).
 * @throws {RangeError} If the shape is out of range.
 */
export function doniachSunjic(offsetEv: number, halfWidthEv: number, asymmetry: number): number {
  const profile = lineProfile({ lorentzFwhmEv: 2 * halfWidthEv, gaussFwhmEv: 0, asymmetry });
  return Math.PI * profile(offsetEv);
}

/**
 * A Doniach-Sunjic line folded with a Gaussian, divided by pi: for asymmetry 0 the Voigt line of unit area.
 *
 * The line is the real part of the Fourier integral over t of `exp(i pi a/2) t^-a exp(-(g - i e) t - s^2 t^2/2)`, which
 * is done by product integration near the line and by its asymptotic series in the tails; absolute error about 1e-10 of
 * the maximum.
 *
 * Sources: S. Doniach, M. Sunjic, J. Phys. C 3, 285 (1970); product integration: P. Davis, P. Rabinowitz, Methods of
 * Numerical Integration, 2nd ed. (1984), sec. 2.5.6 (from memory). The Fourier form is derived here.
 *
 * @param shape Widths and asymmetry.
 * @returns Density as a function of kinetic energy minus the line's position, eV; 1/eV for asymmetry 0.
 * @throws {RangeError} If a width is negative, both are zero, or the asymmetry is not in 0..0.49.
 * @example A Gaussian of unit area at its center
 * ```ts
 * import { lineProfile } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const line = lineProfile({ lorentzFwhmEv: 0, gaussFwhmEv: 1, asymmetry: 0 });
 * assert.equal(line(0).toFixed(6), Math.sqrt(4 * Math.LN2 / Math.PI).toFixed(6));
 * ```
 */
export function lineProfile(
  { lorentzFwhmEv, gaussFwhmEv, asymmetry }: LineShape,
): (offsetEv: number) => number {
  const g = lorentzFwhmEv / 2;
  const sigma = gaussFwhmEv / FWHM_PER_SIGMA;
  if (!(g >= 0 && sigma >= 0 && g + sigma > 0 && g + sigma < Infinity)) {
    throw new RangeError(
      cannot(
        "shape a line",
        "widths must be >= 0 eV and not both 0",
        `${lorentzFwhmEv} eV, ${gaussFwhmEv} eV`,
      ),
    );
  }
  if (!(asymmetry >= 0 && asymmetry <= LARGEST_ASYMMETRY)) {
    throw new RangeError(cannot("shape a line", `asymmetry must be in 0..${LARGEST_ASYMMETRY}`, asymmetry));
  }
  const order = 1 - asymmetry;
  const phase = (Math.PI * asymmetry) / 2;
  const height = gamma(order) / Math.PI;
  const tailFrom = (TAIL * sigma) ** 2;
  const times = new Float64Array(RULE.nodes.length);
  const factors = new Float64Array(RULE.nodes.length);
  if (sigma > 0) {
    const reach = REACH / sigma;
    singularWeights(asymmetry).forEach((weight, k) => {
      const t = times[k] = (reach * (1 + RULE.nodes[k])) / 2;
      factors[k] = (weight * reach ** order * Math.exp(-g * t - 0.5 * (sigma * t) ** 2)) / Math.PI;
    });
  }

  /** Gamma(1-a) Re{e^(i pi a/2) sum (1-a)_2k (-s^2/2)^k / (k! z^(2k+1-a))} with z = g - i e. */
  function tail(e: number, square: number): number {
    const angle = phase + order * Math.atan2(e, g);
    const size = height * square ** (-order / 2);
    let [re, im] = [size * Math.cos(angle), size * Math.sin(angle)];
    // 1/z^2 = (g + i e)^2/|z|^4
    const scale = (-0.5 * sigma * sigma) / (square * square);
    const [stepRe, stepIm] = [scale * (g * g - e * e), scale * 2 * g * e];
    let sum = re;
    for (let k = 0; k < 20; k++) {
      const factor = ((2 * k + order) * (2 * k + 1 + order)) / (k + 1);
      [re, im] = [factor * (re * stepRe - im * stepIm), factor * (re * stepIm + im * stepRe)];
      sum += re;
      if (Math.abs(re) + Math.abs(im) < 1e-16 * size) break;
    }
    return sum;
  }

  return (offsetEv) => {
    const square = offsetEv * offsetEv + g * g;
    if (square >= tailFrom) return tail(offsetEv, square);
    let sum = 0;
    for (let k = 0; k < times.length; k++) sum += factors[k] * Math.cos(phase + offsetEv * times[k]);
    return sum;
  };
}
