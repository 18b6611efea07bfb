import type { PlanFacts, Rates } from "../../src/plan/mod.ts";
import { density, folded } from "./information.ts";

/** Two edges of our own making: an erf step with a flat top, and a Fermi edge of flat states, counts per second. */
export const CUTOFF_EV = 9.7;
export const FERMI_EV = 16.2;
export const SIGMA_EV = 0.04;
export const TOP = 2000;
export const STATES = 300;
export const DARK = 20;
export const KT_EV = 8.617333262e-5 * 300;
export const STEP_EV = 0.01;

/** Photon energy that is no lamp line; a narrow cone, so that the cutoff has no ramp. */
export const FACTS: PlanFacts = {
  title: "two edges",
  photonEnergyEv: 11,
  workFunctionEv: 11 - (FERMI_EV - CUTOFF_EV),
  cutoffEv: CUTOFF_EV,
  fermiLevelEv: FERMI_EV,
  biasV: -9.6,
  analyzerWorkFunctionEv: 4.4,
  acceptanceHalfAngleDeg: 0,
  temperatureK: 300,
  thermalEnergyEv: KT_EV,
  resolutionFwhmEv: 2.354820045 * SIGMA_EV,
  stepEv: STEP_EV,
  dwellS: 0.5,
  timePerChannelS: 10,
  darkRateCountsPerS: DARK,
  deadTimeS: 0,
  warnings: [],
};

/** Normal distribution function by Simpson's rule. */
export function step(x: number): number {
  const n = 400;
  const to = Math.max(-8, x / SIGMA_EV);
  let sum = 0;
  for (let i = 0; i <= n; i++) {
    sum += (i === 0 || i === n ? 1 : i % 2 === 1 ? 4 : 2) * density(-8 + ((to + 8) * i) / n);
  }
  return (sum * (to + 8)) / (3 * n);
}
export const occupation = (x: number): number => 1 / (1 + Math.exp(x / KT_EV));
export const fermi = folded(occupation, SIGMA_EV);
export const cutoffRate = (energy: number): number => TOP * step(energy - CUTOFF_EV) + DARK;
export const fermiRate = (energy: number): number => STATES * fermi(energy - FERMI_EV) + DARK;

export const energiesEv: Float64Array = Float64Array.from(
  { length: 900 },
  (_, i) => Math.round(8.5e9 + i * 1e7) / 1e9,
);
export const RATES: Rates = {
  energiesEv,
  countsPerS: energiesEv.map((energy) => energy < 13 ? cutoffRate(energy) : fermiRate(energy)),
  standardErrors: energiesEv.map(() => 0),
};
