import { cannot } from "../base/mod.ts";
import { BOLTZMANN_EV_PER_K } from "../data/mod.ts";

/** The series in powers of at most 1/2 ends below the rounding error: 2^-46 / 46^2. */
const SERIES_TERMS = 46;

/**
 * Fowler's function f(mu), the integral from 0 to infinity of ln(1 + e^(mu - y)) dy, which is -Li2(-e^mu).
 *
 * Relative accuracy about 1e-15. It tends to mu^2/2 + pi^2/6 far above threshold (Fowler's square law) and to e^mu far
 * below; its derivative is ln(1 + e^mu).
 *
 * Source: R. H. Fowler, Phys. Rev. 38, 45 (1931). Deviation: his series in powers of e^mu is replaced by the faster one
 * that Landen's identity gives, -Li2(-z) = Li2(z/(1+z)) + ln(1+z)^2/2 (L. Lewin, Polylogarithms and Associated Functions
 * (1981), ch. 1, from memory).
 *
 * @param mu Photon energy above threshold in units of kT, any number.
 * @returns f(mu), >= 0.
 * @example At threshold it is pi^2/12
 * ```ts
 * import { fowlerFunction } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(fowlerFunction(0).toFixed(12), (Math.PI ** 2 / 12).toFixed(12));
 * ```
 */
export function fowlerFunction(mu: number): number {
  if (mu > 0) return Math.PI ** 2 / 6 + 0.5 * mu * mu - fowlerFunction(-mu);
  const z = Math.exp(mu);
  const w = z / (1 + z);
  let sum = 0;
  for (let n = SERIES_TERMS; n >= 1; n--) sum = w * (1 / (n * n) + sum);
  return sum + 0.5 * Math.log1p(z) ** 2;
}

/**
 * Photoelectric yield per absorbed photon near threshold, up to a constant: `(kT)^2 f((h nu - W)/kT)`, and its limit
 * `(h nu - W)^2/2` at 0 K.
 *
 * For metals within about 1 eV above threshold (common practice, no source), where the transition probability is nearly
 * constant. A straight Fowler plot does not prove that the excitation is the one Fowler assumed.
 *
 * Source: R. H. Fowler, Phys. Rev. 38, 45 (1931).
 *
 * @param photonEnergyEv Photon energy, eV.
 * @param workFunctionEv Work function of the emitter, eV.
 * @param temperatureK Temperature of the emitter, K, >= 0.
 * @returns Relative yield, eV^2.
 * @throws {RangeError} If the temperature is not a number >= 0.
 * @example Hot metals emit below threshold
 * ```ts
 * import { fowlerYieldEv2 } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(fowlerYieldEv2(4.4, 4.5, 0), 0);
 * assert.ok(fowlerYieldEv2(4.4, 4.5, 1000) > 0);
 * ```
 */
export function fowlerYieldEv2(photonEnergyEv: number, workFunctionEv: number, temperatureK: number): number {
  return fowlerIntegralEv2(photonEnergyEv - workFunctionEv, thermalEnergyEv(temperatureK));
}

/** (kT)^2 f(E/kT) and its limit at kT = 0. */
export function fowlerIntegralEv2(energyEv: number, kTEv: number): number {
  if (kTEv === 0) return 0.5 * Math.max(0, energyEv) ** 2;
  return kTEv * kTEv * fowlerFunction(energyEv / kTEv);
}

/** kT, eV. */
export function thermalEnergyEv(temperatureK: number): number {
  if (!(temperatureK >= 0 && temperatureK < Infinity)) {
    throw new RangeError(cannot("compute emission", "temperatureK must be >= 0 K", temperatureK));
  }
  return BOLTZMANN_EV_PER_K * temperatureK;
}
