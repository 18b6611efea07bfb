import { fowlerIntegralEv2, thermalEnergyEv } from "./fowler.ts";

/** ln(1 + e^x) without overflow. */
function softplus(x: number): number {
  return Math.max(x, 0) + Math.log1p(Math.exp(-Math.abs(x)));
}

/**
 * Distribution of the energies normal to the surface, just outside it: `kT ln(1 + exp((E_m - E_n)/kT))`, a straight fall
 * to zero at E_m at 0 K. Its integral is {@link planeRetardedYieldEv2} without retarding.
 *
 * Source: L. A. DuBridge, Phys. Rev. 43, 727 (1933).
 *
 * @param normalEnergyEv Energy of the motion normal to the surface, eV; the density is zero below 0.
 * @param maximumEnergyEv E_m = h nu - W, eV.
 * @param temperatureK Temperature of the emitter, K, >= 0.
 * @returns Density, eV.
 * @throws {RangeError} If the temperature is not a number >= 0.
 */
export function normalEnergyDensityEv(
  normalEnergyEv: number,
  maximumEnergyEv: number,
  temperatureK: number,
): number {
  const kT = thermalEnergyEv(temperatureK);
  if (normalEnergyEv < 0) return 0;
  const distance = maximumEnergyEv - normalEnergyEv;
  return kT === 0 ? Math.max(0, distance) : kT * softplus(distance / kT);
}

/**
 * Distribution of the total kinetic energies just outside the surface: `E/(1 + exp((E - E_m)/kT))`, a triangle up to E_m
 * at 0 K. Its maximum lies at `kT [1 + w]` where `w e^w = e^(E_m/kT - 1)`.
 *
 * Source: L. A. DuBridge, Phys. Rev. 43, 727 (1933).
 *
 * @param kineticEnergyEv Kinetic energy outside, eV; the density is zero below 0.
 * @param maximumEnergyEv E_m = h nu - W, eV.
 * @param temperatureK Temperature of the emitter, K, >= 0.
 * @returns Density, eV.
 * @throws {RangeError} If the temperature is not a number >= 0.
 */
export function totalEnergyDensityEv(
  kineticEnergyEv: number,
  maximumEnergyEv: number,
  temperatureK: number,
): number {
  const kT = thermalEnergyEv(temperatureK);
  if (kineticEnergyEv < 0) return 0;
  if (kT === 0) return kineticEnergyEv <= maximumEnergyEv ? kineticEnergyEv : 0;
  return kineticEnergyEv / (1 + Math.exp((kineticEnergyEv - maximumEnergyEv) / kT));
}

/**
 * Current to a plane collector opposite a plane emitter, up to a constant: the integral of {@link normalEnergyDensityEv}
 * above the retarding energy, `(kT)^2 f((E_m - R)/kT)`.
 *
 * Source: L. A. DuBridge, Phys. Rev. 43, 727 (1933).
 *
 * @param retardingEv Energy that the field between the surfaces takes, contact potential included, eV; below 0 every
 * electron arrives.
 * @param maximumEnergyEv E_m = h nu - W of the emitter, eV.
 * @param temperatureK Temperature of the emitter, K, >= 0.
 * @returns Relative current, eV^2.
 * @throws {RangeError} If the temperature is not a number >= 0.
 * @example Without retarding it is Fowler's yield
 * ```ts
 * import { fowlerYieldEv2, planeRetardedYieldEv2 } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(planeRetardedYieldEv2(-1, 5 - 4.5, 300), fowlerYieldEv2(5, 4.5, 300));
 * ```
 */
export function planeRetardedYieldEv2(
  retardingEv: number,
  maximumEnergyEv: number,
  temperatureK: number,
): number {
  return fowlerIntegralEv2(maximumEnergyEv - Math.max(0, retardingEv), thermalEnergyEv(temperatureK));
}

/**
 * Current from a small emitter to a sphere around it, up to a constant: the integral of {@link totalEnergyDensityEv}
 * above the retarding energy, `(kT)^2 [f(m) + r ln(1 + e^m)]` with `m = (E_m - R)/kT`, `r = R/kT`.
 *
 * Source: L. A. DuBridge, Phys. Rev. 43, 727 (1933); the integral is done here.
 *
 * @param retardingEv Energy that the field between the surfaces takes, contact potential included, eV; below 0 every
 * electron arrives.
 * @param maximumEnergyEv E_m = h nu - W of the emitter, eV.
 * @param temperatureK Temperature of the emitter, K, >= 0.
 * @returns Relative current, eV^2.
 * @throws {RangeError} If the temperature is not a number >= 0.
 */
export function sphereRetardedYieldEv2(
  retardingEv: number,
  maximumEnergyEv: number,
  temperatureK: number,
): number {
  const retarding = Math.max(0, retardingEv);
  return planeRetardedYieldEv2(retarding, maximumEnergyEv, temperatureK) +
    retarding * normalEnergyDensityEv(retarding, maximumEnergyEv, temperatureK);
}
