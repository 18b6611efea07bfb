import { cannot } from "../base/mod.ts";
import { BOLTZMANN_J_PER_K, ELECTRON_MASS_KG, ELEMENTARY_CHARGE_C, PLANCK_J_S } from "./constants.ts";
import { thermalEnergyEv } from "./fowler.ts";

/** A0 = 4 pi m e k^2/h^3, about 1.2017e6 A m^-2 K^-2. */
const RICHARDSON_A_PER_M2_K2 =
  (4 * Math.PI * ELECTRON_MASS_KG * ELEMENTARY_CHARGE_C * BOLTZMANN_J_PER_K ** 2) /
  PLANCK_J_S ** 3;

/**
 * Thermionic current density of a metal, the Richardson-Dushman equation `A0 T^2 exp(-W/kT)`, without reflection at the
 * barrier and without field.
 *
 * Source: S. Dushman, Phys. Rev. 21, 623 (1923).
 *
 * @param workFunctionEv Work function, eV, > 0.
 * @param temperatureK Temperature, K, >= 0.
 * @returns Current density, A/m^2.
 * @throws {RangeError} If a number is out of range.
 * @example Tungsten at 2500 K
 * ```ts
 * import { richardsonDushmanAPerM2 } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(richardsonDushmanAPerM2(4.5, 2500).toFixed(0), "6369");
 * ```
 */
export function richardsonDushmanAPerM2(workFunctionEv: number, temperatureK: number): number {
  if (!(workFunctionEv > 0)) {
    throw new RangeError(
      cannot("compute thermionic emission", "workFunctionEv must be > 0 eV", workFunctionEv),
    );
  }
  const kT = thermalEnergyEv(temperatureK);
  return kT === 0 ? 0 : RICHARDSON_A_PER_M2_K2 * temperatureK ** 2 * Math.exp(-workFunctionEv / kT);
}
