import { cannot } from "../base/mod.ts";
import {
  ELECTRON_MASS_KG,
  ELEMENTARY_CHARGE_C,
  PLANCK_J_S,
  VACUUM_PERMITTIVITY_F_PER_M,
} from "./constants.ts";

const HBAR_J_S = PLANCK_J_S / (2 * Math.PI);
const BOHR_RADIUS_M = (4 * Math.PI * VACUUM_PERMITTIVITY_F_PER_M * HBAR_J_S ** 2) /
  (ELECTRON_MASS_KG * ELEMENTARY_CHARGE_C ** 2);

/**
 * Lifetime of an electron above the Fermi level of a free-electron gas against collisions with other electrons,
 * `128/(pi^2 sqrt(3) omega_p) (E_F/(E - E_F))^2`.
 *
 * The limit of high density, close to the Fermi level: for real metals right to a factor of about two (from memory).
 *
 * Source: J. J. Quinn, R. A. Ferrell, Phys. Rev. 112, 812 (1958).
 *
 * @param wignerSeitzRadius Radius r_s of the sphere that holds one electron, in Bohr radii, > 0.
 * @param energyAboveFermiEv Energy above the Fermi level, eV, > 0.
 * @returns Lifetime, fs.
 * @throws {RangeError} If a number is not > 0.
 */
export function quinnFerrellLifetimeFs(wignerSeitzRadius: number, energyAboveFermiEv: number): number {
  if (!(wignerSeitzRadius > 0 && energyAboveFermiEv > 0)) {
    throw new RangeError(
      cannot(
        "compute a lifetime",
        "wignerSeitzRadius and energyAboveFermiEv must be > 0",
        `${wignerSeitzRadius}, ${energyAboveFermiEv}`,
      ),
    );
  }
  const densityPerM3 = 3 / (4 * Math.PI * (wignerSeitzRadius * BOHR_RADIUS_M) ** 3);
  const plasmaFrequency = ELEMENTARY_CHARGE_C *
    Math.sqrt(densityPerM3 / (VACUUM_PERMITTIVITY_F_PER_M * ELECTRON_MASS_KG));
  const fermiEnergyEv = (HBAR_J_S ** 2 * (3 * Math.PI ** 2 * densityPerM3) ** (2 / 3)) /
    (2 * ELECTRON_MASS_KG * ELEMENTARY_CHARGE_C);
  return (1e15 * 128 * (fermiEnergyEv / energyAboveFermiEv) ** 2) /
    (Math.PI ** 2 * Math.sqrt(3) * plasmaFrequency);
}
