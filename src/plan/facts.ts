import type { Notice } from "../base/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";

/** What a plan needs to know of a scenario: all that this room reads of one. */
export interface PlanFacts {
  /** Title of the scenario. */
  readonly title: string;
  /** Photon energy of the main line, eV. */
  readonly photonEnergyEv: number;
  /** Work function that the simulation puts in, eV; null where parts of the surface differ. */
  readonly workFunctionEv: number | null;
  /** Where the lowest cutoff is expected, eV as recorded; not recorded where <= 0. */
  readonly cutoffEv: number;
  /** Where the Fermi level is expected, eV as recorded. */
  readonly fermiLevelEv: number;
  /** Sample bias, V, negative accelerates. */
  readonly biasV: number;
  /** Analyzer work function, eV. */
  readonly analyzerWorkFunctionEv: number;
  /** Half-angle of the acceptance, degrees. */
  readonly acceptanceHalfAngleDeg: number;
  /** Temperature, K. */
  readonly temperatureK: number;
  /** kT, eV. */
  readonly thermalEnergyEv: number;
  /** Resolution, full width at half maximum, eV. */
  readonly resolutionFwhmEv: number;
  /** Step between channels, eV. */
  readonly stepEv: number;
  /** Time in a channel in one sweep, s. */
  readonly dwellS: number;
  /** Time in a channel in all sweeps that the scenario asks for, s. */
  readonly timePerChannelS: number;
  /** Rate without light, counts/s. */
  readonly darkRateCountsPerS: number;
  /** Dead time of the counter, s; 0 for none. */
  readonly deadTimeS: number;
  /** What the scenario itself warns of. */
  readonly warnings: readonly Notice[];
}

/**
 * Reads a resolved scenario: the only place of this room that knows its fields.
 *
 * @param resolved The scenario.
 * @returns The facts.
 */
export function planFacts(resolved: ResolvedScenario): PlanFacts {
  const { acquisition, kineticEnergyShiftEv } = resolved;
  const workFunctionsEv = resolved.surface.map((part) => part.workFunctionEv);
  const lowestEv = Math.min(...workFunctionsEv);
  return {
    title: resolved.title,
    photonEnergyEv: resolved.photonEnergyEv,
    workFunctionEv: workFunctionsEv.every((one) => one === lowestEv) ? lowestEv : null,
    cutoffEv: lowestEv + kineticEnergyShiftEv,
    fermiLevelEv: resolved.photonEnergyEv + kineticEnergyShiftEv,
    biasV: resolved.biasV,
    analyzerWorkFunctionEv: resolved.analyzerWorkFunctionEv,
    acceptanceHalfAngleDeg: resolved.acceptanceHalfAngleDeg,
    temperatureK: resolved.temperatureK,
    thermalEnergyEv: resolved.thermalEnergyEv,
    resolutionFwhmEv: resolved.resolutionFwhmEv,
    stepEv: acquisition.stepEv,
    dwellS: acquisition.dwellS,
    timePerChannelS: acquisition.dwellS * acquisition.sweeps,
    darkRateCountsPerS: acquisition.darkRateCountsPerS,
    deadTimeS: acquisition.deadTimeS,
    warnings: resolved.warnings,
  };
}

/** What the counter is expected to record in each channel, shape (channels) each. */
export interface Rates {
  /** Energies as recorded, ascending, eV. */
  readonly energiesEv: Float64Array;
  /** Counts per second, dark counts and dead time included. */
  readonly countsPerS: Float64Array;
  /** Standard errors of these from the finite number of histories. */
  readonly standardErrors: Float64Array;
}

/**
 * Rates of a simulated spectrum.
 *
 * @param spectrum Energies, eV, expected counts, and standard errors of these, shape (channels).
 * @param timePerChannelS Time for which each channel was counted, s, > 0.
 * @returns The rates; they do not depend on that time.
 */
export function ratesFrom(
  spectrum: {
    readonly kineticEnergiesEv: Float64Array;
    readonly expectedCounts: Float64Array;
    readonly standardErrors: Float64Array;
  },
  timePerChannelS: number,
): Rates {
  return {
    // Sums of steps: nine decimals take the rounding of binary fractions off.
    energiesEv: spectrum.kineticEnergiesEv.map((energy) => Math.round(energy * 1e9) / 1e9),
    countsPerS: spectrum.expectedCounts.map((counts) => counts / timePerChannelS),
    standardErrors: spectrum.standardErrors.map((error) => error / timePerChannelS),
  };
}
