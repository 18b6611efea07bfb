import { z } from "zod";
import { cannot, InputError, suggest } from "../base/mod.ts";
import { type Cited, cited } from "./cited.ts";
import { HC_EV_NM } from "./constants.ts";
import table from "./lamps.json" with { type: "json" };

/** One line of a discharge lamp. */
export interface LampLine {
  /** Name, such as `He I alpha`. */
  readonly name: string;
  /** Photon energy, eV, from the vacuum wavelength. */
  readonly energyEv: number;
  /** Intensity relative to the lamp's main line; depends on the lamp's pressure. */
  readonly relativeIntensity: number;
  /** The wavelength the energy comes from. */
  readonly wavelengthNm: Cited;
}

const lamps = z.array(z.strictObject({
  name: z.string().min(1),
  lines: z.array(z.strictObject({
    name: z.string().min(1),
    wavelengthNm: cited("nm", 1, 1000),
    relativeIntensity: cited("1", 0, 1),
  })).min(1),
})).parse(table);

/** Names of the built-in lamps. */
export const LAMP_NAMES: readonly string[] = lamps.map((lamp) => lamp.name);

/**
 * Lines of a lamp, the main one first.
 *
 * @param name One of {@link LAMP_NAMES}.
 * @returns The lines.
 * @throws {InputError} If there is no such lamp.
 * @example The helium line of the textbooks
 * ```ts
 * import { lampLines } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(lampLines("He I")[0].energyEv.toFixed(3), "21.218");
 * ```
 */
export function lampLines(name: string): readonly LampLine[] {
  const lamp = lamps.find((entry) => entry.name === name);
  if (lamp === undefined) {
    const near = suggest(name, LAMP_NAMES);
    const rule = `lamp must be one of ${LAMP_NAMES.join(", ")}${near ? ` (did you mean ${near}?)` : ""}`;
    throw new InputError([{ place: "", message: cannot("look up lamp", rule, name) }]);
  }
  return lamp.lines.map((line) => ({
    name: line.name,
    energyEv: HC_EV_NM / line.wavelengthNm.value,
    relativeIntensity: line.relativeIntensity.value,
    wavelengthNm: line.wavelengthNm,
  }));
}

/** Photon energies are often rounded to 0.01 eV in files; lamp lines are further apart than this. */
const SAME_LINE_EV = 0.03;

/**
 * The main lamp line that a stated photon energy means, with the weaker lines of its lamp.
 *
 * @param photonEnergyEv Photon energy, eV.
 * @returns Name, exact energy and satellites, or null when no main line is within 0.03 eV.
 */
export function nearestLine(photonEnergyEv: number): {
  readonly name: string;
  readonly energyEv: number;
  readonly satellites: readonly { readonly shiftEv: number; readonly relativeIntensity: number }[];
} | null {
  for (const name of LAMP_NAMES) {
    const [main, ...others] = lampLines(name);
    if (!(Math.abs(main.energyEv - photonEnergyEv) <= SAME_LINE_EV)) continue;
    return {
      name: main.name,
      energyEv: main.energyEv,
      satellites: others.map((line) => ({
        shiftEv: line.energyEv - main.energyEv,
        relativeIntensity: line.relativeIntensity,
      })),
    };
  }
  return null;
}
