import { sampleAlias, streamState, writeAliasRow, Xoshiro128pp } from "../rng/mod.ts";
import { acceptedShare, barrierTransmission, type DetectionTable } from "./detection.ts";
import type { PairTables } from "./pair_tables.ts";

/** Histories in one batch; a batch is the unit of work, of random streams and of statistics. */
export const HISTORIES_PER_BATCH = 4096;

/** Depth cells per mean free path of the detection table. */
export const DEPTH_CELLS_PER_PATH = 32;

/** One photon energy: how strong, where it is absorbed, and which energies it makes. */
export interface PhotonSourceInput {
  /** Relative number of absorbed photons, >= 0. */
  readonly weight: number;
  /** Mean depth of absorption along the surface normal, nm, > 0. */
  readonly absorptionDepthNm: number;
  /** Weights of the final bins, shape (grid.count), not normalized; all zero where nothing can be excited. */
  readonly excitation: Float64Array;
}

/** The first event of all histories as one alias row over (photon energy, final bin). */
export interface PhotonSource {
  /** Alias row. */
  readonly table: Uint32Array;
  /** Final bin of each outcome. */
  readonly bins: Int32Array;
  /** Mean absorption depth of each outcome, nm. */
  readonly depthsNm: Float64Array;
  /** Probability of each outcome; they add up to one. */
  readonly probabilities: Float64Array;
}

/** What a batch of histories adds up to; every array has one entry per energy bin. */
export interface BatchTally {
  /** Next-event scores after at least one event: expected number of electrons that reach the analyzer. */
  readonly forced: Float64Array;
  /** Electrons that did reach it, counted one by one. */
  readonly analogue: Float64Array;
  /** Inelastic events of electrons in this bin. */
  readonly events: Float64Array;
}

/** Runs one batch of histories, adding to the tally. */
export type Histories = (seed: number, batch: number, tally: BatchTally) => void;

/**
 * A tally of zeros.
 *
 * @param count Energy bins.
 * @returns The tally.
 */
export function emptyBatchTally(count: number): BatchTally {
  return {
    forced: new Float64Array(count),
    analogue: new Float64Array(count),
    events: new Float64Array(count),
  };
}

/**
 * Joins photon energies into the source of all histories.
 *
 * Final bins below the vacuum level are kept as outcomes, so that scores stay "per absorbed photon".
 *
 * @param inputs One or more photon energies.
 * @returns The source, or null when no absorbed photon excites anything.
 */
export function photonSource(inputs: readonly PhotonSourceInput[]): PhotonSource | null {
  const weights: number[] = [];
  const bins: number[] = [];
  const depths: number[] = [];
  for (const input of inputs) {
    const sum = input.excitation.reduce((total, value) => total + value, 0);
    if (sum === 0 || input.weight === 0) continue;
    input.excitation.forEach((value, bin) => {
      if (value === 0) return;
      weights.push((input.weight * value) / sum);
      bins.push(bin);
      depths.push(input.absorptionDepthNm);
    });
  }
  if (weights.length === 0) return null;
  const table = new Uint32Array(weights.length);
  writeAliasRow(weights, table, 0);
  const total = weights.reduce((sum, weight) => sum + weight, 0);
  return {
    table,
    bins: Int32Array.from(bins),
    depthsNm: Float64Array.from(depths),
    probabilities: Float64Array.from(weights, (weight) => weight / total),
  };
}

/**
 * Expected number of electrons per absorbed photon that reach the analyzer without any event, by energy bin.
 *
 * This part of the spectrum needs no histories: it is the sum over the source of the next-event score averaged over
 * the exponential depth distribution, cell by cell.
 *
 * @param source First event.
 * @param tables Scattering.
 * @param detection Barrier and acceptance; made for the same grid.
 * @returns Expected electrons per absorbed photon, shape (grid.count).
 */
export function directYield(
  source: PhotonSource,
  tables: PairTables,
  detection: DetectionTable,
): Float64Array {
  const { vacuumBin, count } = tables.grid;
  const { probability, cells } = detection;
  const direct = new Float64Array(count);
  source.bins.forEach((bin, outcome) => {
    if (bin < vacuumBin) return;
    const cellDepths = tables.totalMeanFreePathNm[bin] / DEPTH_CELLS_PER_PATH / source.depthsNm[outcome];
    const decay = Math.exp(-cellDepths);
    let absorbed = -Math.expm1(-cellDepths);
    let sum = 0;
    for (let c = 0; c < cells; c++, absorbed *= decay) {
      sum += absorbed * probability[(bin - vacuumBin) * cells + c];
    }
    direct[bin] += source.probabilities[outcome] * sum;
  });
  return direct;
}

/**
 * Prepares the history loop: absorb, score, fly, escape or reflect or scatter, follow the struck electron, die.
 *
 * Every electron is scored once per choice of direction, before its flight, with the probability of reaching the
 * analyzer at once (next-event estimator); only the photoelectron's own first flight is left to {@link directYield},
 * which knows its expectation exactly. The flight itself is analogue, and an electron
 * that really leaves is counted in the analogue tally with the same energies and angles, so both tallies estimate the
 * same expectation. Directions after an event are isotropic. What does not pass the barrier is reflected inward.
 * The energy inside a bin is uniform and drawn anew at each encounter with the surface.
 *
 * @param source First event.
 * @param tables Scattering.
 * @param detection Barrier and acceptance; made for the same grid.
 * @returns A function that runs batch number `batch` of seed `seed`, {@link HISTORIES_PER_BATCH} histories.
 */
export function historyRunner(
  source: PhotonSource,
  tables: PairTables,
  detection: DetectionTable,
): Histories {
  const { grid, lossTable, lossOffset, lossCount, struckTable, struckOffset, struckCount, inelasticShare } =
    tables;
  const { vacuumBin, stepEv, count } = grid;
  const { probability, cells, input: surface } = detection;
  const outcomes = source.table.length;
  const cellsPerNm = tables.totalMeanFreePathNm.map((length) => DEPTH_CELLS_PER_PATH / length);
  const pathNm = tables.totalMeanFreePathNm;
  const stackBins = new Int32Array(count + 64);
  const stackDepths = new Float64Array(count + 64);

  return (seed, batch, tally) => {
    const generator = new Xoshiro128pp(streamState(seed, "transport", batch));
    const { forced, analogue, events } = tally;
    for (let history = 0; history < HISTORIES_PER_BATCH; history++) {
      const first = sampleAlias(source.table, 0, outcomes, generator);
      stackBins[0] = source.bins[first];
      stackDepths[0] = -Math.log(generator.nextUniform()) * source.depthsNm[first];
      let pending = 1;
      let scattered = false;
      while (pending > 0) {
        pending--;
        let bin = stackBins[pending];
        let depthNm = stackDepths[pending];
        while (bin >= vacuumBin) {
          if (scattered) {
            const cell = depthNm * cellsPerNm[bin];
            if (cell < cells) forced[bin] += probability[(bin - vacuumBin) * cells + (cell | 0)];
          }
          scattered = true;

          const cosine = 2 * generator.nextUniform() - 1;
          depthNm += Math.log(generator.nextUniform()) * pathNm[bin] * cosine;
          if (depthNm < 0) {
            const energyEv = (bin + generator.nextUniform()) * stepEv;
            const passes = barrierTransmission(surface, energyEv, cosine);
            if (passes > 0 && (passes === 1 || generator.nextUniform() < passes)) {
              const accepted = acceptedShare(surface, energyEv, cosine);
              if (accepted === 1 || (accepted > 0 && generator.nextUniform() < accepted)) analogue[bin]++;
              break;
            }
            depthNm = -depthNm;
          }
          // An infinite path (no event possible) that did not leave has gone for good; the negation also stops NaN.
          if (!(depthNm < Infinity)) break;

          if (inelasticShare[bin] < 1 && generator.nextUniform() >= inelasticShare[bin]) continue;
          events[bin]++;
          const transfer = sampleAlias(lossTable, lossOffset[bin], lossCount[bin], generator);
          const choices = struckCount[transfer];
          if (choices > 0) {
            const struck = sampleAlias(struckTable, struckOffset[transfer], choices, generator);
            if (struck < choices - 1) {
              stackBins[pending] = vacuumBin + struck;
              stackDepths[pending] = depthNm;
              pending++;
            }
          }
          bin -= transfer;
        }
      }
    }
  };
}
