/**
 * What the analyzer records minus the energy above the Fermi level: `E_kin,meas = E - W_A - e U`. Sample and analyzer
 * share a Fermi level, so the sample's own work function does not enter.
 *
 * @param analyzerWorkFunctionEv W_A, eV.
 * @param biasV Sample bias U, V; negative accelerates electrons toward the analyzer.
 * @returns Shift, eV, to add to an energy above the Fermi level.
 * @example At -9 V the Fermi edge of the helium line 21.218 eV is recorded at 25.818 eV by an analyzer of 4.4 eV
 * ```ts
 * import { kineticEnergyShiftEv } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal((21.218 + kineticEnergyShiftEv(4.4, -9)).toFixed(3), "25.818");
 * ```
 */
export function kineticEnergyShiftEv(analyzerWorkFunctionEv: number, biasV: number): number {
  return -analyzerWorkFunctionEv - biasV;
}

/**
 * Energy gained between the surface and the analyzer entrance, bias and contact potential together:
 * `A = -e U + W - W_A`.
 *
 * @param workFunctionEv Work function of the emitting surface, eV.
 * @param analyzerWorkFunctionEv W_A, eV.
 * @param biasV Sample bias, V; negative accelerates.
 * @returns Gain, eV; negative where the field retards.
 */
export function accelerationEv(
  workFunctionEv: number,
  analyzerWorkFunctionEv: number,
  biasV: number,
): number {
  return workFunctionEv + kineticEnergyShiftEv(analyzerWorkFunctionEv, biasV);
}
