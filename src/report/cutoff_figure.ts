import { cannot, type Estimate } from "../base/mod.ts";
import { DARK, demandFinite, frame, LINE_STYLES, type Spec, WIDTH } from "./look.ts";
import type { FigureCurve } from "./spectrum_figure.ts";

/** The cutoff as one convention reads it. */
export interface FigureConvention {
  /** Which, such as `half height`. */
  readonly name: string;
  /** As the convention gives it, eV. */
  readonly uncorrectedEv: Estimate;
  /** Less what resolution and acceptance add to it, eV. */
  readonly correctedEv: Estimate;
}

/** What a close-up of the cutoff shows. */
export interface CutoffFigureInput {
  /** Title; wrapped when long. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Title of the energy axis with its unit. */
  readonly axisTitle: string;
  /** Measured counts around the cutoff. */
  readonly measured: FigureCurve;
  /** At least one convention. */
  readonly conventions: readonly FigureConvention[];
}

const ACTION = "draw a cutoff";
const COUNTS_HEIGHT = 200;
const ROW_HEIGHT = 34;
const KEY = "○ as given, ■ less the shifts by resolution and acceptance; bars: standard uncertainty";
/** Channels that are shown on either side of the conventions, at least. */
const CHANNELS_BESIDE = 10;

/**
 * The close-up of a secondary cutoff with every convention that reads a position off it.
 *
 * Above, the counts with the positions as the conventions give them. Below, on the same axis, a row for each: a circle for
 * the position as given, a filled square for the position less what resolution and acceptance add, bars of one standard
 * uncertainty.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If there is no convention, no channel beside them, lengths differ or a number is not finite.
 * @example Two conventions
 * ```ts
 * import { cutoffFigure, renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const at = (value: number) => ({ value, standardUncertainty: 0.002 });
 * const svg = await renderSvg(cutoffFigure({
 *   title: "Gold", subtitle: [], axisTitle: "Kinetic energy / eV",
 *   measured: { energiesEv: [9.66, 9.68, 9.7, 9.72, 9.74], counts: [2, 40, 300, 560, 610] },
 *   conventions: [
 *     { name: "model", uncorrectedEv: at(9.7), correctedEv: at(9.7) },
 *     { name: "half height", uncorrectedEv: at(9.702), correctedEv: at(9.699) },
 *   ],
 * }));
 * assert.match(svg, /half height/);
 * ```
 */
export function cutoffFigure(input: CutoffFigureInput): Record<string, unknown> {
  const { measured, conventions, axisTitle } = input;
  if (conventions.length === 0) throw new RangeError(cannot(ACTION, "there must be a convention", 0));
  if (measured.energiesEv.length !== measured.counts.length) {
    throw new RangeError(
      cannot(
        ACTION,
        "there must be as many counts as energies",
        `${measured.energiesEv.length} energies, ${measured.counts.length} counts`,
      ),
    );
  }
  const readings = conventions.flatMap(({ name, uncorrectedEv, correctedEv }) => [
    reading(name, "as given", uncorrectedEv),
    reading(name, "corrected", correctedEv),
  ]);
  for (const { low, high } of readings) {
    demandFinite(ACTION, "every position and standard uncertainty", low + high);
  }
  const all = Array.from(measured.energiesEv, (energyEv, i) => ({ energyEv, counts: measured.counts[i] }));
  for (const { energyEv, counts } of all) demandFinite(ACTION, "energies and counts", energyEv + counts);
  const lowest = Math.min(...readings.map(({ low }) => low));
  const highest = Math.max(...readings.map(({ high }) => high));
  const stepEv = all.length > 1 ? Math.abs(all[1].energyEv - all[0].energyEv) : 0;
  const margin = Math.max(0.5 * (highest - lowest), CHANNELS_BESIDE * stepEv);
  const domain = [lowest - margin, highest + margin];
  const values = all.filter(({ energyEv }) => energyEv >= domain[0] && energyEv <= domain[1]).map((
    point,
  ) => ({
    ...point,
    low: point.counts - Math.sqrt(Math.max(0, point.counts)),
    high: point.counts + Math.sqrt(Math.max(0, point.counts)),
  }));
  if (values.length === 0) {
    throw new RangeError(cannot(ACTION, `there must be counts in ${domain.join("..")} eV`, "none"));
  }
  const x = { field: "energyEv", type: "quantitative", scale: { domain, nice: false } };
  const names = conventions.map(({ name }) => name);
  const style = {
    color: {
      field: "name",
      type: "nominal",
      scale: { domain: names, range: names.map((_, i) => LINE_STYLES[i % LINE_STYLES.length].color) },
      legend: null,
    },
    strokeDash: {
      field: "name",
      type: "nominal",
      scale: { domain: names, range: names.map((_, i) => LINE_STYLES[i % LINE_STYLES.length].dash) },
      legend: null,
    },
  };
  const counts = { field: "counts", type: "quantitative", axis: { title: "Counts", tickCount: 5 } };
  const given = readings.filter(({ kind }) => kind === "as given");
  const row = {
    field: "name",
    type: "nominal",
    scale: { domain: names },
    axis: { title: null, ticks: false, labelLimit: 0, minExtent: 48, maxExtent: 200 },
  };
  return frame(input.title, [...input.subtitle, KEY], {
    bounds: "flush",
    spacing: 12,
    vconcat: [
      {
        width: WIDTH,
        height: COUNTS_HEIGHT,
        encoding: { x: { ...x, axis: { labels: false, title: null } } },
        layer: [
          {
            data: { values: given },
            mark: { type: "rule", strokeWidth: 1.6 },
            encoding: { x, ...style },
          },
          {
            data: { values },
            mark: { type: "rule", color: DARK, strokeWidth: 0.7 },
            encoding: { y: { ...counts, field: "low" }, y2: { field: "high" } },
          },
          {
            data: { values },
            mark: { type: "point", filled: true, size: 12, opacity: 1, color: DARK },
            encoding: { y: counts },
          },
        ],
      },
      {
        width: WIDTH,
        height: ROW_HEIGHT * conventions.length,
        encoding: { y: row },
        layer: [
          {
            data: { values: readings },
            mark: { type: "rule", strokeWidth: 1.6 },
            encoding: {
              x: { ...x, field: "low", axis: { title: axisTitle } },
              x2: { field: "high" },
              yOffset: offset(),
              color: style.color,
            },
          },
          {
            data: { values: readings },
            mark: { type: "point", opacity: 1, size: 45, strokeWidth: 1.4 },
            encoding: {
              x: { ...x, axis: { title: axisTitle } },
              yOffset: offset(),
              color: style.color,
              shape: {
                field: "kind",
                type: "nominal",
                scale: { domain: ["as given", "corrected"], range: ["circle", "square"] },
                legend: null,
              },
              fill: {
                condition: { test: "datum.kind === 'corrected'", value: DARK },
                value: "white",
              },
            },
          },
        ],
      },
    ],
  });
}

function offset(): Spec {
  return { field: "kind", type: "nominal", scale: { domain: ["as given", "corrected"], paddingOuter: 0.6 } };
}

function reading(name: string, kind: string, { value, standardUncertainty }: Estimate) {
  return {
    name,
    kind,
    energyEv: value,
    low: value - standardUncertainty,
    high: value + standardUncertainty,
  };
}
