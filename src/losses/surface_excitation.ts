import { cannot } from "../base/mod.ts";

const BOHR_RADIUS_NM = 0.0529177210544;
/** e^2/(4 pi eps0), eV nm: twice the Rydberg energy times the Bohr radius, CODATA 2022. */
const COULOMB_EV_NM = 1.43996454;

/**
 * Surface excitation parameter: mean number of surface excitations when an electron crosses the surface once,
 * `1/(1 + a_H a_NFE sqrt(E) cos(alpha))` with `a_NFE = sqrt(8 a0/(pi^2 e^2)) = 0.173 eV^(-1/2)`.
 *
 * For fast electrons and a_H = 1 this is the surface-plasmon limit of a free-electron metal, `pi e^2/(2 hbar v cos(alpha))`.
 * For electrons of a few hundred eV and more; it saturates at 1 toward grazing emission and zero energy, where it is
 * only a bound.
 *
 * Source: R. Oswald (thesis, Tuebingen, 1992), as used by W. Werner, W. Smekal, C. Tomastik, H. Stoeri, Surf. Sci. 486, L461
 * (2001) (form from memory, medium confidence; the constant follows from the limit). Materials' a_H are not built in.
 *
 * @param energyEv Kinetic energy outside, eV, > 0.
 * @param emissionAngleDeg Angle from the surface normal, degrees, 0..90.
 * @param materialFactor a_H of the material, > 0; 1 for a free-electron metal.
 * @returns Mean number of surface excitations, 0..1.
 * @throws {RangeError} If an argument is outside its range.
 * @example Fifteen surface excitations per hundred electrons
 * ```ts
 * import { surfaceExcitationParameter } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(surfaceExcitationParameter(1000, 0, 1).toFixed(3), "0.155");
 * ```
 */
export function surfaceExcitationParameter(
  energyEv: number,
  emissionAngleDeg: number,
  materialFactor: number,
): number {
  const demand = (holds: boolean, rule: string, value: unknown): void => {
    if (!holds) throw new RangeError(cannot("compute surface excitation", rule, value));
  };
  demand(energyEv > 0 && Number.isFinite(energyEv), "energyEv must be > 0 eV", `${energyEv} eV`);
  demand(
    emissionAngleDeg >= 0 && emissionAngleDeg <= 90,
    "emissionAngleDeg must be in 0..90 degrees",
    `${emissionAngleDeg} degrees`,
  );
  demand(materialFactor > 0 && Number.isFinite(materialFactor), "materialFactor must be > 0", materialFactor);
  const freeElectron = Math.sqrt((8 * BOHR_RADIUS_NM) / (Math.PI ** 2 * COULOMB_EV_NM));
  const cosine = Math.max(0, Math.cos((emissionAngleDeg * Math.PI) / 180));
  return 1 / (1 + materialFactor * freeElectron * Math.sqrt(energyEv) * cosine);
}
