import { cannot } from "../base/mod.ts";

/** One set of points or one curve of a figure. */
export interface FigureSeries {
  /** What the legend says. */
  readonly label: string;
  /** Abscissas, shape (n), n >= 1. */
  readonly x: ArrayLike<number>;
  /** Ordinates, shape (n). */
  readonly y: ArrayLike<number>;
  /** Standard uncertainties of the ordinates, drawn as bars, shape (n); null draws none. */
  readonly yUncertainties: ArrayLike<number> | null;
  /** Dots for measured values, a line for fitted ones. */
  readonly mark: "points" | "line";
}

/** What a figure of measured points and fitted lines shows. */
export interface SeriesFigureInput {
  /** Title. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Title of the horizontal axis with its unit. */
  readonly xTitle: string;
  /** Title of the vertical axis with its unit. */
  readonly yTitle: string;
  /** `true` draws the horizontal axis falling from left to right, as binding energies are shown. */
  readonly isReversed: boolean;
  /** At least one. */
  readonly series: readonly FigureSeries[];
}

const DARK = "#222222";
/** M. Okabe, K. Ito, Color Universal Design (2008); dashes keep lines apart in gray print. */
const STYLES = [
  { color: "#4d4d4d", dash: [1, 0] },
  { color: "#0072B2", dash: [1, 0] },
  { color: "#D55E00", dash: [7, 3] },
  { color: "#009E73", dash: [3, 2] },
  { color: "#CC79A7", dash: [10, 3, 2, 3] },
  { color: "#56B4E9", dash: [2, 2] },
] as const;

/**
 * The figure of measured points with standard uncertainties and the curves fitted to them.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If there is nothing to show, lengths differ or a number is not finite.
 * @example Two points and a line
 * ```ts
 * import { renderSvg, seriesFigure } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const svg = await renderSvg(seriesFigure({
 *   title: "Line", subtitle: [], xTitle: "Bias / V", yTitle: "Work function / eV", isReversed: false,
 *   series: [{ label: "measured", x: [-9, -6], y: [5.1, 5.2], yUncertainties: [0.1, 0.1], mark: "points" }],
 * }));
 * assert.match(svg, /Work function \/ eV/);
 * ```
 */
export function seriesFigure(input: SeriesFigureInput): Record<string, unknown> {
  const { title, subtitle, xTitle, yTitle, isReversed, series } = input;
  check(series);
  const x = {
    field: "x",
    type: "quantitative",
    scale: { zero: false, nice: false, padding: 12, reverse: isReversed },
    axis: { title: xTitle },
  };
  const highest = series.reduce(
    (most, { y }) => Array.from(y).reduce((a, b) => Math.max(a, Math.abs(b)), most),
    0,
  );
  // Small currents and yields as powers of ten, without rows of zeros.
  const small = highest < 1e-3 ? { labelExpr: "datum.value === 0 ? '0' : format(datum.value, '~e')" } : {};
  const y = {
    field: "y",
    type: "quantitative",
    scale: { zero: false, nice: false, padding: 12 },
    axis: { title: yTitle, ...small },
  };
  const layer = series.flatMap(({ label, yUncertainties, mark, ...curve }, i) => {
    const { color, dash } = STYLES[i % STYLES.length];
    const values = Array.from(curve.x, (value, k) => {
      const height = curve.y[k];
      const bar = yUncertainties?.[k] ?? 0;
      return { x: value, y: height, low: height - bar, high: height + bar, label };
    });
    const symbol = mark === "points"
      ? { type: "point", filled: true, size: 24, opacity: 1 }
      : { type: "line", strokeWidth: 1.8, strokeDash: dash };
    const entry = {
      datum: label,
      type: "nominal",
      scale: {
        domain: series.map((one) => one.label),
        range: series.map((_, k) => STYLES[k % STYLES.length].color),
      },
      legend: { title: null },
    };
    const bars = {
      mark: { type: "rule", color },
      encoding: { x, y: { ...y, field: "low" }, y2: { field: "high" } },
    };
    return [{
      data: { values },
      layer: [...(yUncertainties === null ? [] : [bars]), { mark: symbol, encoding: { x, y, color: entry } }],
    }];
  });
  return {
    $schema: "https://vega.github.io/schema/vega-lite/v6.json",
    description: [title, ...subtitle].join("; "),
    background: "white",
    padding: 12,
    title: { text: title, subtitle: [...subtitle], anchor: "start" },
    width: 560,
    height: 320,
    layer,
    config: {
      aria: false,
      font: "DejaVu Sans, sans-serif",
      view: { stroke: DARK },
      title: { color: DARK, fontSize: 13, subtitleColor: DARK, subtitleFontSize: 11, offset: 8 },
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

function check(series: readonly FigureSeries[]): void {
  const fail = (rule: string, value: unknown) => new RangeError(cannot("draw a series", rule, value));
  if (series.length === 0) throw fail("there must be at least one curve", 0);
  for (const { label, x, y, yUncertainties } of series) {
    if (
      x.length === 0 || y.length !== x.length ||
      (yUncertainties !== null && yUncertainties.length !== x.length)
    ) {
      throw fail(
        `${label} must have as many ordinates and uncertainties as abscissas`,
        `${x.length}, ${y.length}`,
      );
    }
    for (const values of [x, y, yUncertainties ?? []]) {
      const wrong = Array.from(values).find((value) => !Number.isFinite(value));
      if (wrong !== undefined) throw fail(`the numbers of ${label} must be finite`, wrong);
    }
  }
}
