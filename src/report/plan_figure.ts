import { demandFinite, frame, LINE_STYLES, WIDTH } from "./look.ts";

/** What the trade-off figure of a plan shows. */
export interface PlanFigureInput {
  /** Title. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Wanted standard uncertainty, eV, > 0: a level line. */
  readonly targetEv: number;
  /** At least one setting, each with times, s, and standard uncertainties after them, eV, all > 0, shape (n). */
  readonly curves: readonly {
    readonly label: string;
    readonly timesS: readonly number[];
    readonly uncertaintiesEv: readonly number[];
  }[];
}

/**
 * The trade-off of a plan: standard uncertainty against time, both logarithmic.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If a number is not finite.
 * @example One setting
 * ```ts
 * import { planFigure, renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const svg = await renderSvg(planFigure({
 *   title: "Gold", subtitle: [], targetEv: 0.005,
 *   curves: [{ label: "-9 V", timesS: [60, 600], uncertaintiesEv: [0.008, 0.004] }],
 * }));
 * assert.match(svg, /Standard uncertainty \/ meV/);
 * ```
 */
export function planFigure({ title, subtitle, targetEv, curves }: PlanFigureInput): Record<string, unknown> {
  for (const { label, timesS, uncertaintiesEv } of curves) {
    [...timesS, ...uncertaintiesEv, targetEv].forEach((value) => demandFinite("draw a plan", label, value));
  }
  const style = (channel: "color" | "dash"): unknown[] =>
    curves.map((_, i) => LINE_STYLES[i % LINE_STYLES.length][channel]);
  const domain = curves.map(({ label }) => label);
  const x = {
    field: "timeMin",
    type: "quantitative",
    title: "Time / min",
    scale: { type: "log", nice: false },
  };
  const y = {
    field: "uncertaintyMeV",
    type: "quantitative",
    title: "Standard uncertainty / meV",
    scale: { type: "log", nice: false, padding: 12 },
    axis: { format: "~g" },
  };
  const values = curves.flatMap(({ label, timesS, uncertaintiesEv }) =>
    timesS.map((timeS, i) => ({ label, timeMin: timeS / 60, uncertaintyMeV: 1000 * uncertaintiesEv[i] }))
  );
  return frame(title, subtitle, {
    width: WIDTH,
    height: 320,
    layer: [
      {
        data: { values },
        mark: { type: "line", strokeWidth: 2 },
        encoding: {
          x: { ...x, axis: { format: "~g" } },
          y,
          color: {
            field: "label",
            type: "nominal",
            scale: { domain, range: style("color") },
            legend: { title: null, columns: 1 },
          },
          strokeDash: { field: "label", type: "nominal", scale: { domain, range: style("dash") } },
        },
      },
      {
        data: { values: [{ uncertaintyMeV: 1000 * targetEv }] },
        mark: { type: "rule", color: "#4d4d4d", strokeDash: [2, 3] },
        encoding: { y },
      },
    ],
  });
}
