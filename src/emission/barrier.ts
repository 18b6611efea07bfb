import { cannot } from "../base/mod.ts";
import { ELEMENTARY_CHARGE_C, VACUUM_PERMITTIVITY_F_PER_M } from "./constants.ts";

/** 1 debye = 1e-21 C m^2/s divided by the speed of light. */
const DEBYE_C_M = 1e-21 / 299792458;

function checkField(fieldVPerM: number): void {
  if (!(fieldVPerM >= 0 && fieldVPerM < Infinity)) {
    throw new RangeError(
      cannot("compute the image-force barrier", "fieldVPerM must be >= 0 V/m", fieldVPerM),
    );
  }
}

/**
 * Lowering of the barrier by the image force in a field that pulls electrons away, `sqrt(e^3 F/(4 pi eps0))`.
 *
 * Source: W. Schottky, Phys. Z. 15, 872 (1914) (from memory).
 *
 * @param fieldVPerM Field at the surface, V/m, >= 0.
 * @returns Lowering, eV.
 * @throws {RangeError} If the field is not a number >= 0.
 * @example One megavolt per meter
 * ```ts
 * import { schottkyLoweringEv } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(schottkyLoweringEv(1e6).toFixed(4), "0.0379");
 * ```
 */
export function schottkyLoweringEv(fieldVPerM: number): number {
  checkField(fieldVPerM);
  return Math.sqrt((ELEMENTARY_CHARGE_C * fieldVPerM) / (4 * Math.PI * VACUUM_PERMITTIVITY_F_PER_M));
}

/**
 * Distance of the top of the image-force barrier from the surface, `sqrt(e/(16 pi eps0 F))`.
 *
 * Source: as {@link schottkyLoweringEv}.
 *
 * @param fieldVPerM Field at the surface, V/m, >= 0.
 * @returns Distance, nm; Infinity without a field.
 * @throws {RangeError} If the field is not a number >= 0.
 */
export function schottkyMaximumNm(fieldVPerM: number): number {
  checkField(fieldVPerM);
  return 1e9 * Math.sqrt(ELEMENTARY_CHARGE_C / (16 * Math.PI * VACUUM_PERMITTIVITY_F_PER_M * fieldVPerM));
}

/**
 * Change of the work function by a layer of dipoles, the Helmholtz equation `e N mu/eps0`.
 *
 * Depolarization of neighboring dipoles is not in it: put in the dipole moment as it is in the layer.
 *
 * Source: textbook formula (for example H. Lüth, Solid Surfaces, Interfaces and Thin Films, from memory).
 *
 * @param dipolesPerM2 Dipoles per area, 1/m^2, >= 0.
 * @param dipoleDebye Component normal to the surface, debye; positive with the negative end outward, which raises the
 * work function.
 * @returns Change, eV.
 * @throws {RangeError} If a number is not finite or the density is negative.
 * @example One debye on each of 1e18 sites per square meter
 * ```ts
 * import { helmholtzDipoleEv } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(helmholtzDipoleEv(1e18, 1).toFixed(4), "0.3767");
 * ```
 */
export function helmholtzDipoleEv(dipolesPerM2: number, dipoleDebye: number): number {
  if (!(dipolesPerM2 >= 0 && dipolesPerM2 < Infinity) || !Number.isFinite(dipoleDebye)) {
    throw new RangeError(
      cannot(
        "compute a dipole step",
        "dipolesPerM2 must be >= 0 and dipoleDebye finite",
        `${dipolesPerM2}, ${dipoleDebye}`,
      ),
    );
  }
  return (dipolesPerM2 * dipoleDebye * DEBYE_C_M) / VACUUM_PERMITTIVITY_F_PER_M;
}
