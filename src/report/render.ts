/** The number format of every figure, whatever the host: point as decimal sign, thin space between thousands. */
const NUMBER_LOCALE = {
  decimal: ".",
  thousands: "\u2009",
  grouping: [3],
  currency: ["", ""] as [string, string],
};

/**
 * Draws a Vega-Lite chart as SVG, without a browser.
 *
 * The same chart gives the same bytes, whatever was drawn before.
 *
 * @param spec A complete Vega-Lite 6 chart with its data inline; not changed.
 * @returns Text of an SVG file.
 * @throws {Error} If the chart compiles or draws with a warning: all warnings, one a line.
 * @example A chart of two points
 * ```ts
 * import { renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const svg = await renderSvg({
 *   data: { values: [{ x: 1, y: 2 }, { x: 2, y: 3 }] },
 *   mark: "point",
 *   encoding: { x: { field: "x", type: "quantitative", title: "E / eV" }, y: { field: "y", type: "quantitative" } },
 * });
 * assert.match(svg, /^<svg.*E \/ eV/s);
 * ```
 */
export async function renderSvg(spec: Record<string, unknown>): Promise<string> {
  // Both libraries take longer to load than the rest of the program together.
  const [vega, vegaLite] = await Promise.all([import("vega"), import("vega-lite")]);
  const warnings: string[] = [];
  const logger = vega.logger(vega.Warn, "warn", (_method, _level, parts) => warnings.push(parts.join(" ")));
  const chart = vegaLite.compile(spec as unknown as Parameters<typeof vegaLite.compile>[0], { logger }).spec;
  // Names of clip paths and gradients are counted across charts.
  vega.resetSVGDefIds();
  const view = new vega.View(vega.parse(chart, { locale: { number: NUMBER_LOCALE } }), {
    renderer: "none",
    logger,
  });
  const svg = await view.toSVG();
  view.finalize();
  if (warnings.length > 0) throw new Error(`Cannot draw a chart with warnings:\n${warnings.join("\n")}`);
  return svg;
}
