import {
  type Complex,
  complexAdd,
  complexDivide,
  complexLog,
  complexMultiply,
  complexSqrt,
} from "../math/mod.ts";

/** One Drude-Lindhard oscillator of the optical energy-loss function. */
export interface LossOscillator {
  /** Energy of the oscillator, eV, > 0. */
  readonly energyEv: number;
  /** Full width at half maximum of a narrow oscillator's peak, eV, > 0. */
  readonly fwhmEv: number;
  /** Share of the sum rule, > 0; the shares of a metal add to 1. */
  readonly strength: number;
}

/** Bohr radius, nm, CODATA 2022. */
const BOHR_RADIUS_NM = 0.0529177210544;

/**
 * Differential inverse inelastic mean free path of an electron for a loss T, by Drude-Lindhard oscillators.
 *
 * The optical energy-loss function is `Im(-1/eps) = sum f w^2 g T/((w^2 - T^2)^2 + g^2 T^2)` with energy w, width g, strength
 * f of each oscillator; the extension to momentum transfer q shifts w to `w + dispersion q^2/2m` (hbar = 1), and
 * `K(T) = 1/(pi a0 E) integral Im(-1/eps) dq/q` runs over the allowed q. The integral is done in closed form, by
 * partial fractions in q^2. Exchange and relativity are left out.
 *
 * Sources: R. Ritchie, A. Howie, Philos. Mag. 36, 463 (1977); C. Tung, Y. Chen, C. Kwei, T. Chou, Phys. Rev. B 49, 16684
 * (1994) (cited from memory). Deviation: none but the closed form.
 *
 * @param oscillators The oscillators.
 * @param dispersion 1 for free electrons at large q, 0 for none (then large q is overrated).
 * @param energyEv Energy of the electron from the band bottom, eV, > 0.
 * @param lossEv Energy loss, eV.
 * @returns K, 1/(eV nm), >= 0; zero for losses outside 0..energyEv.
 * @example The mean free path of aluminum at 1000 eV, by its plasmon alone, is near 2.5 nm
 * ```ts
 * import { oscillatorInverseMeanFreePath } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const plasmon = [{ energyEv: 15, fwhmEv: 1, strength: 1 }];
 * let inverseNm = 0;
 * for (let loss = 0.05; loss < 500; loss += 0.1) inverseNm += 0.1 * oscillatorInverseMeanFreePath(plasmon, 1, 1000, loss);
 * assert.ok(Math.abs(1 / inverseNm - 2.5) < 0.2);
 * ```
 */
export function oscillatorInverseMeanFreePath(
  oscillators: readonly LossOscillator[],
  dispersion: number,
  energyEv: number,
  lossEv: number,
): number {
  if (!(lossEv > 0 && lossEv < energyEv)) return 0;
  const root = Math.sqrt(energyEv);
  const rest = Math.sqrt(energyEv - lossEv);
  // q^2/2m at both ends; the lower one without cancellation.
  const most = (root + rest) ** 2;
  const least = (lossEv / (root + rest)) ** 2;
  let sum = 0;
  for (const { energyEv: w, fwhmEv: g, strength } of oscillators) {
    // g T/((x^2 - T^2)^2 + g^2 T^2) = Im 1/(x^2 - z^2) with z^2 = T^2 + i g T and x = w + dispersion u, u = q^2/2m;
    // dq/q = du/2u, and 1/(x^2 - z^2) = [1/(x - z) - 1/(x + z)]/2z.
    const z = complexSqrt({ re: lossEv * lossEv, im: g * lossEv });
    const difference = complexAdd(
      overMomenta({ re: w - z.re, im: -z.im }, dispersion, least, most),
      complexMultiply({ re: -1, im: 0 }, overMomenta({ re: w + z.re, im: z.im }, dispersion, least, most)),
    );
    sum += strength * w * w * complexDivide(difference, complexMultiply({ re: 4, im: 0 }, z)).im;
  }
  return sum / (Math.PI * BOHR_RADIUS_NM * energyEv);
}

/** Integral of 1/(u (b + s u)) du = ln(u/(b + s u))/b; the imaginary part of b keeps its sign, so no branch is crossed. */
function overMomenta(b: Complex, s: number, least: number, most: number): Complex {
  const end = complexLog({ re: b.re + s * most, im: b.im });
  const start = complexLog({ re: b.re + s * least, im: b.im });
  return complexDivide({ re: Math.log(most / least) - end.re + start.re, im: start.im - end.im }, b);
}
