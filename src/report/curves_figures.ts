import { cannot } from "../base/mod.ts";
import { DARK, demandFinite, frame, LINE_STYLES, type Spec, WIDTH } from "./look.ts";

/** A curve of depths. */
export interface FigureDepthCurve {
  /** What comes from there, such as `no energy loss`. */
  readonly label: string;
  /** Depths below the surface, nm, ascending, shape (n), n >= 1. */
  readonly depthsNm: ArrayLike<number>;
  /** Share of the electrons per nm of depth, shape (n). */
  readonly densitiesPerNm: ArrayLike<number>;
}

/** What a figure of emission depths shows. */
export interface DepthFigureInput {
  /** Title; wrapped when long. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Curves, at least one. */
  readonly curves: readonly FigureDepthCurve[];
  /** Depths to mark, such as the mean escape depth and the information depth. */
  readonly marks: readonly { readonly label: string; readonly depthNm: number }[];
}

/** Part of a spectrum, by what its electrons went through. */
export interface FigureLossPart {
  /** Such as `no event`, `1 event`, `more`. */
  readonly label: string;
  /** Counts, shape (n). */
  readonly counts: ArrayLike<number>;
}

/** What a decomposition of a spectrum by inelastic events shows. */
export interface LossFigureInput {
  /** Title; wrapped when long. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Title of the energy axis with its unit. */
  readonly axisTitle: string;
  /** Energies, eV, shape (n), n >= 1. */
  readonly energiesEv: ArrayLike<number>;
  /** Parts that add up to the spectrum, at least one. */
  readonly parts: readonly FigureLossPart[];
}

interface Curve {
  readonly label: string;
  readonly x: ArrayLike<number>;
  readonly y: ArrayLike<number>;
}

const HEIGHT = 280;
/** Width of a letter of marks, pixels. */
const LETTER = 6.5;
const ALL = "all";

/**
 * The distribution of the depths that emitted electrons come from, with characteristic depths marked.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If there is no curve, one is empty, lengths differ or a number is not finite.
 * @example Straight lines, mean free path 1 nm
 * ```ts
 * import { depthFigure, renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const depthsNm = [0, 1, 2, 3];
 * const svg = await renderSvg(depthFigure({
 *   title: "Gold", subtitle: [],
 *   curves: [{ label: "no loss", depthsNm, densitiesPerNm: depthsNm.map((z) => Math.exp(-z)) }],
 *   marks: [{ label: "information depth 95 %", depthNm: 2.9957 }],
 * }));
 * assert.match(svg, /Depth below the surface \/ nm/);
 * ```
 */
export function depthFigure({ title, subtitle, curves, marks }: DepthFigureInput): Record<string, unknown> {
  for (const { label, depthNm } of marks) demandFinite("draw depths", label, depthNm);
  const deepestNm = Math.max(...curves.map(({ depthsNm }) => depthsNm[depthsNm.length - 1] ?? 0));
  const x = {
    type: "quantitative",
    scale: { zero: true, nice: false },
    axis: { title: "Depth below the surface / nm" },
  };
  return frame(title, subtitle, {
    width: WIDTH,
    height: HEIGHT,
    layer: [
      linesLayer(
        "draw depths",
        curves.map(({ label, depthsNm, densitiesPerNm }) => ({ label, x: depthsNm, y: densitiesPerNm })),
        x,
        { type: "quantitative", axis: { title: "Share of the electrons per depth / (1/nm)" } },
      ),
      ...marks.flatMap(({ label, depthNm }, i) => {
        const values = [{ x: depthNm, text: `${label}: ${depthNm.toFixed(2)} nm` }];
        const isRight = depthNm / deepestNm * WIDTH + LETTER * values[0].text.length > WIDTH;
        const words = (color: string, strokeWidth: number) => ({
          data: { values },
          mark: {
            type: "text",
            align: isRight ? "right" : "left",
            dx: isRight ? -4 : 4,
            fontSize: 11,
            color,
            stroke: color,
            strokeWidth,
          },
          encoding: { x: { ...x, field: "x" }, y: { value: 12 + 16 * i }, text: { field: "text" } },
        });
        return [
          {
            data: { values },
            mark: { type: "rule", color: DARK, strokeDash: [3, 3] },
            encoding: { x: { ...x, field: "x" } },
          },
          // A white edge keeps words readable on lines.
          words("white", 4),
          words(DARK, 0),
        ];
      }),
    ],
  });
}

/**
 * A spectrum decomposed by the number of inelastic events of its electrons; their sum is drawn with them.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If there is no part, it is empty, lengths differ or a number is not finite.
 * @example Two parts
 * ```ts
 * import { lossFigure, renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const svg = await renderSvg(lossFigure({
 *   title: "Gold", subtitle: [], axisTitle: "Kinetic energy / eV", energiesEv: [1, 2, 3],
 *   parts: [{ label: "no event", counts: [1, 2, 3] }, { label: "1 or more", counts: [5, 2, 0] }],
 * }));
 * assert.match(svg, /1 or more/);
 * ```
 */
export function lossFigure(
  { title, subtitle, axisTitle, energiesEv, parts }: LossFigureInput,
): Record<string, unknown> {
  const sum = Array.from(energiesEv, (_, i) => parts.reduce((total, { counts }) => total + counts[i], 0));
  return frame(title, subtitle, {
    width: WIDTH,
    height: HEIGHT,
    ...linesLayer(
      "draw losses",
      [...parts, { label: ALL, counts: sum }].map(({ label, counts }) => ({
        label,
        x: energiesEv,
        y: counts,
      })),
      { type: "quantitative", scale: { zero: false, nice: false }, axis: { title: axisTitle } },
      { type: "quantitative", axis: { title: "Counts" } },
    ),
  });
}

function linesLayer(action: string, curves: readonly Curve[], x: Spec, y: Spec): Spec {
  if (curves.length === 0) throw new RangeError(cannot(action, "there must be a curve", 0));
  for (const { label, x, y } of curves) {
    if (x.length === 0 || x.length !== y.length) {
      const rule = `${label} must have as many heights as places, and at least one`;
      throw new RangeError(cannot(action, rule, `${x.length} places, ${y.length} heights`));
    }
    for (let i = 0; i < x.length; i++) demandFinite(action, label, x[i] + y[i]);
  }
  const domain = curves.map(({ label }) => label);
  const legend = { title: null, symbolType: "stroke" };
  const style = (i: number, label: string) =>
    label === ALL && i === curves.length - 1
      ? { color: DARK, dash: [1, 0] }
      : LINE_STYLES[i % LINE_STYLES.length];
  return {
    data: {
      values: curves.flatMap(({ label, x, y }) =>
        Array.from(x, (value, i) => ({ label, x: value, y: y[i] }))
      ),
    },
    mark: { type: "line", strokeWidth: 1.6 },
    encoding: {
      x: { ...x, field: "x" },
      y: { ...y, field: "y" },
      color: {
        field: "label",
        type: "nominal",
        scale: { domain, range: domain.map((label, i) => style(i, label).color) },
        legend,
      },
      strokeDash: {
        field: "label",
        type: "nominal",
        scale: { domain, range: domain.map((label, i) => style(i, label).dash) },
        legend,
      },
    },
  };
}
