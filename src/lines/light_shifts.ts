import type { LightPoint } from "../light/mod.ts";
import { lineProfile } from "../spectrum/mod.ts";

/** One copy of a core-level line that a component of the light makes. */
export interface LightShift {
  /** Shift to higher kinetic energy, eV. */
  readonly shiftEv: number;
  /** Share of the line's area. */
  readonly weight: number;
  /** Natural width that the component adds to the Lorentzian, eV. */
  readonly lorentzFwhmEv: number;
}

/** Lines of the light closer than this to the strongest are seen as one with it. */
const MAIN_EV = 1;

/**
 * What the lines of an X-ray anode make of a core-level line: copies shifted from the peak of the unresolved main line,
 * which is what a position on an energy axis refers to.
 *
 * @param light Lines of the source with their natural widths, weights adding to 1, as `anodeLight` gives them.
 * @returns The copies.
 * @example The peak of aluminum K-alpha lies 0.009 eV below K alpha 1
 * ```ts
 * import { anodeLight, lightShifts } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(lightShifts(anodeLight("Al", true))[0].shiftEv.toFixed(3), "0.009");
 * ```
 */
export function lightShifts(light: readonly LightPoint[]): LightShift[] {
  const strongest = light.reduce((best, point) => (point.weight > best.weight ? point : best));
  const main = light.filter(({ energyEv, lorentzFwhmEv }) =>
    Math.abs(energyEv - strongest.energyEv) < MAIN_EV && lorentzFwhmEv > 0
  ).map(({ energyEv, weight, lorentzFwhmEv }) => ({
    shiftEv: energyEv - strongest.energyEv,
    weight,
    profile: lineProfile({ lorentzFwhmEv, gaussFwhmEv: 0, asymmetry: 0 }),
  }));
  const height = (offsetEv: number): number =>
    main.reduce((sum, { shiftEv, weight, profile }) => sum + weight * profile(offsetEv - shiftEv), 0);
  // The height has one maximum near the strongest line: golden sections (J. Kiefer, Proc. AMS 4, 502 (1953)).
  const golden = (Math.sqrt(5) - 1) / 2;
  let [low, high] = [-strongest.lorentzFwhmEv, strongest.lorentzFwhmEv];
  while (main.length > 1 && high - low > 1e-7) {
    const [left, right] = [high - golden * (high - low), low + golden * (high - low)];
    if (height(left) > height(right)) high = right;
    else low = left;
  }
  const peakEv = strongest.energyEv + (low + high) / 2;
  return light.map(({ energyEv, weight, lorentzFwhmEv }) => ({
    shiftEv: energyEv - peakEv,
    weight,
    lorentzFwhmEv,
  }));
}
