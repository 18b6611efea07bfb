/** What a point of a sweep shows. */
export interface FigurePoint {
  /** Where it is: value by path. */
  readonly settings: Readonly<Record<string, unknown>>;
  /** The quantity; null where there is none, which leaves a gap. */
  readonly value: number | null;
  /** Its standard uncertainty, in the same unit; null where it has none. */
  readonly standardUncertainty: number | null;
}

/** A direction of a sweep. */
export interface SweepFigureAxis {
  /** Path in the scenario, ending in its unit where it has one. */
  readonly path: string;
  /** `true` for a logarithmic axis. */
  readonly isLogarithmic: boolean;
}

/** What a figure of a sweep shows. */
export interface SweepFigureInput {
  /** Title. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Axes along which the points differ. */
  readonly axes: readonly SweepFigureAxis[];
  /** `true` when the points are all combinations of axis values, `false` when they are scattered. */
  readonly isGrid: boolean;
  /** Name of the quantity, ending in its unit where it has one. */
  readonly quantity: string;
  /** The points. */
  readonly points: readonly FigurePoint[];
}

type Spec = Record<string, unknown>;

const WIDTH = 520;
const HEIGHT = 320;
const DARK = "#222222";
/** Blue of M. Okabe, K. Ito, Color Universal Design (2008). */
const BLUE = "#0072B2";
/** Lightness grows steadily, so the map reads the same in gray and to color-blind people (S. van der Walt, N. Smith). */
const MAP_SCHEME = "viridis";
/** Cells along an axis, above which names of values would not be readable. */
const MOST_CELLS = 200;

const UNITS: readonly (readonly [RegExp, string])[] = [
  [/CountsPerS$/, "counts/s"],
  [/PerS$/, "1/s"],
  [/Ev$/, "eV"],
  [/Nm$/, "nm"],
  [/Mm$/, "mm"],
  [/Deg$/, "degrees"],
  [/K$/, "K"],
  [/S$/, "s"],
  [/V$/, "V"],
];

/**
 * A name of the program as the title of an axis.
 *
 * @param name Such as `sample.temperatureK`.
 * @returns Such as `sample temperature / K`.
 */
export function axisTitle(name: string): string {
  const [pattern, unit] = unitOf(name);
  const words = name.replace(pattern, "").replaceAll(".", " ").replaceAll(/([a-z])([A-Z])/g, "$1 $2")
    .toLowerCase();
  return unit === "" ? words : `${words} / ${unit}`;
}

function unitOf(name: string): readonly [RegExp, string] {
  return UNITS.find(([pattern]) => pattern.test(name)) ?? [/$/, ""];
}

/**
 * The figure of a sweep: along one axis points and a line with a band of one standard uncertainty, over two axes a heat map.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline; null when there are no points with a value, or more or fewer
 * axes than one or two, or more than 200 cells along one.
 * @example A line of two points
 * ```ts
 * import { renderSvg, sweepFigure } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const figure = sweepFigure({
 *   title: "Gold", subtitle: [], axes: [{ path: "biasV", isLogarithmic: false }], isGrid: true,
 *   quantity: "fit.workFunctionEv",
 *   points: [
 *     { settings: { biasV: -9 }, value: 5.101, standardUncertainty: 0.003 },
 *     { settings: { biasV: -5 }, value: 5.098, standardUncertainty: 0.004 },
 *   ],
 * });
 * assert.match(await renderSvg(figure!), /fit work function \/ eV/);
 * ```
 */
export function sweepFigure(input: SweepFigureInput): Record<string, unknown> | null {
  const { axes, points } = input;
  if (!points.some(({ value }) => value !== null)) return null;
  if (axes.length === 1) return frame(input, lineLayers(input));
  if (axes.length !== 2) return null;
  if (!input.isGrid) return frame(input, scatter(input));
  const cells = axes.map(({ path }) =>
    new Set(points.map(({ settings }) => JSON.stringify(settings[path]))).size
  );
  return Math.max(...cells) > MOST_CELLS ? null : frame(input, heatMap(input, cells));
}

function frame({ title, subtitle, quantity, axes, points }: SweepFigureInput, content: Spec): Spec {
  const errors = points.flatMap(({ standardUncertainty }) => standardUncertainty ?? []).toSorted((a, b) =>
    a - b
  );
  const shown = (value: number): string => value.toPrecision(2);
  const unit = unitOf(quantity)[1];
  const range = `standard uncertainty ${shown(errors[0] ?? 0)} to ${shown(errors.at(-1) ?? 0)} ${unit}`
    .trimEnd();
  const gaps = points.filter(({ value }) => value === null).length;
  const lines = [
    ...subtitle,
    ...(errors.length === 0 ? [] : [axes.length === 1 ? `${range}, shown as band` : range]),
    ...(gaps === 0 ? [] : [`${gaps} without a value, left out`]),
  ];
  return {
    $schema: "https://vega.github.io/schema/vega-lite/v6.json",
    description: [title, ...lines, axisTitle(quantity)].join("; "),
    background: "white",
    padding: 12,
    title: { text: title, subtitle: lines },
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
      axis: { grid: false, tickColor: DARK, labelColor: DARK, titleColor: DARK, titleFontWeight: "normal" },
      legend: { labelColor: DARK, titleColor: DARK, titleFontWeight: "normal", titleLimit: 0 },
    },
    ...content,
  };
}

function isNumeric({ points }: SweepFigureInput, { path }: SweepFigureAxis): boolean {
  return points.every(({ settings }) => typeof settings[path] === "number");
}

/** Data with plain field names: dots in paths would mean nested objects. */
function rows({ points, axes }: SweepFigureInput): Spec[] {
  return points.map(({ settings, value, standardUncertainty }) => {
    const [first, second] = axes.map(({ path }) => {
      const setting = settings[path];
      return typeof setting === "object" ? JSON.stringify(setting) : setting;
    });
    return {
      first,
      second,
      value,
      low: value === null ? null : value - (standardUncertainty ?? 0),
      high: value === null ? null : value + (standardUncertainty ?? 0),
    };
  });
}

function numberAxis(field: string, { path, isLogarithmic }: SweepFigureAxis): Spec {
  return {
    field,
    type: "quantitative",
    title: axisTitle(path),
    scale: isLogarithmic ? { type: "log", nice: false } : { zero: false },
    ...(isLogarithmic && { axis: { format: "~g" } }),
  };
}

function lineLayers(input: SweepFigureInput): Spec {
  const [axis] = input.axes;
  const numeric = isNumeric(input, axis);
  const x = numeric
    ? numberAxis("first", axis)
    : { field: "first", type: "nominal", title: axisTitle(axis.path), sort: null };
  const y = { type: "quantitative", title: axisTitle(input.quantity), scale: { zero: false } };
  const connected = numeric && input.isGrid;
  return {
    data: { values: rows(input) },
    width: WIDTH,
    height: HEIGHT,
    encoding: { x },
    layer: [
      {
        mark: connected ? { type: "area", color: BLUE, opacity: 0.25 } : { type: "rule", color: BLUE },
        encoding: { y: { ...y, field: "low" }, y2: { field: "high" } },
      },
      ...(connected
        ? [{ mark: { type: "line", color: BLUE }, encoding: { y: { ...y, field: "value" } } }]
        : []),
      {
        mark: { type: "point", color: DARK, filled: true, size: 30 },
        encoding: { y: { ...y, field: "value" } },
      },
    ],
  };
}

function color(quantity: string): Spec {
  return {
    field: "value",
    type: "quantitative",
    title: axisTitle(quantity),
    scale: { scheme: MAP_SCHEME, zero: false },
    legend: { tickCount: 6, gradientLength: 200 },
  };
}

function heatMap(input: SweepFigureInput, [columns, lines]: readonly number[]): Spec {
  const [across, up] = input.axes;
  const cell = (field: string, axis: SweepFigureAxis, order: "ascending" | "descending"): Spec => ({
    field,
    type: "ordinal",
    title: axisTitle(axis.path),
    sort: isNumeric(input, axis) ? order : null,
    axis: {
      labelOverlap: true,
      labelAngle: 0,
      ...(isNumeric(input, axis) && { labelExpr: "format(datum.value, '.6~g')" }),
    },
  });
  return {
    data: { values: rows(input).filter(({ value }) => value !== null) },
    width: { step: Math.min(48, WIDTH / columns) },
    height: { step: Math.min(48, HEIGHT / lines) },
    mark: "rect",
    encoding: {
      x: cell("first", across, "ascending"),
      y: cell("second", up, "descending"),
      color: color(input.quantity),
    },
  };
}

function scatter(input: SweepFigureInput): Spec {
  const [across, up] = input.axes;
  return {
    data: { values: rows(input).filter(({ value }) => value !== null) },
    width: WIDTH,
    height: HEIGHT,
    mark: { type: "point", filled: true, size: 60, opacity: 1 },
    encoding: {
      x: numberAxis("first", across),
      y: numberAxis("second", up),
      color: color(input.quantity),
    },
  };
}
