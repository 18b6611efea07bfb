import {
  applyResponse,
  drawCounts,
  expectedCounts,
  type ResponseMatrix,
  responseMatrix,
  windowEv,
} from "../instrument/mod.ts";
import { streamState, Xoshiro128pp } from "../rng/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import type { Tally } from "../transport/mod.ts";
import type { EngineData } from "./engine.ts";

/** What the instrument is expected to record, shape (channels) each. */
export interface ExpectedSpectrum {
  /** Kinetic energy as the analyzer records it, eV, ascending. */
  readonly kineticEnergiesEv: Float64Array;
  /** Expected counts in all sweeps, dark counts included. */
  readonly counts: Float64Array;
  /** Standard error of `counts` from the finite number of histories. */
  readonly standardErrors: Float64Array;
  /** Expected counts from the analogue tally of the same histories. */
  readonly analogueCounts: Float64Array;
  /** Standard error of `analogueCounts`. */
  readonly analogueStandardErrors: Float64Array;
  /** Electrons per absorbed photon that reach the analyzer, all energies. */
  readonly electronsPerPhoton: number;
}

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
  const grid = engine.stack.grid;
  const channels = Math.floor((acquisition.endEv - acquisition.startEv) / acquisition.stepEv + 1e-6) + 1;
  const kineticEnergiesEv = Float64Array.from(
    { length: channels },
    (_, c) => acquisition.startEv + c * acquisition.stepEv,
  );
  const response = responseMatrix(
    kineticEnergiesEv,
    { startEv: resolved.kineticEnergyShiftEv, stepEv: grid.stepEv, count: grid.count },
    resolved.resolutionFwhmEv,
  );
  const fermiEdgeEv = resolved.photonEnergyEv + resolved.kineticEnergyShiftEv;
  const ratePerDensity = kineticEnergiesEv.map((energyEv) => {
    if (energyEv <= 0) return 0; // the analyzer records nothing at or below zero kinetic energy
    const transmission = (energyEv / fermiEdgeEv) ** -resolved.transmissionExponent;
    return resolved.absorbedPhotonsPerS * resolved.detectionFraction * transmission *
      windowEv(resolved.resolutionFwhmEv);
  });

  const direct = applyResponse(response, engine.direct);
  const forced = groupStatistics(tally, response, (group) => group.forced);
  const analogue = groupStatistics(tally, response, (group) => group.analogue);
  const toCounts = (mean: (c: number) => number, error: Float64Array) =>
    expectedCounts(
      ratePerDensity.map((rate, c) => rate * mean(c)),
      ratePerDensity.map((rate, c) => rate * error[c]),
      acquisition,
    );
  const expected = toCounts((c) => direct[c] + forced.mean[c], forced.error);
  const counted = toCounts((c) => analogue.mean[c], analogue.error);
  const scattered = tally.groups.reduce((sum, group) => sum + total(group.forced), 0);
  return {
    kineticEnergiesEv,
    counts: expected.counts,
    standardErrors: expected.standardErrors,
    analogueCounts: counted.counts,
    analogueStandardErrors: counted.standardErrors,
    electronsPerPhoton: total(engine.direct) + (tally.histories > 0 ? scattered / tally.histories : 0),
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

/** Mean and standard error of a density at the channels, from the scatter between groups (equal weights by histories). */
function groupStatistics(
  tally: Tally,
  response: ResponseMatrix,
  pick: (group: Tally["groups"][number]) => Float64Array,
): { mean: Float64Array; error: Float64Array } {
  const channels = response.first.length;
  const mean = new Float64Array(channels);
  const squares = new Float64Array(channels);
  let weight = 0;
  let groups = 0;
  for (const group of tally.groups) {
    const density = applyResponse(response, pick(group));
    weight += group.histories;
    groups++;
    for (let c = 0; c < channels; c++) {
      // Weighted running mean and sum of squares: D. West, Commun. ACM 22, 532 (1979).
      const delta = density[c] / group.histories - mean[c];
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
