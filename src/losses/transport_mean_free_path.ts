import { cannot, type Notice } from "../base/mod.ts";

/** Atoms of one element in a solid. */
export interface AtomDensity {
  /** Atomic number, a whole number 1..92. */
  readonly atomicNumber: number;
  /** Atoms per nm^3, > 0. */
  readonly perNm3: number;
}

const LOW_EV = 100;
const HIGH_EV = 30e3;

/** Transport cross-section of one atom, nm^2; E in keV inside. */
function transportCrossSectionNm2(z: number, energyEv: number): number {
  const e = energyEv / 1000;
  const power = z ** 1.7;
  // Total cross-section, 3e-18 cm^2 = 3e-4 nm^2.
  const total = (3e-4 * power) / (e + 0.005 * power * Math.sqrt(e) + (0.0007 * z * z) / Math.sqrt(e));
  // Share of screened Rutherford scattering against isotropic scattering.
  const ratio = (300 * e ** (1 - z / 2000)) / z + z ** 3 / (3e5 * e);
  // Mean 1 - cos of the screened Rutherford part, cos = 1 - 2 a R/(1 + a - R) with R uniform in 0..1; 1 for isotropic.
  const a = 7e-3 / e;
  const turned = 2 * a * ((1 + a) * Math.log(1 + 1 / a) - 1);
  return (total * (ratio * turned + 1)) / (ratio + 1);
}

/**
 * Transport mean free path of electrons for elastic scattering by atoms: the mean distance after which the direction is
 * forgotten, `1/sum(n sigma_tr)`, `sigma_tr` being the cross-section weighted with `1 - cos(angle)`.
 *
 * A fit to tabulated Mott cross-sections for 100 eV to 30 keV; atoms of a solid are taken as free ones, which is worst for
 * slow electrons. Expect 10 to 20 %, and worse in heavy elements below 500 eV.
 *
 * Source: R. Browning, T. Li, B. Chui, J. Ye, R. Pease, Z. Czyzewski, D. Joy, J. Appl. Phys. 76, 2016 (1994): total
 * cross-section, and its angular distribution as a mixture of screened Rutherford and isotropic scattering, whose mean
 * `1 - cos` is integrated here in closed form. The exponent 1 - Z/2000 of the mixture is from memory.
 *
 * @param atoms Elements with their densities, at least one.
 * @param energyEv Kinetic energy, eV, > 0.
 * @returns Length, nm, and a warning when the energy is outside the fit.
 * @throws {RangeError} If a number is impossible.
 * @example Aluminum turns electrons of 1 keV within about 11 nm
 * ```ts
 * import { transportMeanFreePathNm } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(transportMeanFreePathNm([{ atomicNumber: 13, perNm3: 60.3 }], 1000).lengthNm.toFixed(0), "11");
 * ```
 */
export function transportMeanFreePathNm(
  atoms: readonly AtomDensity[],
  energyEv: number,
): { readonly lengthNm: number; readonly warnings: readonly Notice[] } {
  const demand = (holds: boolean, rule: string, value: unknown): void => {
    if (!holds) throw new RangeError(cannot("compute transport mean free path", rule, value));
  };
  demand(energyEv > 0 && Number.isFinite(energyEv), "the energy must be > 0 eV", `${energyEv} eV`);
  demand(atoms.length > 0, "there must be at least one element", atoms.length);
  let inverseNm = 0;
  for (const { atomicNumber, perNm3 } of atoms) {
    demand(
      Number.isInteger(atomicNumber) && atomicNumber >= 1 && atomicNumber <= 92,
      "atomicNumber must be a whole number in 1..92",
      atomicNumber,
    );
    demand(perNm3 > 0 && Number.isFinite(perNm3), "perNm3 must be > 0", perNm3);
    inverseNm += perNm3 * transportCrossSectionNm2(atomicNumber, energyEv);
  }
  const inside = energyEv >= LOW_EV && energyEv <= HIGH_EV;
  return {
    lengthNm: 1 / inverseNm,
    warnings: inside ? [] : [{
      code: "transport-mean-free-path-outside-range",
      message:
        `the cross-sections of Browning et al. hold for ${LOW_EV}..${HIGH_EV} eV: they are used at ${energyEv} eV`,
      place: "",
    }],
  };
}
