import { nearestLine } from "../data/mod.ts";
import { type EdgeRegion, measureWorkFunction } from "../edges/mod.ts";
import { countSpectrum, engineData, expectedSpectrum } from "../model/mod.ts";
import type { EngineData } from "../transport/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import { FITTED_QUANTITIES, type PointJob, type PointValues, uncertaintyName } from "../sweep/mod.ts";
import type { Tally } from "../transport/mod.ts";
import { batchesFor, runSeries } from "./histories.ts";
import { summarize } from "./summary.ts";

/** A spectrum of a point, shape (channels) each. */
export interface PointSpectrum {
  /** Kinetic energy as the analyzer records it, eV, ascending. */
  readonly kineticEnergiesEv: Float64Array;
  /** Expected counts. */
  readonly expectedCounts: Float64Array;
  /** Counts with counting noise. */
  readonly counts: Float64Array;
  /** Standard error of the expected counts from the finite number of histories. */
  readonly standardErrors: Float64Array;
  /** Histories run. */
  readonly histories: number;
}

/** What a point gives. */
export interface PointResult {
  /** Values by name. */
  readonly values: PointValues;
  /** The spectrum, where it is kept. */
  readonly spectrum: PointSpectrum | null;
}

/** Runs points one after the other; tables and histories of the last one are used again where they are the same. */
export class PointRunner {
  #engine: { readonly key: string; readonly data: EngineData } | undefined;
  #tally: { readonly key: string; readonly tally: Tally } | undefined;

  /**
   * Runs one point in this thread.
   *
   * @param job The point.
   * @param stopped Asked from time to time; `true` ends the point without a result. Default: never.
   * @returns The result, or null when stopped.
   */
  run(job: PointJob, stopped: () => boolean = () => false): PointResult | null {
    const { resolved } = job;
    if (this.#engine?.key !== job.engineKey) {
      this.#engine = { key: job.engineKey, data: engineData(resolved) };
      this.#tally = undefined;
    }
    const engine = this.#engine.data;
    const batches = batchesFor(resolved.histories);
    const tallyKey = `${resolved.seed} ${batches}`;
    if (this.#tally?.key !== tallyKey) {
      const tally = runSeries(engine, resolved.seed, batches, stopped);
      if (tally.batches < batches) return null;
      this.#tally = { key: tallyKey, tally };
    }
    const { tally } = this.#tally;
    const expected = expectedSpectrum(resolved, engine, tally);
    const counts = countSpectrum(expected, resolved.seed, job.replicate);
    const { truth, electronsPerPhoton, peakCounts, worstRelativeStandardError } = summarize(
      resolved,
      expected,
    );
    const { workFunctionSource: _, ...energies } = truth;
    return {
      values: {
        warnings: resolved.warnings.map((warning) => warning.code).join(" "),
        histories: tally.histories,
        ...prefixed("truth", energies),
        ...prefixed("electronsPerPhoton", electronsPerPhoton),
        peakCounts,
        worstRelativeStandardError,
        ...(job.fit ? fitted(resolved, expected.kineticEnergiesEv, counts) : {}),
      },
      spectrum: job.spectrum
        ? {
          kineticEnergiesEv: expected.kineticEnergiesEv,
          expectedCounts: expected.counts,
          counts,
          standardErrors: expected.standardErrors,
          histories: tally.histories,
        }
        : null,
    };
  }
}

function prefixed(prefix: string, values: Readonly<Record<string, number>>): PointValues {
  return Object.fromEntries(Object.entries(values).map(([key, value]) => [`${prefix}.${key}`, value]));
}

/** The same fit as of the spectrum file that `simulate` writes, whose metadata are these. */
function fitted(
  resolved: ResolvedScenario,
  kineticEnergiesEv: Float64Array,
  counts: Float64Array,
): PointValues {
  const region = simulatedRegion(resolved, kineticEnergiesEv.map(round9), counts);
  const result = measureWorkFunction([region], { knownLine: nearestLine });
  const estimates = FITTED_QUANTITIES.flatMap((quantity) => {
    const name = `fit.${quantity}` as const;
    return [
      [name, result[quantity]?.value ?? null],
      [uncertaintyName(name), result[quantity]?.standardUncertainty ?? null],
    ];
  });
  return {
    "fit.verdict": result.verdict,
    "fit.reasons": result.reasons.join("; "),
    ...Object.fromEntries(estimates),
  };
}

/**
 * Simulated counts as a fit takes them, with what the file of `simulate` would say of them.
 *
 * @param resolved The scenario.
 * @param energiesEv Channels, kinetic energy as recorded, eV.
 * @param counts Counts, same shape.
 * @returns The region.
 */
export function simulatedRegion(
  resolved: ResolvedScenario,
  energiesEv: Float64Array,
  counts: Float64Array,
): EdgeRegion {
  const { deadTimeS, dwellS, sweeps } = resolved.acquisition;
  return {
    label: "",
    file: "simulated",
    energyKind: "kinetic",
    energiesEv,
    counts,
    photonEnergyEv: resolved.photonEnergyEv,
    biasV: resolved.biasV,
    asRecorded: true,
    analyzerWorkFunctionEv: resolved.analyzerWorkFunctionEv,
    acceptanceHalfAngleDeg: resolved.acceptanceHalfAngleDeg,
    temperatureK: resolved.temperatureK,
    resolutionFwhmEv: resolved.resolutionFwhmEv,
    deadTimeS: deadTimeS > 0 ? deadTimeS : null,
    countingTimeS: dwellS * sweeps,
  };
}

/**
 * Channel energies are sums of steps; nine decimals take the rounding of binary fractions off.
 *
 * @param value Energy, eV.
 * @returns The energy as files hold it.
 */
export function round9(value: number): number {
  return Math.round(value * 1e9) / 1e9;
}
