import type { ExpectedSpectrum } from "../model/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";

/** Channels above this share of the highest one count for {@link SpectrumSummary.worstRelativeStandardError}. */
const SHARE_OF_PEAK = 0.1;

/** What a simulated spectrum says in a few numbers. */
export interface SpectrumSummary {
  /** What was put in, eV: the values that a fit should find. */
  readonly truth: {
    readonly workFunctionEv: number;
    readonly workFunctionSource: string;
    readonly maxKineticEnergyEv: number;
    readonly cutoffEv: number;
    readonly fermiEdgeEv: number;
  };
  /** Electrons into the analyzer per absorbed photon, by both tallies, and how far apart they are. */
  readonly electronsPerPhoton: {
    readonly forced: number;
    readonly analogue: number;
    readonly analogueStandardError: number;
  };
  /** Core levels in reach, with escape and information depths; empty in the ultraviolet. */
  readonly levels: readonly Omit<ExpectedSpectrum["levels"][number], "emissionDepth">[];
  /** Parts of a surface that is not uniform. */
  readonly patches: ResolvedScenario["surface"];
  /** Valence-band maximum put in, eV; null for a metal. */
  readonly valenceMaximumBelowFermiEv: number | null;
  /** Ionization energy put in, eV. */
  readonly ionizationEnergyEv: number;
  /** Electron affinity put in, eV; null for a metal. */
  readonly electronAffinityEv: number | null;
  /** Highest expected counts of a channel, and the largest relative standard error among channels above 10 % of it. */
  readonly peakCounts: number;
  /** Of the expected counts, from the finite number of histories. */
  readonly worstRelativeStandardError: number;
}

/**
 * Largest relative standard error of the expected counts among channels above a tenth of the highest one.
 *
 * It comes from the scatter between 64 groups of batches, known to 9 % itself, so the largest of many channels is rather
 * too large than too small. Dark counts are part of the expectation.
 *
 * @param expected The spectrum.
 * @returns A ratio; 0 when there are no counts.
 */
export function worstRelativeStandardError(expected: ExpectedSpectrum): number {
  const peak = expected.counts.reduce((a, b) => Math.max(a, b), 0);
  return expected.counts.reduce(
    (worst, counts, c) =>
      counts > SHARE_OF_PEAK * peak ? Math.max(worst, expected.standardErrors[c] / counts) : worst,
    0,
  );
}

/**
 * Sums a simulated spectrum up.
 *
 * @param resolved Its scenario.
 * @param expected Its expectation.
 * @returns The summary.
 */
export function summarize(
  resolved: ResolvedScenario,
  expected: ExpectedSpectrum,
): SpectrumSummary {
  return {
    truth: {
      workFunctionEv: resolved.workFunctionEv,
      workFunctionSource: resolved.workFunctionSource,
      maxKineticEnergyEv: resolved.photonEnergyEv - resolved.workFunctionEv,
      cutoffEv: resolved.workFunctionEv + resolved.kineticEnergyShiftEv,
      fermiEdgeEv: resolved.photonEnergyEv + resolved.kineticEnergyShiftEv,
    },
    electronsPerPhoton: {
      forced: expected.electronsPerPhoton,
      analogue: expected.analoguePerPhoton.value,
      analogueStandardError: expected.analoguePerPhoton.standardError,
    },
    levels: expected.levels.map(({ emissionDepth: _, ...level }) => level),
    patches: resolved.surface.length > 1 ? resolved.surface : [],
    valenceMaximumBelowFermiEv: resolved.valenceMaximumBelowFermiEv,
    ionizationEnergyEv: resolved.workFunctionEv + (resolved.valenceMaximumBelowFermiEv ?? 0),
    electronAffinityEv: resolved.valenceMaximumBelowFermiEv === null
      ? null
      : resolved.workFunctionEv + resolved.valenceMaximumBelowFermiEv - resolved.gapEv,
    peakCounts: expected.counts.reduce((a, b) => Math.max(a, b), 0),
    worstRelativeStandardError: worstRelativeStandardError(expected),
  };
}
