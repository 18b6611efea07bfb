import { lampLines } from "../data/mod.ts";
import type { LightSettings } from "./types.ts";

/** One photon energy of the source. */
export interface LightLine {
  /** Name. */
  readonly name: string;
  /** Photon energy, eV. */
  readonly energyEv: number;
  /** Full width at half maximum, eV. */
  readonly fwhmEv: number;
  /** Share of the photons; all lines add up to 1. */
  readonly weight: number;
  /** `true` for the strongest line, which the sample's tables must cover. */
  readonly main: boolean;
}

/**
 * The photon energies of a light source, the main one first.
 *
 * @param light Settings.
 * @returns Lines with shares, and the flux of all of them together.
 */
export function lightLines(
  light: LightSettings,
): { readonly lines: readonly LightLine[]; readonly photonFluxPerS: number } {
  const { photonFluxPerS } = light;
  if (light.kind === "band") {
    const { centerEv: energyEv, fwhmEv } = light;
    return { lines: [{ name: "band", energyEv, fwhmEv, weight: 1, main: true }], photonFluxPerS };
  }
  const chosen = lampLines(light.lamp).slice(0, light.satellites ? undefined : 1);
  const total = chosen.reduce((sum, line) => sum + line.relativeIntensity, 0);
  const lines = chosen.map((line, i) => ({
    name: line.name,
    energyEv: line.energyEv,
    fwhmEv: 0,
    weight: line.relativeIntensity / total,
    main: i === 0,
  }));
  return { lines, photonFluxPerS };
}
