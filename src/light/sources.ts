import { cannot } from "../base/mod.ts";
import { anode, lampLines } from "../data/mod.ts";
import { type LightPoint, normalized } from "./points.ts";

/**
 * The lines of a discharge lamp. Their natural widths (micro-electronvolts) are left out.
 *
 * @param name Lamp, one of `LAMP_NAMES`.
 * @param satellites `true` keeps the weaker lines.
 * @returns The lines, the main one first.
 * @throws {InputError} If there is no such lamp.
 */
export function lampLight(name: string, satellites: boolean): readonly LightPoint[] {
  const lines = lampLines(name);
  return normalized(
    lines.slice(0, satellites ? undefined : 1).map((line) => ({
      name: line.name,
      energyEv: line.energyEv,
      weight: line.relativeIntensity,
      lorentzFwhmEv: 0,
      gaussFwhmEv: 0,
    })),
  );
}

/** K alpha 1, K alpha 2 and their common tail: what remains without satellites. */
const MAIN_COMPONENTS = 3;

/**
 * The K-alpha emission of an X-ray anode without a monochromator: Lorentzian lines.
 *
 * Bremsstrahlung and K beta are left out.
 *
 * @param name Anode, one of `ANODE_NAMES`.
 * @param satellites `true` keeps the satellites 5 to 24 eV above the main line.
 * @returns The lines, K alpha 1 first.
 * @throws {InputError} If there is no such anode.
 * @example The satellites K alpha 3 and 4 hold a tenth of the photons
 * ```ts
 * import { anodeLight } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const satellites = anodeLight("Al", true).slice(3).reduce((sum, line) => sum + line.weight, 0);
 * assert.equal(satellites.toFixed(3), "0.105");
 * ```
 */
export function anodeLight(name: string, satellites: boolean): readonly LightPoint[] {
  const { lines } = anode(name);
  return normalized(
    lines.slice(0, satellites ? undefined : MAIN_COMPONENTS).map((line) => ({
      name: `${name} ${line.name}`,
      energyEv: line.energyEv,
      weight: line.relativeArea,
      lorentzFwhmEv: line.fwhmEv,
      gaussFwhmEv: 0,
    })),
  );
}

/** Peak of the unresolved aluminum K-alpha line, to which monochromators are set, eV. */
const ALUMINUM_EV = 1486.7;

/**
 * Aluminum K-alpha behind a crystal monochromator: one Gaussian line at 1486.7 eV, no satellites.
 *
 * @param fwhmEv Full width at half maximum behind the monochromator, eV, > 0..0.9 (the whole line); 0.2 to 0.5 is usual.
 * @returns The line.
 * @throws {RangeError} If the width is impossible.
 */
export function monochromatedAluminumLight(fwhmEv: number): readonly LightPoint[] {
  if (!(fwhmEv > 0 && fwhmEv <= 0.9)) {
    throw new RangeError(
      cannot("use monochromated aluminum light", "fwhmEv must be > 0 and <= 0.9 eV", `${fwhmEv} eV`),
    );
  }
  return [{
    name: "Al K alpha, monochromated",
    energyEv: ALUMINUM_EV,
    weight: 1,
    lorentzFwhmEv: 0,
    gaussFwhmEv: fwhmEv,
  }];
}

/**
 * A Gaussian band, such as a monochromator passes.
 *
 * @param centerEv Mean photon energy, eV, > 0.
 * @param fwhmEv Full width at half maximum, eV, >= 0, at most the mean.
 * @returns One line.
 * @throws {RangeError} If a number is impossible.
 */
export function bandLight(centerEv: number, fwhmEv: number): readonly LightPoint[] {
  if (!(centerEv > 0 && Number.isFinite(centerEv))) {
    throw new RangeError(cannot("use band", "centerEv must be > 0 eV", `${centerEv} eV`));
  }
  if (!(fwhmEv >= 0 && fwhmEv <= centerEv)) {
    throw new RangeError(cannot("use band", `fwhmEv must be in 0..${centerEv} eV`, `${fwhmEv} eV`));
  }
  return [{ name: "band", energyEv: centerEv, weight: 1, lorentzFwhmEv: 0, gaussFwhmEv: fwhmEv }];
}

/**
 * A measured spectrum: photons per eV at given photon energies, linear in between.
 *
 * Each row becomes a point with the weight of the trapezoidal rule, so rows must be closer than the energies to be resolved.
 *
 * @param energiesEv Photon energies, eV, > 0, ascending, shape (n), n >= 2.
 * @param photonsPerEv Relative number of photons per eV (not power), >= 0, not all zero, shape (n).
 * @returns One point for each row that has light.
 * @throws {RangeError} If the table is impossible; the row is named.
 * @example A triangle has its mean in the middle
 * ```ts
 * import { meanPhotonEnergyEv, tabulatedLight } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(meanPhotonEnergyEv(tabulatedLight([5, 6, 7], [0, 3, 0])), 6);
 * ```
 */
export function tabulatedLight(
  energiesEv: readonly number[],
  photonsPerEv: readonly number[],
): readonly LightPoint[] {
  const demand = (holds: boolean, rule: string, value: unknown): void => {
    if (!holds) throw new RangeError(cannot("use light spectrum", rule, value));
  };
  const count = energiesEv.length;
  demand(
    count >= 2 && photonsPerEv.length === count,
    "it must have at least 2 rows of energy and photons",
    `${count} energies, ${photonsPerEv.length} photon numbers`,
  );
  for (let i = 0; i < count; i++) {
    demand(
      energiesEv[i] > (i === 0 ? 0 : energiesEv[i - 1]) && Number.isFinite(energiesEv[i]),
      "energies must be > 0 eV and ascend",
      `${energiesEv[i]} eV in row ${i + 1}`,
    );
    demand(
      photonsPerEv[i] >= 0 && Number.isFinite(photonsPerEv[i]),
      "photons per eV must be >= 0",
      `${photonsPerEv[i]} in row ${i + 1}`,
    );
  }
  demand(photonsPerEv.some((photons) => photons > 0), "some row must have photons", "none");
  const points = energiesEv.map((energyEv, i) => ({
    name: "table",
    energyEv,
    weight: 0.5 * photonsPerEv[i] *
      (energiesEv[Math.min(i + 1, count - 1)] - energiesEv[Math.max(i - 1, 0)]),
    lorentzFwhmEv: 0,
    gaussFwhmEv: 0,
  }));
  return normalized(points.filter(({ weight }) => weight > 0));
}
