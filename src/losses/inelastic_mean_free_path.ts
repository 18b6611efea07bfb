import { cannot, type Notice } from "../base/mod.ts";
import { interpolateLinear } from "../math/mod.ts";

/** What TPP-2M needs to know of a solid, per formula unit. */
export interface BulkNumbers {
  /** Density, g/cm^3, > 0. */
  readonly densityGPerCm3: number;
  /** Molar mass, g/mol, > 0. */
  readonly molarMassGPerMol: number;
  /** Valence electrons, > 0. */
  readonly valenceElectrons: number;
  /** Band gap, eV, >= 0; 0 for a metal. */
  readonly gapEv: number;
}

/** Which formula or table gives the inelastic mean free path. */
export type MeanFreePathModel =
  | {
    /** TPP-2M, from optical data of 41 solids: mean deviation about 10 %, more below 200 eV. */
    readonly kind: "tpp2m";
    /** `true` for the form of 2015, which holds to 200 keV; 0.4 % below the older one at 1500 eV. */
    readonly relativistic: boolean;
    /** The solid. */
    readonly bulk: BulkNumbers;
  }
  | {
    /** The universal curve of Seah and Dench, from overlayer experiments: deviations of 40 % and more. */
    readonly kind: "seah-dench";
    /** Class of the solid. */
    readonly substance: "element" | "inorganic" | "organic";
  }
  | {
    /** Seah's S1, from the optical data of TPP-2M without its free-electron terms. */
    readonly kind: "seah-s1";
    /** Atomic number, mean over the atoms of a compound, 1..103. */
    readonly atomicNumber: number;
    /** Atoms per formula unit, >= 1. */
    readonly atomsPerFormula: number;
    /** The solid. */
    readonly bulk: BulkNumbers;
  }
  | {
    /** A table of the user, linear between its nodes. */
    readonly kind: "table";
    /** Energies, eV, ascending, > 0, shape (n). */
    readonly energiesEv: readonly number[];
    /** Mean free paths, nm, > 0, shape (n). */
    readonly lengthsNm: readonly number[];
  };

/** An inelastic mean free path as a function of energy, with what must be said when it is used. */
export interface MeanFreePathLaw {
  /** Kind of the model it was made from. */
  readonly kind: MeanFreePathModel["kind"];
  /** Name of the formula. */
  readonly name: string;
  /** Where it comes from. */
  readonly source: string;
  /** Lowest energy that the source covers, eV. */
  readonly lowEv: number;
  /** Highest energy that the source covers, eV. */
  readonly highEv: number;
  /**
   * The mean free path.
   *
   * @param energyEv Energy above the Fermi level (above the conduction-band minimum in an insulator), eV, > 0.
   * @returns Length, nm, > 0; Infinity where the formula has no positive value.
   * @throws {RangeError} If the energy is not > 0 eV.
   */
  readonly lengthNm: (energyEv: number) => number;
}

const ELECTRON_REST_ENERGY_EV = 510998.95;
/** hbar omega_p = 28.816 eV sqrt(N_v rho/M): from the constants; older papers print 28.8. */
const PLASMON_EV = 28.816;
const AVOGADRO_PER_MOL = 6.02214076e23;

/** Both forms of TPP-2M in nanometers; `a = 1` makes the older one. */
function tpp2m(bulk: BulkNumbers, relativistic: boolean): (energyEv: number) => number {
  const { densityGPerCm3: rho, molarMassGPerMol: molarMass, valenceElectrons, gapEv } = bulk;
  const u = (valenceElectrons * rho) / molarMass;
  const plasmonEv = PLASMON_EV * Math.sqrt(u);
  const beta = -1.0 + 9.44 / Math.hypot(plasmonEv, gapEv) + 0.69 * rho ** 0.1;
  const gamma = 0.191 / Math.sqrt(rho);
  const c = 19.7 - 9.1 * u;
  const d = 534 - 208 * u;
  return (e) => {
    const a = relativistic
      ? (1 + e / (2 * ELECTRON_REST_ENERGY_EV)) / (1 + e / ELECTRON_REST_ENERGY_EV) ** 2
      : 1;
    const bracket = plasmonEv ** 2 * (beta * Math.log(gamma * a * e) - c / e + d / (e * e));
    return bracket > 0 ? (a * e) / bracket : Infinity;
  };
}

const SEAH_DENCH = { element: [143, 0.054], inorganic: [641, 0.096], organic: [31, 0.087] } as const;

function checkBulk(bulk: BulkNumbers): void {
  for (const [name, value] of Object.entries(bulk)) {
    const least = name === "gapEv" ? value >= 0 : value > 0;
    if (!least || !Number.isFinite(value)) {
      throw new RangeError(
        cannot("use mean free path", `${name} must be ${name === "gapEv" ? ">=" : ">"} 0`, value),
      );
    }
  }
}

/**
 * The inelastic mean free path of electrons by a published formula or a table.
 *
 * Sources: TPP-2M: S. Tanuma, C. Powell, D. Penn, Surf. Interface Anal. 21, 165 (1994), eqs. 3 and 4, 50..2000 eV;
 * relativistic: H. Shinotsuka, S. Tanuma, C. Powell, D. Penn, Surf. Interface Anal. 47, 871 (2015), 50 eV..200 keV; lengths
 * in nm (the papers print angstroms). Universal curve: M. Seah, W. Dench, Surf. Interface Anal. 1, 2 (1979), in nm, 1 eV..10
 * keV. S1: M. Seah, Surf. Interface Anal. 44, 497 (2012), 100 eV..30 keV; constants and ranges of these two from memory.
 * Deviation: the energy ranges end where the sources end; outside, the formula goes on and
 * {@link meanFreePathNotices} says so.
 *
 * @param model Formula and material, or a table.
 * @returns The law.
 * @throws {RangeError} If a number of the material or the table is impossible.
 * @example Gold at the Fermi edge under an aluminum anode
 * ```ts
 * import { meanFreePathLaw } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const bulk = { densityGPerCm3: 19.32, molarMassGPerMol: 196.967, valenceElectrons: 11, gapEv: 0 };
 * const law = meanFreePathLaw({ kind: "tpp2m", relativistic: true, bulk });
 * assert.equal(law.lengthNm(1486.6).toFixed(2), "1.64");
 * ```
 */
export function meanFreePathLaw(model: MeanFreePathModel): MeanFreePathLaw {
  const { kind } = model;
  const law = lawOf(model);
  return {
    ...law,
    kind,
    lengthNm: (energyEv) => {
      if (!(energyEv > 0)) {
        throw new RangeError(cannot("use mean free path", "the energy must be > 0 eV", `${energyEv} eV`));
      }
      return law.lengthNm(energyEv);
    },
  };
}

function lawOf(model: MeanFreePathModel): Omit<MeanFreePathLaw, "kind"> {
  switch (model.kind) {
    case "tpp2m":
      checkBulk(model.bulk);
      return {
        name: model.relativistic ? "TPP-2M (relativistic)" : "TPP-2M",
        source: model.relativistic
          ? "H. Shinotsuka et al., Surf. Interface Anal. 47, 871 (2015)"
          : "S. Tanuma, C. Powell, D. Penn, Surf. Interface Anal. 21, 165 (1994)",
        lowEv: 50,
        highEv: model.relativistic ? 200e3 : 2000,
        lengthNm: tpp2m(model.bulk, model.relativistic),
      };
    case "seah-dench": {
      const [slow, fast] = SEAH_DENCH[model.substance];
      return {
        name: `Seah and Dench, ${model.substance}`,
        source: "M. Seah, W. Dench, Surf. Interface Anal. 1, 2 (1979)",
        lowEv: 1,
        highEv: 10e3,
        lengthNm: (e) => slow / (e * e) + fast * Math.sqrt(e),
      };
    }
    case "seah-s1": {
      checkBulk(model.bulk);
      const { atomicNumber: z, atomsPerFormula, bulk } = model;
      if (!(z >= 1 && z <= 103)) {
        throw new RangeError(cannot("use mean free path", "atomicNumber must be in 1..103", z));
      }
      if (!(atomsPerFormula >= 1)) {
        throw new RangeError(cannot("use mean free path", "atomsPerFormula must be >= 1", atomsPerFormula));
      }
      // Edge of the cube per atom, nm.
      const edgeNm = Math.cbrt(
        (1e21 * bulk.molarMassGPerMol) / (bulk.densityGPerCm3 * atomsPerFormula * AVOGADRO_PER_MOL),
      );
      const scale = edgeNm ** 1.7 / (z ** 0.3 * (1 - 0.02 * bulk.gapEv));
      return {
        name: "Seah S1",
        source: "M. Seah, Surf. Interface Anal. 44, 497 (2012)",
        lowEv: 100,
        highEv: 30e3,
        lengthNm: (e) => (4 + 0.44 * Math.sqrt(z) + 0.104 * e ** 0.872) * scale,
      };
    }
    case "table": {
      const { energiesEv, lengthsNm } = model;
      const ascends = energiesEv.every((e, i) => e > (i === 0 ? 0 : energiesEv[i - 1]) && Number.isFinite(e));
      if (energiesEv.length < 2 || energiesEv.length !== lengthsNm.length || !ascends) {
        throw new RangeError(
          cannot(
            "use mean free path",
            "the table must have at least 2 rows with ascending energies > 0",
            `${energiesEv.length} energies, ${lengthsNm.length} lengths`,
          ),
        );
      }
      const bad = lengthsNm.find((length) => !(length > 0 && Number.isFinite(length)));
      if (bad !== undefined) {
        throw new RangeError(cannot("use mean free path", "every length must be > 0 nm", `${bad} nm`));
      }
      return {
        name: "table",
        source: "user",
        lowEv: energiesEv[0],
        highEv: energiesEv[energiesEv.length - 1],
        lengthNm: (e) => interpolateLinear(energiesEv, lengthsNm, e),
      };
    }
  }
}

/** Steps of the looks along a law; 3 % in energy per step over the whole range of TPP-2M. */
const LOOKS = 300;

/**
 * What a user should know before a mean free path is used between two energies: outside the range of its source, the
 * unphysical rise of TPP-2M toward low energies, no positive value at all.
 *
 * TPP-2M turns up far too early in gold, silver and other dense metals (near 100 eV in gold, where paths from optical data
 * go on falling): its term in 1/E^2 is least certain below 200 eV.
 *
 * @param law The law.
 * @param fromEv Lowest energy of use, eV, > 0.
 * @param toEv Highest energy of use, eV, >= fromEv.
 * @param place Where the law was chosen, such as a pointer into the scenario.
 * @returns Warnings; empty when there is nothing to say.
 * @throws {RangeError} If the energies are impossible.
 */
export function meanFreePathNotices(
  law: MeanFreePathLaw,
  fromEv: number,
  toEv: number,
  place: string,
): readonly Notice[] {
  if (!(fromEv > 0 && toEv >= fromEv && Number.isFinite(toEv))) {
    throw new RangeError(
      cannot("use mean free path", "energies must be > 0 eV and ascend", `${fromEv}..${toEv} eV`),
    );
  }
  const show = (energyEv: number): string => String(Number(energyEv.toPrecision(4)));
  const looks = Array.from({ length: LOOKS + 1 }, (_, i) => {
    const energyEv = fromEv * (toEv / fromEv) ** (i / LOOKS);
    return { energyEv, lengthNm: law.lengthNm(energyEv) };
  });
  const notices: Notice[] = [];
  if (fromEv < law.lowEv || toEv > law.highEv) {
    notices.push({
      code: "mean-free-path-outside-range",
      message: `${law.name} holds for ${law.lowEv}..${law.highEv} eV (${law.source}): it is used for ${
        show(fromEv)
      }..${show(toEv)} eV`,
      place,
    });
  }
  if (!looks.every(({ lengthNm }) => Number.isFinite(lengthNm))) {
    notices.push({
      code: "mean-free-path-undefined",
      message: `${law.name} has no positive value at some energies in ${show(fromEv)}..${show(toEv)} eV`,
      place,
    });
  }
  const inside = looks.filter(({ energyEv }) => energyEv >= law.lowEv);
  const least = inside.reduce((a, b) => (b.lengthNm < a.lengthNm ? b : a), inside[0]);
  if (law.kind === "tpp2m" && inside.length > 0 && inside[0].lengthNm > 1.02 * least.lengthNm) {
    notices.push({
      code: "mean-free-path-rises",
      message: `${law.name} rises from ${least.lengthNm.toFixed(3)} nm at ${show(least.energyEv)} eV to ${
        inside[0].lengthNm.toFixed(3)
      } nm at ${show(inside[0].energyEv)} eV, which is unphysical: take a table below ${
        show(least.energyEv)
      } eV`,
      place,
    });
  }
  return notices;
}
