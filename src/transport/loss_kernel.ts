import { sampleAlias, streamState, writeAliasRow, Xoshiro128pp } from "../rng/mod.ts";
import { acceptedShare, barrierTransmission, type DetectionTable } from "./detection.ts";
import { DEPTH_CELLS_PER_PATH, type Histories, HISTORIES_PER_BATCH } from "./kernel.ts";

/** A layer in which fast electrons lose energy; lengths by row of the detection table's grid, shape (grid.count). */
export interface LossLayer {
  /** Thickness, nm, > 0; Infinity for the last layer. */
  readonly thicknessNm: number;
  /** Inelastic mean free path, nm. */
  readonly inelasticMeanFreePathNm: Float64Array;
  /** Transport mean free path of elastic events, nm; null for none. */
  readonly transportMeanFreePathNm: number | null;
  /** Probability of each loss in steps of {@link LossMedium.stepEv}, shape (losses). */
  readonly losses: Float64Array;
}

/** One line of electrons from one layer. */
export interface LossSource {
  /** Layer. */
  readonly layer: number;
  /** Energy above the Fermi level at which they start, eV. */
  readonly energyEv: number;
  /** Electrons per photon and nanometer of depth at the layer's upper face, 1/nm, > 0. */
  readonly perNm: number;
  /** Weight of the direction to the analyzer of electrons that do not scatter, 1 for isotropic emission, >= 0. */
  readonly directWeight: number;
}

/** What the histories of fast electrons need, as plain data. */
export interface LossMedium {
  /** Layers from the surface down. */
  readonly layers: readonly LossLayer[];
  /** Lines. */
  readonly sources: readonly LossSource[];
  /** Barrier and acceptance on a coarse grid of energies. */
  readonly detection: DetectionTable;
  /** Step of the losses, eV. */
  readonly stepEv: number;
  /** Largest loss that is followed, eV. */
  readonly maxLossEv: number;
}

/** Where things are in the tally of one source: `source * stride + ...`. */
export interface LossLayout {
  /** Entries of one source. */
  readonly stride: number;
  /** Loss bins: bin 0 is no loss, bin b > 0 a loss of (b - 1)..b steps. */
  readonly lossBins: number;
  /** First entry of the origins of no-loss electrons, by depth. */
  readonly depthFrom: number;
  /** Depth cells; the last one is for everything deeper. */
  readonly depthCells: number;
}

/** Depth cells of the origins, and how many of them make a mean free path. */
const DEPTH_CELLS = 160;
const DEPTH_CELLS_PER_LENGTH = 16;
/** Electrons start with this mean depth in mean free paths, deeper ones with the weight that makes up for it. */
const START_PATHS = 2;

/**
 * Layout of the tally.
 *
 * @param medium The medium.
 * @returns Offsets.
 */
export function lossLayout(medium: LossMedium): LossLayout {
  const lossBins = 1 + Math.ceil(medium.maxLossEv / medium.stepEv);
  return { stride: lossBins + DEPTH_CELLS, lossBins, depthFrom: lossBins, depthCells: DEPTH_CELLS };
}

/** Events per nm of a medium by layer and energy row, entry `layer * rows + row`, and counted from the surface down. */
interface Lengths {
  readonly rows: number;
  readonly rowEv: number;
  readonly topsNm: Float64Array;
  readonly inelasticPerNm: Float64Array;
  readonly inelasticAbove: Float64Array;
  readonly elasticPerNm: Float64Array;
  readonly elasticAbove: Float64Array;
}

function lengthsOf({ layers, detection }: LossMedium): Lengths {
  const { count: rows, stepEv: rowEv } = detection.input.grid;
  const size = layers.length * rows;
  const lengths = {
    rows,
    rowEv,
    topsNm: new Float64Array(layers.length),
    inelasticPerNm: new Float64Array(size),
    inelasticAbove: new Float64Array(size),
    elasticPerNm: new Float64Array(size),
    elasticAbove: new Float64Array(size),
  };
  layers.forEach((layer, l) => {
    const above = layers[l - 1]?.thicknessNm ?? 0;
    if (l > 0) lengths.topsNm[l] = lengths.topsNm[l - 1] + above;
    for (let row = 0; row < rows; row++) {
      const at = l * rows + row;
      lengths.inelasticPerNm[at] = 1 / layer.inelasticMeanFreePathNm[row];
      lengths.elasticPerNm[at] = layer.transportMeanFreePathNm === null
        ? 0
        : 1 / layer.transportMeanFreePathNm;
      if (l === 0) continue;
      lengths.inelasticAbove[at] = lengths.inelasticAbove[at - rows] +
        above * lengths.inelasticPerNm[at - rows];
      lengths.elasticAbove[at] = lengths.elasticAbove[at - rows] + above * lengths.elasticPerNm[at - rows];
    }
  });
  return lengths;
}

/** Width of the depth cells of a source, nm: a share of the mean free path where its electrons start, or of a thin film. */
function depthCellNm(medium: LossMedium, lengths: Lengths, source: LossSource): number {
  const { inelasticMeanFreePathNm, thicknessNm } = medium.layers[source.layer];
  const row = Math.floor(source.energyEv / lengths.rowEv);
  return Math.min(inelasticMeanFreePathNm[row] / DEPTH_CELLS_PER_LENGTH, thicknessNm / DEPTH_CELLS);
}

/** What of a source reaches the analyzer without any event. */
export interface DirectLine {
  /** Electrons per photon. */
  readonly electrons: number;
  /** The same by depth of origin, shape (depth cells). */
  readonly byDepth: Float64Array;
  /** Width of a depth cell, nm. */
  readonly depthCellNm: number;
}

/**
 * Electrons that reach the analyzer without any event, by quadrature over the depth.
 *
 * @param medium The medium.
 * @returns One result per source.
 */
export function directLines(medium: LossMedium): DirectLine[] {
  const lengths = lengthsOf(medium);
  const { probability, cells, input: { grid } } = medium.detection;
  return medium.sources.map((source) => {
    const row = Math.floor(source.energyEv / lengths.rowEv);
    const first = (row - grid.vacuumBin) * cells;
    const at = source.layer * lengths.rows + row;
    const above = (lengths.inelasticAbove[at] + lengths.elasticAbove[at]) * DEPTH_CELLS_PER_PATH;
    const cellNm = 1 / (lengths.inelasticPerNm[at] + lengths.elasticPerNm[at]) / DEPTH_CELLS_PER_PATH;
    const thickness = medium.layers[source.layer].thicknessNm;
    const depth = depthCellNm(medium, lengths, source);
    const byDepth = new Float64Array(DEPTH_CELLS);
    let electrons = 0;
    for (let c = Math.floor(above); c < cells; c++) {
      const upperNm = Math.max(0, (c - above) * cellNm);
      const lowerNm = Math.min(thickness, (c + 1 - above) * cellNm);
      if (!(lowerNm > upperNm)) break;
      const share = source.perNm * source.directWeight * (lowerNm - upperNm) * probability[first + c];
      electrons += share;
      const last = Math.min(DEPTH_CELLS - 1, Math.floor(lowerNm / depth));
      for (let d = Math.min(last, Math.floor(upperNm / depth)); d <= last; d++) {
        const endNm = d === last ? lowerNm : (d + 1) * depth;
        byDepth[d] += (share * (endNm - Math.max(upperNm, d * depth))) / (lowerNm - upperNm);
      }
    }
    return { electrons, byDepth, depthCellNm: depth };
  });
}

/**
 * Prepares the histories of fast electrons: start, score, fly to an elastic event losing energy on the way, turn.
 *
 * Losses do not deflect (the angle of a loss T at energy E is of order T/(2 E)); elastic events make directions
 * isotropic after the transport mean free path. Before each flight the electron is scored with a direction drawn inside
 * the acceptance and the probability of getting out without an elastic event; the losses on that way are drawn from
 * Poisson's law, the share without any is scored as an expectation. The first flight's share without losses is left to
 * {@link directLines}. The number of losses goes into `events`, which so holds the partial intensities within the
 * losses that are followed, the depth of origin of no-loss electrons behind the loss bins. Electrons start exponentially in depth and carry the weight that
 * makes their density uniform. Struck electrons are not followed; mean free paths are those at the start of a flight.
 *
 * Source: partial intensities and straight-line losses, W. Werner, Surf. Interface Anal. 31, 141 (2001) (from memory).
 *
 * @param medium The medium.
 * @returns A function that runs one batch.
 */
export function lossHistoryRunner(medium: LossMedium): Histories {
  const { layers, sources, detection, stepEv, maxLossEv } = medium;
  const lengths = lengthsOf(medium);
  const { rows, rowEv, topsNm, inelasticPerNm, inelasticAbove, elasticPerNm, elasticAbove } = lengths;
  const surface = detection.input;
  const { stride, lossBins, depthFrom } = lossLayout(medium);
  const lowestEv = Math.max(surface.grid.vacuumBin * rowEv, surface.workFunctionEv + rowEv);

  const lossOffset = new Int32Array(layers.length);
  for (let l = 1; l < layers.length; l++) lossOffset[l] = lossOffset[l - 1] + layers[l - 1].losses.length;
  const lossTable = new Uint32Array(layers.reduce((sum, layer) => sum + layer.losses.length, 0));
  layers.forEach((layer, l) => writeAliasRow(layer.losses, lossTable, lossOffset[l]));
  const lossCount = Int32Array.from(layers, (layer) => layer.losses.length);

  const starts = sources.map((source) => {
    const row = Math.floor(source.energyEv / rowEv);
    const lengthNm = START_PATHS * layers[source.layer].inelasticMeanFreePathNm[row];
    const span = -Math.expm1(-layers[source.layer].thicknessNm / lengthNm);
    return { lengthNm, span, emitted: source.perNm * lengthNm * span };
  });
  const total = starts.reduce((sum, start) => sum + start.emitted, 0);
  const sourceTable = new Uint32Array(sources.length);
  writeAliasRow(starts.map((start) => start.emitted), sourceTable, 0);
  const startNm = Float64Array.from(starts, (start) => start.lengthNm);
  const startSpan = Float64Array.from(starts, (start) => start.span);
  const startEv = Float64Array.from(sources, (source) => source.energyEv);
  const startLayer = Int32Array.from(sources, (source) => source.layer);
  const startDirect = Float64Array.from(sources, (source) => source.directWeight);
  const depthsPerNm = Float64Array.from(sources, (source) => 1 / depthCellNm(medium, lengths, source));

  const cosHalf = Math.cos(surface.acceptanceHalfAngleRad);
  const cosAxis = Math.cos(surface.emissionAngleRad);
  const sinAxis = Math.sin(surface.emissionAngleRad);
  const coneShare = (1 - cosHalf) / 2;

  /** Sum of `count` losses at uniform places between two depths, both in inelastic mean free paths at an energy row. */
  const drawLosses = (
    count: number,
    from: number,
    to: number,
    row: number,
    generator: Xoshiro128pp,
  ): number => {
    let sum = 0;
    for (let i = 0; i < count && sum <= maxLossEv; i++) {
      let layer = 0;
      if (layers.length > 1) {
        const place = from + generator.nextUniform() * (to - from);
        while (layer + 1 < layers.length && place >= inelasticAbove[(layer + 1) * rows + row]) layer++;
      }
      const bin = sampleAlias(lossTable, lossOffset[layer], lossCount[layer], generator);
      sum += (bin + generator.nextUniform()) * stepEv;
    }
    return sum;
  };

  return (seed, batch, tally) => {
    const generator = new Xoshiro128pp(streamState(seed, "transport", batch));
    const { forced, analogue, events } = tally;
    for (let history = 0; history < HISTORIES_PER_BATCH; history++) {
      const source = sampleAlias(sourceTable, 0, sources.length, generator);
      const below = -Math.log(1 - generator.nextUniform() * startSpan[source]) * startNm[source];
      // Emission is uniform in depth: density of starts exp(-z/L)/(L span), so the weight is its inverse.
      const weight = total * Math.exp(below / startNm[source]);
      const base = source * stride;
      const origin = base + depthFrom + Math.min(DEPTH_CELLS - 1, (below * depthsPerNm[source]) | 0);
      let layer = startLayer[source];
      let depthNm = topsNm[layer] + below;
      let lossEv = 0;
      let losses = 0;
      let turned = false;
      for (;;) {
        const energyEv = startEv[source] - lossEv;
        if (lossEv > maxLossEv || energyEv < lowestEv) break;
        const row = (energyEv / rowEv) | 0;
        const at = layer * rows + row;
        const inside = depthNm - topsNm[layer];
        const inelastic = inelasticAbove[at] + inside * inelasticPerNm[at];
        const elastic = elasticAbove[at] + inside * elasticPerNm[at];

        // Score: a direction inside the acceptance, traced back through field and barrier.
        const off = 1 - generator.nextUniform() * (1 - cosHalf);
        const cosArriving = sinAxis === 0 ? off : cosAxis * off -
          sinAxis * Math.sqrt(1 - off * off) * Math.cos(2 * Math.PI * generator.nextUniform());
        const arrivingEv = energyEv - surface.workFunctionEv + surface.accelerationEv;
        const insideEv = energyEv + surface.bandBottomBelowFermiEv;
        const square = 1 - (arrivingEv * (1 - cosArriving * cosArriving)) / insideEv;
        if (cosArriving > 0 && square > 0) {
          const cosine = Math.sqrt(square);
          // Solid angles go as d^2 p_parallel / (p^2 cos).
          let score = weight * coneShare * ((arrivingEv * cosArriving) / (insideEv * cosine)) *
            barrierTransmission(surface, energyEv, cosine) * Math.exp(-elastic / cosine);
          if (!turned) score *= startDirect[source];
          const mean = inelastic / cosine;
          const none = Math.exp(-mean);
          if (turned) {
            const bin = losses === 0 ? 0 : 1 + ((lossEv / stepEv) | 0);
            if (bin < lossBins) forced[base + bin] += score * none;
            if (losses < lossBins) events[base + losses] += score * none;
            if (losses === 0) forced[origin] += score * none;
          }
          const more = poissonAbove(mean, none, none + generator.nextUniform() * (1 - none));
          const sum = lossEv + drawLosses(more, 0, inelastic, row, generator);
          const bin = 1 + ((sum / stepEv) | 0);
          if (bin < lossBins) {
            forced[base + bin] += score * (1 - none);
            if (losses + more < lossBins) events[base + losses + more] += score * (1 - none);
          }
        }
        const first = !turned;
        turned = true;

        // Flight to the next elastic event.
        const cosine = 2 * generator.nextUniform() - 1;
        let target = elastic + Math.log(generator.nextUniform()) * cosine;
        let path = inelastic;
        const leaves = cosine > 0 && target < 0;
        if (leaves) {
          const mean = inelastic / cosine;
          const count = poissonAbove(mean, Math.exp(-mean), generator.nextUniform());
          const lost = lossEv + drawLosses(count, 0, inelastic, row, generator);
          const passes = barrierTransmission(surface, energyEv, cosine);
          if (passes > 0 && (passes === 1 || generator.nextUniform() < passes)) {
            const accepted = acceptedShare(surface, energyEv, cosine);
            if (accepted === 1 || (accepted > 0 && generator.nextUniform() < accepted)) {
              const bin = losses + count === 0 ? 0 : 1 + ((lost / stepEv) | 0);
              if (bin < lossBins) analogue[base + bin] += first ? weight * startDirect[source] : weight;
            }
            break;
          }
          losses += count;
          lossEv = lost;
          target = -target;
          path = 0;
        }
        layer = 0;
        while (layer + 1 < layers.length && target >= elasticAbove[(layer + 1) * rows + row]) layer++;
        const there = layer * rows + row;
        depthNm = topsNm[layer] + (target - elasticAbove[there]) / elasticPerNm[there];
        if (!(depthNm < Infinity)) break;
        const end = inelasticAbove[there] + (depthNm - topsNm[layer]) * inelasticPerNm[there];
        const mean = Math.abs(end - path) / Math.abs(cosine);
        const count = poissonAbove(mean, Math.exp(-mean), generator.nextUniform());
        losses += count;
        lossEv += drawLosses(count, path, end, row, generator);
      }
    }
  };
}

/** A mean above this leaves no electron within any loss that is followed. */
const MOST_EVENTS = 200;

/**
 * Inverse of Poisson's distribution.
 *
 * @param mean Mean.
 * @param none `exp(-mean)`.
 * @param share Uniform random share; above `none` the result is at least 1.
 * @returns Number of events.
 */
function poissonAbove(mean: number, none: number, share: number): number {
  if (mean > MOST_EVENTS) return MOST_EVENTS;
  let count = 0;
  let probability = none;
  let sum = none;
  while (share > sum && count < MOST_EVENTS) {
    count++;
    probability *= mean / count;
    sum += probability;
  }
  return count;
}
