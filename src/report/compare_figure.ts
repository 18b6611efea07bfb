import { cannot } from "../base/mod.ts";

/** One region of a comparison, shape (n) each. */
export interface CompareFigureRegion {
  /** Label; may be empty. */
  readonly label: string;
  /** Energies, eV, ascending. */
  readonly energiesEv: ArrayLike<number>;
  /** Measured counts, >= 0. */
  readonly counts: ArrayLike<number>;
  /** Expected counts of the model. */
  readonly expected: ArrayLike<number>;
  /** Standard errors of the expectation from the finite number of histories. */
  readonly standardErrors: ArrayLike<number>;
}

/** What a figure of a comparison shows. */
export interface CompareFigureInput {
  /** Title. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** At least one. */
  readonly regions: readonly CompareFigureRegion[];
  /** Single changes with how much the deviance drops, the largest first; none draws no panel. */
  readonly suspects: readonly { readonly name: string; readonly drop: number; readonly isNamed: boolean }[];
}

const DARK = "#222222";
const MEASURED = "#8c8c8c";
/** Blue and vermillion of M. Okabe, K. Ito, Color Universal Design (2008). */
const MODEL = "#0072B2";
const NAMED = "#D55E00";
const WIDTH = 640;
const LEAST_VARIANCE = 0.05;

type Spec = Record<string, unknown>;

/**
 * The figure of a comparison: measured counts and model on a square-root scale, residuals in standard deviations (noise of
 * the simulation included), and a bar for each single change of the scenario.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If there is no region, lengths differ or a number is not finite.
 * @example Three channels
 * ```ts
 * import { compareFigure, renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const svg = await renderSvg(compareFigure({
 *   title: "Gold", subtitle: [], suspects: [],
 *   regions: [{
 *     label: "", energiesEv: [9.6, 9.7, 9.8], counts: [3, 52, 98], expected: [2, 50, 100], standardErrors: [0, 1, 1],
 *   }],
 * }));
 * assert.match(svg, /Residual/);
 * ```
 */
export function compareFigure(input: CompareFigureInput): Record<string, unknown> {
  const { title, subtitle, regions, suspects } = input;
  regions.forEach(check);
  if (regions.length === 0) throw new RangeError(cannot("draw a comparison", "there must be a region", 0));
  const values = regions.flatMap(({ energiesEv, counts, expected, standardErrors }, region) =>
    Array.from(energiesEv, (energyEv, i) => {
      const sigma = Math.sqrt(Math.max(LEAST_VARIANCE, expected[i]) + standardErrors[i] ** 2);
      return {
        energyEv,
        region,
        counts: counts[i],
        model: Math.max(0, expected[i]),
        residual: (counts[i] - expected[i]) / sigma,
      };
    })
  );
  const energies = values.map(({ energyEv }) => energyEv);
  const x = {
    field: "energyEv",
    type: "quantitative",
    scale: { domain: [Math.min(...energies), Math.max(...energies)], nice: false },
    axis: { title: "Kinetic energy as recorded / eV" },
  };
  const y = (field: string): Spec => ({
    field,
    type: "quantitative",
    scale: { type: "sqrt", nice: false },
    axis: { title: "Counts (square-root scale)", tickCount: 6 },
  });
  const entry = (label: string): Spec => ({
    datum: label,
    type: "nominal",
    scale: { domain: ["measured", "model"], range: [MEASURED, MODEL] },
    legend: { title: null },
  });
  const limit = Math.ceil(Math.max(4, ...values.map(({ residual }) => Math.abs(residual))) + 0.2);
  const residualY = {
    field: "residual",
    type: "quantitative",
    scale: { domain: [-limit, limit], nice: false },
    axis: { title: "Residual / \u03c3", tickCount: 5 },
  };
  const rule = (heights: number[], dash: number[]): Spec => ({
    data: { values: heights.map((residual) => ({ residual })) },
    mark: { type: "rule", color: DARK, strokeWidth: 0.6, strokeDash: dash },
    encoding: { y: residualY },
  });
  const panels: Spec[] = [
    {
      title: { text: title, subtitle: [...subtitle] },
      width: WIDTH,
      height: 240,
      layer: [
        {
          mark: { type: "point", filled: true, size: 9, opacity: 1 },
          encoding: { x, y: y("counts"), color: entry("measured") },
        },
        {
          mark: { type: "line", strokeWidth: 1.4 },
          encoding: { x, y: y("model"), detail: { field: "region", type: "nominal" }, color: entry("model") },
        },
      ],
    },
    {
      width: WIDTH,
      height: 100,
      layer: [
        rule([0], [1, 0]),
        rule([-2, 2], [3, 3]),
        {
          mark: { type: "point", filled: true, size: 7, opacity: 1, color: DARK },
          encoding: { x, y: residualY },
        },
      ],
    },
  ];
  if (suspects.length > 0) {
    panels.push({
      title: { text: "How much each single change explains", fontSize: 11.5 },
      width: WIDTH - 220,
      data: { values: suspects.map(({ name, drop, isNamed }) => ({ name, drop, isNamed })) },
      mark: { type: "bar", height: { band: 0.7 } },
      encoding: {
        y: { field: "name", type: "nominal", sort: null, axis: { title: null, labelLimit: 0 } },
        x: {
          field: "drop",
          type: "quantitative",
          scale: { type: "sqrt" },
          axis: { title: "Drop of the deviance (square-root scale)", tickCount: 6 },
        },
        color: {
          field: "isNamed",
          type: "nominal",
          scale: { domain: [true, false], range: [NAMED, MEASURED] },
          legend: null,
        },
      },
    });
  }
  return {
    $schema: "https://vega.github.io/schema/vega-lite/v6.json",
    description: [title, ...subtitle].join("; "),
    background: "white",
    padding: 12,
    spacing: 30,
    data: { values },
    vconcat: panels,
    resolve: { scale: { color: "independent" } },
    config: {
      aria: false,
      font: "DejaVu Sans, sans-serif",
      view: { stroke: DARK },
      title: {
        anchor: "start",
        color: DARK,
        fontSize: 13,
        subtitleColor: DARK,
        subtitleFontSize: 11,
        offset: 8,
      },
      axis: {
        grid: false,
        domain: false,
        tickColor: DARK,
        labelColor: DARK,
        titleColor: DARK,
        titleFontWeight: "normal",
      },
      legend: { orient: "top", labelColor: DARK, labelLimit: 0 },
    },
  };
}

function check({ energiesEv, ...curves }: CompareFigureRegion): void {
  for (const name of ["counts", "expected", "standardErrors"] as const) {
    const values = curves[name];
    if (values.length !== energiesEv.length || values.length === 0) {
      const rule = `there must be as many ${name} as energies, and at least one`;
      throw new RangeError(cannot("draw a comparison", rule, `${values.length}, ${energiesEv.length}`));
    }
    const wrong = Array.from(values).find((value) => !Number.isFinite(value));
    if (wrong !== undefined) {
      throw new RangeError(cannot("draw a comparison", `${name} must be finite`, wrong));
    }
  }
}
