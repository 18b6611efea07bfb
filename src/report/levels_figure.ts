import type { Estimate } from "../base/mod.ts";
import { DARK, demandFinite, EDGE_STYLES, frame, type Spec, WIDTH } from "./look.ts";
import { formatEstimate } from "./values.ts";

/** The numbers of an energy-level diagram. */
export interface LevelsFigureInput {
  /** Title; wrapped when long. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Photon energy, eV, > 0. */
  readonly photonEnergyEv: number;
  /** Work function of the sample, eV; exact where its standard uncertainty is 0. */
  readonly workFunctionEv: Estimate;
  /** Maximum kinetic energy outside the sample, eV. */
  readonly maxKineticEnergyEv: Estimate;
  /** Valence-band maximum below the Fermi level, eV; null for a metal. */
  readonly valenceBandMaximumEv: Estimate | null;
  /** Positions on the axis of the spectrum, eV; null where there is no spectrum. */
  readonly recorded: { readonly cutoffEv: number; readonly fermiLevelEv: number } | null;
  /** Sample bias, V, negative accelerates; null when not known. */
  readonly biasV: number | null;
  /** Work function of the analyzer, eV; null when not known. */
  readonly analyzerWorkFunctionEv: number | null;
}

interface Level {
  readonly energyEv: number;
  readonly label: string;
  /** `false` for a label without a line. */
  readonly isLine: boolean;
}

interface Arrow {
  readonly x: number;
  readonly fromEv: number;
  readonly toEv: number;
  readonly symbol: string;
  readonly style: 0 | 1;
}

const HEIGHT = 400;
/** Heights of two labels that can both be read, pixels. */
const LABEL_GAP = 15;
/** Horizontal places on a scale of 0..10. */
const SAMPLE = { from: 0.2, to: 2.5, label: 2.75 } as const;
const ANALYZER = { from: 5.7, to: 7.2, label: 7.45 } as const;

/**
 * The energy-level diagram of sample and analyzer, drawn to scale.
 *
 * Zero is the Fermi level of the sample. Sample and analyzer share their Fermi levels but for the bias U: that of the
 * analyzer lies at eU, its vacuum level at `eU + W_A`, and what it records counts from there. The zero of the energy axis
 * of the spectrum is drawn where the recorded Fermi level puts it, so an axis that is not what it is taken for shows.
 *
 * @param input The numbers; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If a number is not finite.
 * @example Gold under a helium lamp
 * ```ts
 * import { levelsFigure, renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const svg = await renderSvg(levelsFigure({
 *   title: "Gold", subtitle: [], photonEnergyEv: 21.218,
 *   workFunctionEv: { value: 5.1, standardUncertainty: 0.01 },
 *   maxKineticEnergyEv: { value: 16.118, standardUncertainty: 0.01 },
 *   valenceBandMaximumEv: null, recorded: { cutoffEv: 9.7, fermiLevelEv: 25.818 }, biasV: -9, analyzerWorkFunctionEv: 4.4,
 * }));
 * assert.match(svg, /vacuum level: W = 5\.100\(10\) eV/);
 * ```
 */
export function levelsFigure(input: LevelsFigureInput): Record<string, unknown> {
  const { photonEnergyEv, workFunctionEv, maxKineticEnergyEv, valenceBandMaximumEv, recorded, biasV } = input;
  const { analyzerWorkFunctionEv } = input;
  const vacuumEv = workFunctionEv.value;
  const sample: Level[] = [
    level(photonEnergyEv, `photon energy: hν = ${short(photonEnergyEv)} eV`),
    {
      energyEv: (photonEnergyEv + vacuumEv) / 2,
      label: `max. kinetic energy ${formatEstimate(maxKineticEnergyEv, "eV")}`,
      isLine: false,
    },
    level(vacuumEv, `vacuum level: W = ${formatEstimate(workFunctionEv, "eV")}`),
    level(0, "Fermi level of the sample"),
    ...(valenceBandMaximumEv === null ? [] : [
      level(
        -valenceBandMaximumEv.value,
        `valence band: ${
          formatEstimate({ ...valenceBandMaximumEv, value: -valenceBandMaximumEv.value }, "eV")
        }`,
      ),
    ]),
  ];
  const analyzer: Level[] = [
    ...(recorded === null ? [] : [
      level(photonEnergyEv, `Fermi level at ${recorded.fermiLevelEv.toFixed(3)} eV`),
      level(
        photonEnergyEv - recorded.fermiLevelEv + recorded.cutoffEv,
        `cutoff at ${recorded.cutoffEv.toFixed(3)} eV`,
      ),
      level(photonEnergyEv - recorded.fermiLevelEv, "zero of the energy axis"),
    ]),
    ...(biasV === null || analyzerWorkFunctionEv === null
      ? []
      : [level(biasV + analyzerWorkFunctionEv, `vacuum level: W_A = ${short(analyzerWorkFunctionEv)} eV`)]),
    ...(biasV === null ? [] : [level(biasV, `Fermi level: eU = ${short(biasV)} eV`)]),
  ];
  const arrows: Arrow[] = [
    { x: 0.7, fromEv: 0, toEv: photonEnergyEv, symbol: "hν", style: 0 },
    { x: 1.8, fromEv: vacuumEv, toEv: photonEnergyEv, symbol: "KE", style: 1 },
    { x: 1.8, fromEv: 0, toEv: vacuumEv, symbol: "W", style: 0 },
    ...(recorded === null ? [] : [
      {
        x: 6.1,
        fromEv: photonEnergyEv - recorded.fermiLevelEv,
        toEv: photonEnergyEv,
        symbol: "",
        style: 1,
      } as const,
      {
        x: 6.8,
        fromEv: photonEnergyEv - recorded.fermiLevelEv,
        toEv: photonEnergyEv - recorded.fermiLevelEv + recorded.cutoffEv,
        symbol: "",
        style: 0,
      } as const,
    ]),
  ];
  const energiesEv = [...sample, ...analyzer].map(({ energyEv }) => energyEv);
  for (const energyEv of energiesEv) demandFinite("draw levels", "every energy", energyEv);
  const lowest = Math.min(...energiesEv);
  const highest = Math.max(...energiesEv);
  const margin = 0.06 * (highest - lowest);
  const domain: [number, number] = [lowest - margin, highest + margin];
  const columns = [{ name: "sample", place: SAMPLE, levels: sample }, {
    name: "analyzer",
    place: ANALYZER,
    levels: analyzer,
  }].filter(({ levels }) => levels.length > 0);
  const y = {
    field: "energyEv",
    type: "quantitative",
    scale: { domain, nice: false, zero: false },
    axis: { title: "Energy from the Fermi level of the sample / eV" },
  };
  return frame(input.title, input.subtitle, {
    width: WIDTH,
    height: HEIGHT,
    layer: [
      ...columns.flatMap(({ name, place, levels }) => columnLayers(name, place, levels, domain, y)),
      ...arrows.flatMap((arrow) => arrowLayers(arrow, y, 0.04 * (highest - lowest))),
    ],
  });
}

function level(energyEv: number, label: string): Level {
  return { energyEv, label, isLine: true };
}

/** At most three decimals, with the sign of print. */
function short(value: number): string {
  return String(Number(value.toFixed(3))).replace("-", "\u2212");
}

function across(field: string): Spec {
  return { field, type: "quantitative", scale: { domain: [0, 10], nice: false }, axis: null };
}

function rules(values: readonly Spec[], y: Spec, mark: Spec): Spec {
  return {
    data: { values },
    mark: { type: "rule", color: DARK, ...mark },
    encoding: { x: across("from"), x2: { field: "to" }, y },
  };
}

function columnLayers(
  name: string,
  place: { readonly from: number; readonly to: number; readonly label: number },
  levels: readonly Level[],
  domain: [number, number],
  y: Spec,
): Spec[] {
  const labels = spread(levels, domain);
  return [
    rules(
      levels.filter(({ isLine }) => isLine).map(({ energyEv }) => ({
        energyEv,
        from: place.from,
        to: place.to,
      })),
      y,
      { strokeWidth: 2 },
    ),
    {
      // From the level to its label, where that had to move.
      data: {
        values: levels.flatMap(({ energyEv, isLine }, i) =>
          isLine ? [{ energyEv, labelEv: labels[i], from: place.to, to: place.label - 0.05 }] : []
        ),
      },
      mark: { type: "rule", color: DARK, strokeWidth: 0.6 },
      encoding: { x: across("from"), x2: { field: "to" }, y, y2: { field: "labelEv" } },
    },
    {
      data: { values: levels.map(({ label }, i) => ({ energyEv: labels[i], label, from: place.label })) },
      mark: { type: "text", align: "left", baseline: "middle", color: DARK, fontSize: 11 },
      encoding: { x: across("from"), y, text: { field: "label" } },
    },
    {
      data: { values: [{ name, from: (place.from + place.to) / 2 }] },
      mark: { type: "text", baseline: "bottom", color: DARK, fontSize: 11.5, fontWeight: "bold" },
      encoding: { x: across("from"), y: { value: HEIGHT + 16 }, text: { field: "name" } },
    },
  ];
}

/** An arrow, with its symbol where it is long enough. */
function arrowLayers({ x, fromEv, toEv, symbol, style }: Arrow, y: Spec, leastEv: number): Spec[] {
  const { color } = EDGE_STYLES[style];
  const isUp = toEv >= fromEv;
  return [
    {
      data: { values: [{ energyEv: fromEv, toEv, from: x }] },
      mark: { type: "rule", color, strokeWidth: 1.6 },
      encoding: { x: across("from"), y, y2: { field: "toEv" } },
    },
    {
      data: { values: [{ energyEv: toEv, from: x }] },
      mark: {
        type: "point",
        filled: true,
        opacity: 1,
        size: 55,
        color,
        shape: isUp ? "triangle-up" : "triangle-down",
        yOffset: isUp ? 4 : -4,
      },
      encoding: { x: across("from"), y },
    },
    ...(symbol === "" || Math.abs(toEv - fromEv) < leastEv ? [] : [{
      data: { values: [{ energyEv: (fromEv + toEv) / 2, from: x, symbol }] },
      mark: { type: "text", align: "left", dx: 5, baseline: "middle", color: DARK, fontSize: 11.5 },
      encoding: { x: across("from"), y, text: { field: "symbol" } },
    }]),
  ];
}

/** Energies at which the labels stand: pushed up from the lowest so that no two overlap, then back into the frame. */
function spread(levels: readonly Level[], [low, high]: [number, number]): number[] {
  const gap = (LABEL_GAP / HEIGHT) * (high - low);
  const order = levels.map((_, i) => i).toSorted((a, b) => levels[a].energyEv - levels[b].energyEv);
  const places = levels.map(({ energyEv }) => energyEv);
  let free = -Infinity;
  for (const i of order) {
    places[i] = Math.max(places[i], free);
    free = places[i] + gap;
  }
  let ceiling = high - gap / 2;
  for (const i of order.toReversed()) {
    places[i] = Math.min(places[i], ceiling);
    ceiling = places[i] - gap;
  }
  return places;
}
