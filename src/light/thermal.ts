import { cannot } from "../base/mod.ts";
import { BOLTZMANN_EV_PER_K } from "../data/mod.ts";
import { type LightPoint, normalized } from "./points.ts";

/** Photons that a filter lets through. */
export interface ThermalWindow {
  /** Lowest photon energy, eV, > 0. */
  readonly lowEv: number;
  /** Highest photon energy, eV, > lowEv. */
  readonly highEv: number;
  /** Distance of the points, eV, > 0. */
  readonly stepEv: number;
}

/**
 * Planck's spectrum as photons per energy, normalized over all energies: `(E/kT)^2/(exp(E/kT) - 1)/(2 zeta(3) kT)`.
 *
 * Source: M. Planck, Ann. Phys. 309, 553 (1901); number of photons instead of energy. A gray body; the emissivity of
 * tungsten varies slowly beside this.
 *
 * @param energyEv Photon energy, eV, > 0.
 * @param temperatureK Temperature, K, > 0.
 * @returns Share of the photons per eV.
 * @example Photons of a filament above 4.5 eV are rare
 * ```ts
 * import { planckPhotonDensity } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.ok(planckPhotonDensity(4.5, 2800) < 1e-5);
 * ```
 */
export function planckPhotonDensity(energyEv: number, temperatureK: number): number {
  const kT = BOLTZMANN_EV_PER_K * temperatureK;
  const x = energyEv / kT;
  return (x * x) / (Math.expm1(x) * 2 * ZETA_3 * kT);
}

/** Riemann's zeta(3), Apery's constant. */
const ZETA_3 = 1.2020569031595942;
const MOST_POINTS = 10000;

/**
 * A hot filament or arc behind a filter that passes a window of photon energies.
 *
 * @param temperatureK Temperature, K, > 0.
 * @param window What the filter passes.
 * @returns Points in the middle of equal steps, weights adding to 1.
 * @throws {RangeError} If a number is impossible.
 */
export function thermalLight(temperatureK: number, window: ThermalWindow): readonly LightPoint[] {
  const { lowEv, highEv, stepEv } = window;
  const demand = (holds: boolean, rule: string, value: unknown): void => {
    if (!holds) throw new RangeError(cannot("use thermal light", rule, value));
  };
  demand(
    temperatureK > 0 && Number.isFinite(temperatureK),
    "temperatureK must be > 0 K",
    `${temperatureK} K`,
  );
  demand(lowEv > 0 && Number.isFinite(lowEv), "lowEv must be > 0 eV", `${lowEv} eV`);
  demand(highEv > lowEv && Number.isFinite(highEv), `highEv must be > ${lowEv} eV`, `${highEv} eV`);
  const count = Math.ceil((highEv - lowEv) / stepEv - 1e-9);
  demand(
    stepEv > 0 && count <= MOST_POINTS,
    `stepEv must be > 0 eV and make at most ${MOST_POINTS} points`,
    `${stepEv} eV`,
  );
  const kT = BOLTZMANN_EV_PER_K * temperatureK;
  const widthEv = (highEv - lowEv) / count;
  return normalized(Array.from({ length: count }, (_, i) => {
    const energyEv = lowEv + (i + 0.5) * widthEv;
    // Relative to the low end, so that a cold lamp does not underflow.
    const weight = (energyEv ** 2 * Math.exp(-(energyEv - lowEv) / kT)) / -Math.expm1(-energyEv / kT);
    return { name: "thermal", energyEv, weight, lorentzFwhmEv: 0, gaussFwhmEv: 0 };
  }));
}
