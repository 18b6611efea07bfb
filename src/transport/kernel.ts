import { sampleAlias, streamState, writeAliasRow, Xoshiro128pp } from "../rng/mod.ts";
import { acceptedShare, barrierTransmission, type DetectionTable } from "./detection.ts";
import type { LayerStack } from "./stack.ts";

/** Histories in one batch; a batch is the unit of work, of random streams and of statistics. */
export const HISTORIES_PER_BATCH = 4096;

/**
 * An electron that cannot lose energy (in a gap) walks about at random for ever; after so many elastic events in a row it
 * is taken for lost. One in a hundred that start a mean free path deep would still come out.
 */
const MOST_TURNS = 10_000;

/** Depth cells per mean free path of the detection table. */
export const DEPTH_CELLS_PER_PATH = 32;

/** Photons absorbed in one slab of the sample: how many, where, and which energies they make. */
export interface PhotonSourceInput {
  /** Relative number of absorbed photons, >= 0. */
  readonly weight: number;
  /** Decay length of the absorption along the surface normal, nm, > 0. */
  readonly absorptionDepthNm: number;
  /** Weights of the final bins, shape (grid.count), not normalized; all zero where nothing can be excited. */
  readonly excitation: Float64Array;
  /** Layer of the stack. Default: 0. */
  readonly layer?: number;
  /** Upper face of the slab, nm. Default: 0 nm. */
  readonly topNm?: number;
  /** Thickness of the slab, nm. Default: Infinity. */
  readonly thicknessNm?: number;
}

/** The first event of all histories as one alias row over (slab, photon energy, final bin). */
export interface PhotonSource {
  /** Alias row. */
  readonly table: Uint32Array;
  /** Final bin of each outcome. */
  readonly bins: Int32Array;
  /** Layer of each outcome. */
  readonly layers: Int32Array;
  /** Upper face of the slab of each outcome, nm. */
  readonly topsNm: Float64Array;
  /** Decay length of the absorption, nm. */
  readonly depthsNm: Float64Array;
  /** Share of the light that the slab would absorb of what enters it, `1 - exp(-thickness / depth)`. */
  readonly spans: Float64Array;
  /** Probability of each outcome; they add up to one. */
  readonly probabilities: Float64Array;
}

/** A part of the surface with its own barrier, acceptance or tilt. */
export interface SurfacePart {
  /** Share of the area, > 0; shares are normalized. */
  readonly share: number;
  /** Its detection table; all parts share one grid. */
  readonly detection: DetectionTable;
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
 * Joins slabs and photon energies into the source of all histories.
 *
 * Final bins below the vacuum level are kept as outcomes, so that scores stay "per absorbed photon".
 *
 * @param inputs One or more slabs and photon energies.
 * @returns The source, or null when no absorbed photon excites anything.
 */
export function photonSource(inputs: readonly PhotonSourceInput[]): PhotonSource | null {
  const weights: number[] = [];
  const bins: number[] = [];
  const layers: number[] = [];
  const tops: number[] = [];
  const depths: number[] = [];
  const spans: number[] = [];
  for (const input of inputs) {
    const sum = input.excitation.reduce((total, value) => total + value, 0);
    if (sum === 0 || input.weight === 0) continue;
    const span = -Math.expm1(-(input.thicknessNm ?? Infinity) / input.absorptionDepthNm);
    input.excitation.forEach((value, bin) => {
      if (value === 0) return;
      weights.push((input.weight * value) / sum);
      bins.push(bin);
      layers.push(input.layer ?? 0);
      tops.push(input.topNm ?? 0);
      depths.push(input.absorptionDepthNm);
      spans.push(span);
    });
  }
  if (weights.length === 0) return null;
  const table = new Uint32Array(weights.length);
  writeAliasRow(weights, table, 0);
  const total = weights.reduce((sum, weight) => sum + weight, 0);
  return {
    table,
    bins: Int32Array.from(bins),
    layers: Int32Array.from(layers),
    topsNm: Float64Array.from(tops),
    depthsNm: Float64Array.from(depths),
    spans: Float64Array.from(spans),
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
 * @param stack Scattering.
 * @param surface Barriers and acceptances; made for the same grid.
 * @returns Expected electrons per absorbed photon, shape (grid.count).
 */
export function directYield(
  source: PhotonSource,
  stack: LayerStack,
  surface: readonly SurfacePart[],
): Float64Array {
  const { vacuumBin, count } = stack.grid;
  const direct = new Float64Array(count);
  const area = surface.reduce((sum, part) => sum + part.share, 0);
  source.bins.forEach((bin, outcome) => {
    if (bin < vacuumBin) return;
    const row = source.layers[outcome] * count + bin;
    const depthNm = source.depthsNm[outcome];
    const cellNm = stack.pathNm[row] / DEPTH_CELLS_PER_PATH;
    const slabNm = -depthNm * Math.log1p(-source.spans[outcome]); // its thickness
    // Depth of the slab's upper face below that of its layer, in cells; where it lies in the layer and in all.
    const from = source.topsNm[outcome] - stack.topsNm[source.layers[outcome]];
    const cellsAbove = (stack.topPaths[row] + from * stack.pathsPerNm[row]) * DEPTH_CELLS_PER_PATH;
    for (const { share, detection: { probability, cells } } of surface) {
      const first = (bin - vacuumBin) * cells;
      let sum = 0;
      for (let c = Math.floor(cellsAbove); c < cells; c++) {
        const upperNm = c > cellsAbove ? (c - cellsAbove) * cellNm : 0;
        const lowerNm = Math.min(slabNm, (c + 1 - cellsAbove) * cellNm);
        if (!(lowerNm > upperNm)) break;
        sum += (Math.exp(-upperNm / depthNm) - Math.exp(-lowerNm / depthNm)) * probability[first + c];
      }
      direct[bin] += (source.probabilities[outcome] * (share / area) * sum) / source.spans[outcome];
    }
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
 * The energy inside a bin is uniform and drawn anew at each encounter with the surface. Directions do not change at
 * the faces between layers. Each history belongs to one part of the surface.
 *
 * @param source First event.
 * @param stack Scattering.
 * @param parts Barriers and acceptances; made for the same grid.
 * @returns A function that runs batch number `batch` of seed `seed`, {@link HISTORIES_PER_BATCH} histories.
 */
export function historyRunner(
  source: PhotonSource,
  stack: LayerStack,
  parts: readonly SurfacePart[],
): Histories {
  const { lossTable, lossOffset, lossCount, struckTable, struckOffset, struckCount, inelasticShare } = stack;
  const { layers, transfers, topsNm, topPaths, pathNm, pathsPerNm } = stack;
  const { vacuumBin, stepEv, count } = stack.grid;
  const { cells } = parts[0].detection;
  const outcomes = source.table.length;
  const partTable = new Uint32Array(parts.length);
  writeAliasRow(parts.map((part) => part.share), partTable, 0);
  const capacity = count + 64;
  const stackBins = new Int32Array(capacity);
  const stackDepths = new Float64Array(capacity);
  const stackLayers = new Int32Array(capacity);

  return (seed, batch, tally) => {
    const generator = new Xoshiro128pp(streamState(seed, "transport", batch));
    const { forced, analogue, events } = tally;
    let { probability, input: surface } = parts[0].detection;
    for (let history = 0; history < HISTORIES_PER_BATCH; history++) {
      if (parts.length > 1) {
        ({ probability, input: surface } =
          parts[sampleAlias(partTable, 0, parts.length, generator)].detection);
      }
      const first = sampleAlias(source.table, 0, outcomes, generator);
      stackBins[0] = source.bins[first];
      stackLayers[0] = source.layers[first];
      stackDepths[0] = source.topsNm[first] -
        Math.log(1 - generator.nextUniform() * source.spans[first]) * source.depthsNm[first];
      let pending = 1;
      let scattered = false;
      while (pending > 0) {
        pending--;
        let bin = stackBins[pending];
        let depthNm = stackDepths[pending];
        let layer = stackLayers[pending];
        let turns = 0;
        while (bin >= vacuumBin) {
          let row = bin;
          let paths = depthNm * pathsPerNm[bin];
          if (layers > 1) {
            row = layer * count + bin;
            paths = topPaths[row] + (depthNm - topsNm[layer]) * pathsPerNm[row];
          }
          if (scattered) {
            const cell = paths * DEPTH_CELLS_PER_PATH;
            if (cell < cells) forced[bin] += probability[(bin - vacuumBin) * cells + (cell | 0)];
          }
          scattered = true;

          const cosine = 2 * generator.nextUniform() - 1;
          paths += Math.log(generator.nextUniform()) * cosine;
          if (paths < 0) {
            const energyEv = (bin + generator.nextUniform()) * stepEv;
            const passes = barrierTransmission(surface, energyEv, cosine);
            if (passes > 0 && (passes === 1 || generator.nextUniform() < passes)) {
              const accepted = acceptedShare(surface, energyEv, cosine);
              if (accepted === 1 || (accepted > 0 && generator.nextUniform() < accepted)) analogue[bin]++;
              break;
            }
            paths = -paths;
          }
          if (layers > 1) {
            layer = 0;
            row = bin;
            while (layer + 1 < layers && paths >= topPaths[row + count]) {
              layer++;
              row += count;
            }
            depthNm = topsNm[layer] + (paths - topPaths[row]) * pathNm[row];
          } else depthNm = paths * pathNm[bin];
          // An infinite path (no event possible) that did not leave has gone for good; the negation also stops NaN.
          if (!(depthNm < Infinity)) break;

          if (inelasticShare[row] < 1 && generator.nextUniform() >= inelasticShare[row]) {
            if (++turns > MOST_TURNS) break;
            continue;
          }
          turns = 0;
          events[bin]++;
          const transfer = sampleAlias(lossTable, lossOffset[row], lossCount[row], generator);
          const struckRow = layer * transfers + transfer;
          const choices = struckCount[struckRow];
          if (choices > 0) {
            const struck = sampleAlias(struckTable, struckOffset[struckRow], choices, generator);
            if (struck < choices - 1) {
              stackBins[pending] = vacuumBin + struck;
              stackDepths[pending] = depthNm;
              stackLayers[pending] = layer;
              pending++;
            }
          }
          bin -= transfer;
        }
      }
    }
  };
}
