import type { EnergyGrid } from "./grid.ts";
import type { PairTables } from "./pair_tables.ts";

/** One film of a stack, or the substrate. */
export interface Layer {
  /** Scattering in it; all layers share one grid. */
  readonly tables: PairTables;
  /** Thickness, nm, > 0; Infinity for the last layer. */
  readonly thicknessNm: number;
}

/**
 * Layers from the surface down, with their tables joined into one array each: entry `layer * count + bin`.
 *
 * Depth is measured in mean free paths where electrons fly, because a straight flight through several layers is then
 * as simple as through one, and in nanometers where they change energy.
 */
export interface LayerStack {
  /** Energies. */
  readonly grid: EnergyGrid;
  /** Number of layers. */
  readonly layers: number;
  /** Depth of each layer's upper face, nm, shape (layers). */
  readonly topsNm: Float64Array;
  /** Mean free path for any event, nm, shape (layers x count). */
  readonly pathNm: Float64Array;
  /** Its inverse, 0 where there are no events, shape (layers x count). */
  readonly pathsPerNm: Float64Array;
  /** Depth of each layer's upper face in mean free paths, shape (layers x count). */
  readonly topPaths: Float64Array;
  /** Probability that an event is inelastic, shape (layers x count). */
  readonly inelasticShare: Float64Array;
  /** Alias rows of all layers, see {@link PairTables}. */
  readonly lossTable: Uint32Array;
  /** First word of a bin's row, shape (layers x count). */
  readonly lossOffset: Int32Array;
  /** Outcomes of a bin's row, shape (layers x count). */
  readonly lossCount: Int32Array;
  /** Energy transfers of one layer. */
  readonly transfers: number;
  /** Alias rows of the struck electrons of all layers. */
  readonly struckTable: Uint32Array;
  /** First word of a transfer's row, shape (layers x transfers). */
  readonly struckOffset: Int32Array;
  /** Outcomes of a transfer's row, shape (layers x transfers). */
  readonly struckCount: Int32Array;
}

/**
 * Joins layers into a stack.
 *
 * @param layers From the surface down; the last one must be infinitely thick.
 * @returns The stack.
 * @throws {RangeError} If there is none, a thickness is not > 0, or the last is not infinite.
 */
export function layerStack(layers: readonly Layer[]): LayerStack {
  const thicknesses = layers.map((layer) => layer.thicknessNm);
  if (layers.length === 0 || !thicknesses.every((t) => t > 0) || thicknesses.at(-1) !== Infinity) {
    throw new RangeError(
      `Cannot stack layers as thicknesses must be > 0 nm and the last one Infinity: current value is ${
        thicknesses.join(", ")
      } nm`,
    );
  }
  const { grid } = layers[0].tables;
  const { count } = grid;
  const topsNm = new Float64Array(layers.length);
  const topPaths = new Float64Array(layers.length * count);
  const pathNm = join(layers.map(({ tables }) => tables.totalMeanFreePathNm));
  for (let layer = 1; layer < layers.length; layer++) {
    const above = thicknesses[layer - 1];
    topsNm[layer] = topsNm[layer - 1] + above;
    for (let bin = 0; bin < count; bin++) {
      const previous = (layer - 1) * count + bin;
      topPaths[layer * count + bin] = topPaths[previous] + above / pathNm[previous];
    }
  }
  const losses = rows(layers.map(({ tables }) => [tables.lossTable, tables.lossOffset]));
  const struck = rows(layers.map(({ tables }) => [tables.struckTable, tables.struckOffset]));
  return {
    grid,
    layers: layers.length,
    topsNm,
    pathNm,
    pathsPerNm: pathNm.map((length) => 1 / length),
    topPaths,
    inelasticShare: join(layers.map(({ tables }) => tables.inelasticShare)),
    lossTable: losses.table,
    lossOffset: losses.offset,
    lossCount: Int32Array.from(layers.flatMap(({ tables }) => [...tables.lossCount])),
    transfers: layers[0].tables.struckCount.length,
    struckTable: struck.table,
    struckOffset: struck.offset,
    struckCount: Int32Array.from(layers.flatMap(({ tables }) => [...tables.struckCount])),
  };
}

function join(parts: readonly Float64Array[]): Float64Array {
  const joined = new Float64Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    joined.set(part, at);
    at += part.length;
  }
  return joined;
}

/** Alias tables end to end, with the offsets moved along. */
function rows(
  parts: readonly (readonly [Uint32Array, Int32Array])[],
): { table: Uint32Array; offset: Int32Array } {
  const table = new Uint32Array(parts.reduce((sum, [words]) => sum + words.length, 0));
  const offset = new Int32Array(parts.reduce((sum, [, offsets]) => sum + offsets.length, 0));
  let word = 0;
  let row = 0;
  for (const [words, offsets] of parts) {
    table.set(words, word);
    offset.set(offsets.map((value) => value + word), row);
    word += words.length;
    row += offsets.length;
  }
  return { table, offset };
}
