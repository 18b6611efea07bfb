import { cannot } from "../base/mod.ts";
import { CONFIG, DARK, EDGE_STYLES, type Spec, WIDTH, wrap } from "./look.ts";
import { formatEstimate } from "./values.ts";

/** Points of a curve. */
export interface FigureCurve {
  /** Energies on the axis of the figure, eV, shape (n), n >= 1. */
  readonly energiesEv: ArrayLike<number>;
  /** Counts, measured or expected, shape (n). */
  readonly counts: ArrayLike<number>;
}

/** A fitted edge. */
export interface FigureEdge {
  /** What it is, such as `secondary cutoff`, `Fermi edge` or `valence-band edge`. */
  readonly name: string;
  /** Fitted position, eV. */
  readonly positionEv: number;
  /** Standard uncertainty of the position, eV, >= 0. */
  readonly standardUncertaintyEv: number;
  /** Measured counts in the fit window. */
  readonly data: FigureCurve;
  /** Fitted counts at the same energies. */
  readonly fitted: FigureCurve;
}

/** What a figure of a spectrum shows. */
export interface SpectrumFigureInput {
  /** Title; wrapped when long. */
  readonly title: string;
  /** Lines under the title; wrapped when long. */
  readonly subtitle: readonly string[];
  /** Title of the energy axes with the unit, such as `Kinetic energy as recorded / eV`. */
  readonly axisTitle: string;
  /** Measured or simulated counts, one curve a region; an empty label reads `measured`. */
  readonly measured: readonly { readonly label: string; readonly curve: FigureCurve }[];
  /** Expected counts with their standard errors, or `null`. */
  readonly expected: (FigureCurve & { readonly standardErrors: ArrayLike<number> }) | null;
  /** Fitted edges, each with a close-up. */
  readonly edges: readonly FigureEdge[];
}

type Expected = NonNullable<SpectrumFigureInput["expected"]>;

interface EnergyAxis extends Spec {
  readonly axis: Spec;
}

interface Point {
  readonly energyEv: number;
  readonly counts: number;
}

interface Residuals {
  readonly points: readonly { readonly energyEv: number; readonly residual: number }[];
  readonly withoutModel: number;
}

const ACTION = "draw a spectrum";
const OVERVIEW_HEIGHT = 220;
const CLOSE_UP_HEIGHT = 170;
const RESIDUAL_HEIGHT = 80;
/** Between the panels: room for an axis, and above close-ups for their titles. */
const ROW_GAP = { plain: 56, titled: 84 } as const;
const CLOSE_UP_GAP = { row: 10, column: 90 } as const;
const CLOSE_UP_WIDTH = (WIDTH - CLOSE_UP_GAP.column) / 2;
/** Height of one line of edge labels in the overview. */
const LABEL_LINE = 16;
/** Above this number the dots of a curve merge, and it is drawn as a line of steps. */
const MOST_DOTS = 1500;
/** Letters that fit into a line of the title and of a subtitle. */
const LINE_LETTERS = { title: 60, subtitle: 72 } as const;

/** Measured curves: gray levels that differ in print too. */
const MEASURED_GRAYS = ["#8c8c8c", "#4d4d4d"] as const;

/** A dot in the middle of a symbol as large as those of the lines: legends of unequal height do not stand in line. */
const SMALL_DOT = "M-0.4,0A0.4,0.4,0,1,1,0.4,0A0.4,0.4,0,1,1,-0.4,0";

/**
 * The figure of a photoemission spectrum: an overview on a square-root scale, and a close-up with residuals of each edge.
 *
 * On a square-root scale counting noise is equally high everywhere (M. S. Bartlett, J. R. Stat. Soc. Suppl. 3, 68
 * (1936)), and a Fermi edge shows beside a cutoff a hundred times higher. Without edges, and with expected counts, the
 * residuals of the whole spectrum stand under the overview. A residual is (counts - model) / sqrt(model); channels
 * where the model is not above zero have none, and the panel says how many there are.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If there is no measured curve, a curve is empty, lengths differ, a number is not finite, an
 * uncertainty is negative, fitted energies differ from those of their data, or, where the residuals of the whole spectrum
 * are drawn, a measured energy is none of the expected ones.
 * @example A spectrum of three channels
 * ```ts
 * import { renderSvg, spectrumFigure } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const figure = spectrumFigure({
 *   title: "Gold",
 *   subtitle: ["three channels"],
 *   axisTitle: "Kinetic energy as recorded / eV",
 *   measured: [{ label: "", curve: { energiesEv: [9.6, 9.7, 9.8], counts: [3, 52, 98] } }],
 *   expected: null,
 *   edges: [],
 * });
 * assert.match(await renderSvg(figure), /Kinetic energy as recorded \/ eV/);
 * ```
 */
export function spectrumFigure(input: SpectrumFigureInput): Record<string, unknown> {
  check(input);
  return {
    $schema: "https://vega.github.io/schema/vega-lite/v6.json",
    description: [input.title, ...input.subtitle, ...input.edges.map(edgeLabel)].join("; "),
    background: "white",
    padding: 12,
    bounds: "flush",
    spacing: input.edges.length > 0 ? ROW_GAP.titled : ROW_GAP.plain,
    vconcat: [overview(input), ...lowerRow(input)],
    config: CONFIG,
  };
}

function lowerRow({ axisTitle, measured, expected, edges }: SpectrumFigureInput): Spec[] {
  if (edges.length > 0) {
    const x = edges.map((edge) => closeUpAxis(edge, axisTitle));
    return [{
      columns: edges.length,
      bounds: "flush",
      spacing: CLOSE_UP_GAP,
      concat: [
        ...edges.map((edge, i) => closeUp(edge, x[i], i)),
        ...edges.map(({ data, fitted }, i) =>
          residualPanel(residualsOf(data, fitted.counts), x[i], CLOSE_UP_WIDTH)
        ),
      ],
    }];
  }
  if (expected === null) return [];
  const x = energyAxis(axisTitle, energyRange(measured, expected, edges));
  return [residualPanel(residualsOfAll(measured, expected), x, WIDTH)];
}

function overview({ title, subtitle, axisTitle, measured, expected, edges }: SpectrumFigureInput): Spec {
  const [fromEv, toEv] = energyRange(measured, expected, edges);
  const [, highest] = extent([
    ...measured.map(({ curve }) => curve.counts),
    ...(expected === null ? [] : [expectedRows(expected).map(({ high }) => high)]),
    ...edges.map(({ fitted }) => fitted.counts),
  ]);
  const headroom = (8 + LABEL_LINE * edges.length) / OVERVIEW_HEIGHT;
  const x = energyAxis(axisTitle, [fromEv, toEv]);
  const y = {
    field: "counts",
    type: "quantitative",
    scale: { type: "sqrt", domain: [0, Math.max(1, highest) / (1 - headroom) ** 2], nice: false },
    axis: { title: "Counts (square-root scale)", values: squareRootTicks(Math.max(1, highest)) },
  };
  const measuredLayers = measured.map(({ label, curve }, i) => {
    const gray = MEASURED_GRAYS[i % MEASURED_GRAYS.length];
    const isLine = curve.counts.length > MOST_DOTS;
    return {
      data: { values: points(curve) },
      mark: isLine
        ? { type: "line", interpolate: "step", strokeWidth: 0.8 }
        : { type: "point", filled: true, size: 9, opacity: 1 },
      encoding: {
        x,
        y,
        color: legendEntry(label || "measured", gray, isLine ? {} : { symbolType: SMALL_DOT }),
      },
    };
  });
  const fittedLayers = edges.map(({ name, fitted }, i) => {
    const { color, dash } = edgeStyle(i);
    return {
      data: { values: points(fitted) },
      mark: { type: "line", strokeWidth: 2.2, strokeDash: dash, clip: true },
      encoding: { x, y, color: legendEntry(`${name} fit`, color, { symbolDash: dash }) },
    };
  });
  const positionLayers = edges.map((edge, i) => {
    const { color, dash } = edgeStyle(i);
    const isLeft = edge.positionEv < (fromEv + toEv) / 2;
    return {
      data: { values: [{ energyEv: edge.positionEv, text: edgeLabel(edge) }] },
      encoding: { x },
      layer: [
        { name: `overview_position_${i}`, mark: { type: "rule", color, strokeDash: dash } },
        {
          mark: {
            type: "text",
            align: isLeft ? "left" : "right",
            dx: isLeft ? 5 : -5,
            color: DARK,
            fontSize: 11,
          },
          encoding: { y: { value: 10 + LABEL_LINE * i }, text: { field: "text" } },
        },
      ],
    };
  });
  return {
    title: {
      text: wrap(title, LINE_LETTERS.title),
      ...(subtitle.length > 0 && { subtitle: subtitle.flatMap((line) => wrap(line, LINE_LETTERS.subtitle)) }),
    },
    width: WIDTH,
    height: OVERVIEW_HEIGHT,
    resolve: { scale: { color: "independent" } },
    layer: [
      ...measuredLayers,
      ...(expected === null ? [] : expectedLayers(expected, x, y)),
      ...fittedLayers,
      ...positionLayers,
    ],
  };
}

function expectedRows({ standardErrors, ...curve }: Expected): (Point & { low: number; high: number })[] {
  return points(curve).map((point, i) => ({
    ...point,
    low: point.counts - standardErrors[i],
    high: point.counts + standardErrors[i],
  }));
}

function expectedLayers(expected: Expected, x: Spec, y: Spec): Spec[] {
  const values = expectedRows(expected);
  return [
    {
      data: { values },
      mark: { type: "area", opacity: 0.3, color: DARK, clip: true },
      encoding: { x, y: { ...y, field: "low" }, y2: { field: "high" } },
    },
    {
      data: { values },
      mark: { type: "line", strokeWidth: 1 },
      encoding: { x, y, color: legendEntry("expected ± std. error", DARK) },
    },
  ];
}

function uncertaintyBand({ positionEv, standardUncertaintyEv }: FigureEdge): [number, number] {
  return [positionEv - standardUncertaintyEv, positionEv + standardUncertaintyEv];
}

function closeUpAxis(edge: FigureEdge, axisTitle: string): EnergyAxis {
  return energyAxis(axisTitle, extent([edge.data.energiesEv, uncertaintyBand(edge)]));
}

function closeUp(edge: FigureEdge, x: EnergyAxis, index: number): Spec {
  const { color, dash } = edgeStyle(index);
  const [low, high] = uncertaintyBand(edge);
  const position = { energyEv: edge.positionEv, low, high };
  const y = {
    field: "counts",
    type: "quantitative",
    scale: { zero: false, nice: false, padding: 8 },
    axis: { title: "Counts", tickCount: 5 },
  };
  const values = points(edge.data).map((point) => ({
    ...point,
    low: point.counts - Math.sqrt(point.counts),
    high: point.counts + Math.sqrt(point.counts),
  }));
  return {
    title: {
      text: edgeLabel(edge),
      subtitle: "shaded: position ± u; bars: ± √N",
      frame: "group",
      fontSize: 11.5,
      subtitleFontSize: 10,
      offset: 5,
    },
    width: CLOSE_UP_WIDTH,
    height: CLOSE_UP_HEIGHT,
    data: { values },
    encoding: { x: { ...x, axis: { ...x.axis, labels: false, title: null } } },
    layer: [
      {
        name: `uncertainty_${index}`,
        data: { values: [position] },
        mark: { type: "rect", color, opacity: 0.25 },
        encoding: { x: { field: "low", type: "quantitative" }, x2: { field: "high" } },
      },
      {
        name: `position_${index}`,
        data: { values: [position] },
        mark: { type: "rule", color, strokeDash: dash },
      },
      {
        data: { values: points(edge.fitted) },
        mark: { type: "line", strokeWidth: 1.8, strokeDash: dash, color },
        encoding: { y },
      },
      {
        mark: { type: "rule", color: DARK, strokeWidth: 0.6 },
        encoding: { y: { ...y, field: "low" }, y2: { field: "high" } },
      },
      { mark: { type: "point", filled: true, size: 9, opacity: 1, color: DARK }, encoding: { y } },
    ],
  };
}

function residualPanel({ points, withoutModel }: Residuals, x: EnergyAxis, width: number): Spec {
  const [lowest, highest] = extent([[-4, 4], points.map(({ residual }) => residual)]);
  const limit = Math.ceil(Math.max(-lowest, highest) + 0.2);
  const y = {
    field: "residual",
    type: "quantitative",
    scale: { domain: [-limit, limit], nice: false },
    axis: { title: "Residual / √N", tickCount: 5 },
  };
  const line = (values: number[], mark: Spec) => ({
    data: { values: values.map((residual) => ({ residual })) },
    mark: { type: "rule", color: DARK, strokeWidth: 0.6, ...mark },
    encoding: { y },
  });
  const note = {
    data: { values: [{ text: `channels with a model of 0, not drawn: ${withoutModel}` }] },
    mark: { type: "text", align: "right", color: DARK, fontSize: 10 },
    encoding: { x: { value: width - 4 }, y: { value: 8 }, text: { field: "text" } },
  };
  return {
    width,
    height: RESIDUAL_HEIGHT,
    layer: [
      line([0], {}),
      line([-2, 2], { strokeDash: [3, 3] }),
      {
        data: { values: points },
        mark: {
          type: "point",
          filled: true,
          size: points.length > MOST_DOTS ? 2 : 7,
          opacity: 1,
          color: DARK,
        },
        encoding: { x, y },
      },
      ...(withoutModel > 0 ? [note] : []),
    ],
  };
}

function residualsOf(measured: FigureCurve, model: ArrayLike<number>): Residuals {
  const all = points(measured).map(({ energyEv, counts }, i) => ({
    energyEv,
    residual: model[i] > 0 ? (counts - model[i]) / Math.sqrt(model[i]) : null,
  }));
  const drawn = all.filter((point) => point.residual !== null) as Residuals["points"];
  return { points: drawn, withoutModel: all.length - drawn.length };
}

function residualsOfAll(measured: SpectrumFigureInput["measured"], expected: FigureCurve): Residuals {
  const expectedCounts = new Map(points(expected).map(({ energyEv, counts }) => [energyEv, counts]));
  const parts = measured.map(({ curve }) => {
    const model = Array.from(curve.energiesEv, (energyEv) => {
      const counts = expectedCounts.get(energyEv);
      if (counts !== undefined) return counts;
      throw new RangeError(
        cannot(ACTION, "measured energies must be among the expected ones", `${energyEv} eV`),
      );
    });
    return residualsOf(curve, model);
  });
  return {
    points: parts.flatMap((part) => part.points),
    withoutModel: parts.reduce((sum, part) => sum + part.withoutModel, 0),
  };
}

function energyRange(
  measured: SpectrumFigureInput["measured"],
  expected: FigureCurve | null,
  edges: readonly FigureEdge[],
): [number, number] {
  return extent([
    ...measured.map(({ curve }) => curve.energiesEv),
    ...(expected === null ? [] : [expected.energiesEv]),
    edges.map(({ positionEv }) => positionEv),
  ]);
}

function energyAxis(title: string, domain: [number, number]): EnergyAxis {
  return { field: "energyEv", type: "quantitative", scale: { domain, nice: false }, axis: { title } };
}

/** A legend of one entry: each curve has its own, drawn as its own mark is. */
function legendEntry(label: string, color: string, symbol: Spec = {}): Spec {
  return {
    datum: label,
    type: "nominal",
    scale: { domain: [label], range: [color] },
    legend: { title: null, ...symbol },
  };
}

/** 1, 2, 5 of each decade from the top down, as long as their labels have room; and zero. */
function squareRootTicks(highest: number): number[] {
  const room = 0.08 * Math.sqrt(highest);
  const ticks: number[] = [];
  for (let decade = Math.floor(Math.log10(highest)); decade >= 0; decade--) {
    for (const digit of [5, 2, 1]) {
      const tick = digit * 10 ** decade;
      const above = ticks.at(-1) ?? Infinity;
      const hasRoom = Math.sqrt(above) - Math.sqrt(tick) >= room && Math.sqrt(tick) >= room;
      if (tick <= highest && hasRoom) ticks.push(tick);
    }
  }
  return [...ticks, 0].reverse();
}

function edgeStyle(index: number): typeof EDGE_STYLES[number] {
  return EDGE_STYLES[index % EDGE_STYLES.length];
}

function edgeLabel({ name, positionEv, standardUncertaintyEv }: FigureEdge): string {
  return `${name} ${formatEstimate({ value: positionEv, standardUncertainty: standardUncertaintyEv }, "eV")}`;
}

function points({ energiesEv, counts }: FigureCurve): Point[] {
  return Array.from(energiesEv, (energyEv, i) => ({ energyEv, counts: counts[i] }));
}

function extent(lists: readonly ArrayLike<number>[]): [number, number] {
  let lowest = Infinity;
  let highest = -Infinity;
  for (const list of lists) {
    for (let i = 0; i < list.length; i++) {
      lowest = Math.min(lowest, list[i]);
      highest = Math.max(highest, list[i]);
    }
  }
  return [lowest, highest];
}

function check({ measured, expected, edges }: SpectrumFigureInput): void {
  if (measured.length === 0) throw new RangeError(cannot(ACTION, "measured must have a curve", 0));
  for (const { curve } of measured) checkCurve("measured", curve, 0);
  if (expected !== null) {
    checkCurve("expected", expected, 0);
    checkCurve("expected standard error", { ...expected, counts: expected.standardErrors }, 0);
  }
  for (const { name, positionEv, standardUncertaintyEv, data, fitted } of edges) {
    checkNumber(`${name} position`, positionEv, -Infinity);
    checkNumber(`${name} standard uncertainty`, standardUncertaintyEv, 0);
    checkCurve(`${name} data`, data, 0);
    checkCurve(`${name} fitted`, fitted, -Infinity);
    const isSame = data.energiesEv.length === fitted.energiesEv.length &&
      Array.from(data.energiesEv).every((energyEv, i) => energyEv === fitted.energiesEv[i]);
    if (!isSame) {
      throw new RangeError(cannot(ACTION, `${name} fitted energies must be those of its data`, "others"));
    }
  }
}

function checkCurve(name: string, { energiesEv, counts }: FigureCurve, lowestCounts: number): void {
  if (energiesEv.length === 0 || energiesEv.length !== counts.length) {
    const rule = `${name} must have as many counts as energies, and at least one`;
    throw new RangeError(cannot(ACTION, rule, `${energiesEv.length} energies, ${counts.length} counts`));
  }
  for (let i = 0; i < energiesEv.length; i++) {
    checkNumber(`${name} energy`, energiesEv[i], -Infinity);
    checkNumber(`${name} counts`, counts[i], lowestCounts);
  }
}

function checkNumber(name: string, value: number, lowest: number): void {
  if (Number.isFinite(value) && value >= lowest) return;
  throw new RangeError(cannot(ACTION, `${name} must be finite${lowest === 0 ? " and >= 0" : ""}`, value));
}
