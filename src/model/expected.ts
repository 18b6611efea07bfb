import { applyResponse, drawCounts, expectedCounts, responseMatrix, windowEv } from "../instrument/mod.ts";
import { streamState, Xoshiro128pp } from "../rng/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import type { Tally } from "../transport/mod.ts";
import type { EngineData, PairEngineData } from "../transport/mod.ts";
import { type ExpectedLevel, expectedLevels, fastResponse } from "./fast.ts";
import type { EngineResponse } from "./response.ts";

/** What the instrument is expected to record, shape (channels) each. */
export interface ExpectedSpectrum {
  /** Kinetic energy as the analyzer records it, eV, ascending. */
  readonly kineticEnergiesEv: Float64Array;
  /** Expected counts in all sweeps, dark counts included. */
  readonly counts: Float64Array;
  /** Standard error of `counts` from the finite number of histories. */
  readonly standardErrors: Float64Array;
  /** Part of `counts` that photoelectrons without any event on their way make; known without histories. */
  readonly directCounts: Float64Array;
  /** Expected counts from the analogue tally of the same histories. */
  readonly analogueCounts: Float64Array;
  /** Standard error of `analogueCounts`. */
  readonly analogueStandardErrors: Float64Array;
  /** Electrons per photon (absorbed in the ultraviolet, incident above) that reach the analyzer, all energies. */
  readonly electronsPerPhoton: number;
  /** The same by the analogue tally, with its standard error. */
  readonly analoguePerPhoton: { readonly value: number; readonly standardError: number };
  /** Lines of core levels; empty in the ultraviolet. */
  readonly levels: readonly ExpectedLevel[];
}

/** The power law of the transmission is not followed to slower electrons, eV. */
const SLOWEST_EV = 1e-3;

/**
 * Turns a tally into expected counts: resolution, transmission, flux, dead time.
 *
 * Rate = flux x absorbed share x detected share x transmission x (electrons per eV and absorbed photon) x window,
 * the window being the area of a Gaussian response of peak 1.
 *
 * @param resolved The scenario.
 * @param engine Tables of the same scenario.
 * @param tally Histories of the same engine.
 * @returns Expected counts with standard errors from the scatter between groups of batches.
 */
export function expectedSpectrum(
  resolved: ResolvedScenario,
  engine: EngineData,
  tally: Tally,
): ExpectedSpectrum {
  const { acquisition } = resolved;
  const channels = Math.floor((acquisition.endEv - acquisition.startEv) / acquisition.stepEv + 1e-6) + 1;
  const kineticEnergiesEv = Float64Array.from(
    { length: channels },
    (_, c) => acquisition.startEv + c * acquisition.stepEv,
  );
  const response = engine.kind === "pair"
    ? pairResponse(resolved, engine, kineticEnergiesEv)
    : fastResponse(resolved, engine, kineticEnergiesEv);
  // The transmission is 1 at the Fermi edge, or at 1 eV where the analyzer would not record that.
  const fermiEdgeEv = resolved.photonEnergyEv + resolved.kineticEnergyShiftEv;
  const referenceEv = fermiEdgeEv > 0 ? fermiEdgeEv : 1;
  const ratePerDensity = kineticEnergiesEv.map((energyEv) => {
    if (energyEv <= 0) return 0; // the analyzer records nothing at or below zero kinetic energy
    const transmission = (Math.max(energyEv, SLOWEST_EV) / referenceEv) ** -resolved.transmissionExponent;
    return response.photonsPerS * resolved.detectionFraction * transmission *
      windowEv(resolved.resolutionFwhmEv);
  });
  const forced = groupStatistics(tally, channels, (group) => response.densityOf(group.forced));
  const analogue = groupStatistics(tally, channels, (group) => response.densityOf(group.analogue));
  const toCounts = (mean: (c: number) => number, error: Float64Array) =>
    expectedCounts(
      ratePerDensity.map((rate, c) => rate * mean(c)),
      ratePerDensity.map((rate, c) => rate * error[c]),
      acquisition,
    );
  const expected = toCounts((c) => response.direct[c] + forced.mean[c], forced.error);
  const counted = toCounts((c) => analogue.mean[c], analogue.error);
  const { darkRateCountsPerS } = acquisition;
  const directCounts = expected.counts.map((counts, c) => {
    const all = ratePerDensity[c] * (response.direct[c] + forced.mean[c]) + darkRateCountsPerS;
    return all > 0 ? (counts * ratePerDensity[c] * response.direct[c]) / all : 0;
  });
  const scattered = groupStatistics(tally, 1, (group) => response.totalOf(group.forced));
  const seen = groupStatistics(tally, 1, (group) => response.totalOf(group.analogue));
  return {
    kineticEnergiesEv,
    counts: expected.counts,
    standardErrors: expected.standardErrors,
    directCounts,
    analogueCounts: counted.counts,
    analogueStandardErrors: counted.standardErrors,
    electronsPerPhoton: response.directTotal + scattered.mean[0],
    analoguePerPhoton: { value: seen.mean[0], standardError: seen.error[0] },
    levels: engine.kind === "pair" ? [] : expectedLevels(resolved, engine, tally),
  };
}

function pairResponse(
  resolved: ResolvedScenario,
  engine: PairEngineData,
  kineticEnergiesEv: Float64Array,
): EngineResponse {
  const { stepEv, count } = engine.stack.grid;
  const matrix = responseMatrix(
    kineticEnergiesEv,
    { startEv: resolved.kineticEnergyShiftEv, stepEv, count },
    resolved.resolutionFwhmEv,
  );
  return {
    photonsPerS: resolved.absorbedPhotonsPerS,
    direct: applyResponse(matrix, engine.direct),
    directTotal: total(engine.direct),
    densityOf: (contents) => applyResponse(matrix, contents),
    totalOf: (contents) => Float64Array.of(total(contents)),
  };
}

/**
 * Draws counts about the expectation.
 *
 * @param spectrum The expectation.
 * @param seed Seed of the scenario.
 * @param replicate Which independent draw. Default: 0.
 * @returns Whole counts, shape (channels).
 */
export function countSpectrum(spectrum: ExpectedSpectrum, seed: number, replicate = 0): Float64Array {
  return drawCounts(spectrum.counts, new Xoshiro128pp(streamState(seed, "counting", replicate)));
}

/** Means and standard errors from the scatter between groups (weights by histories). */
function groupStatistics(
  tally: Tally,
  count: number,
  valuesOf: (group: Tally["groups"][number]) => Float64Array,
): { mean: Float64Array; error: Float64Array } {
  const mean = new Float64Array(count);
  const squares = new Float64Array(count);
  let weight = 0;
  let groups = 0;
  for (const group of tally.groups) {
    const values = valuesOf(group);
    weight += group.histories;
    groups++;
    for (let c = 0; c < count; c++) {
      // Weighted running mean and sum of squares: D. West, Commun. ACM 22, 532 (1979).
      const delta = values[c] / group.histories - mean[c];
      const share = (delta * group.histories) / weight;
      mean[c] += share;
      squares[c] += (weight - group.histories) * delta * share;
    }
  }
  const error = squares.map((sum) => (groups > 1 ? Math.sqrt(sum / weight / (groups - 1)) : 0));
  return { mean, error };
}

function total(values: Float64Array): number {
  return values.reduce((sum, value) => sum + value, 0);
}
