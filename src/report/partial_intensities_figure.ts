import { cannot } from "../base/mod.ts";
import { demandFinite, frame, LINE_STYLES, WIDTH } from "./look.ts";

/** A line whose electrons are counted by their number of losses. */
export interface FigurePartialIntensities {
  /** Name, such as `Au 4f7/2`; no two alike. */
  readonly label: string;
  /** Electrons after 0, 1, 2, ... losses, relative to those without, shape (n), n >= 1. */
  readonly intensities: readonly number[];
}

/** What a figure of partial intensities shows. */
export interface PartialIntensitiesFigureInput {
  /** Title; wrapped when long. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Lines, 1..6. */
  readonly lines: readonly FigurePartialIntensities[];
}

const HEIGHT = 260;

/**
 * Electrons by their number of energy losses, as bars.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If there are no lines or more than six, one is empty, or a number is not finite.
 * @example Straight lines: as many after each number of losses as without
 * ```ts
 * import { partialIntensitiesFigure, renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const lines = [{ label: "Au 4f7/2", intensities: [1, 1, 1, 1] }];
 * const svg = await renderSvg(partialIntensitiesFigure({ title: "Gold", subtitle: [], lines }));
 * assert.match(svg, /Number of energy losses/);
 * ```
 */
export function partialIntensitiesFigure(
  { title, subtitle, lines }: PartialIntensitiesFigureInput,
): Record<string, unknown> {
  const action = "draw partial intensities";
  if (lines.length === 0 || lines.length > LINE_STYLES.length) {
    throw new RangeError(cannot(action, `there must be 1..${LINE_STYLES.length} lines`, lines.length));
  }
  for (const { label, intensities } of lines) {
    if (intensities.length === 0) throw new RangeError(cannot(action, `${label} must have intensities`, 0));
    for (const intensity of intensities) demandFinite(action, label, intensity);
  }
  const domain = lines.map(({ label }) => label);
  return frame(title, subtitle, {
    width: WIDTH,
    height: HEIGHT,
    data: {
      values: lines.flatMap(({ label, intensities }) =>
        intensities.map((intensity, losses) => ({ label, losses, intensity }))
      ),
    },
    mark: { type: "bar" },
    encoding: {
      x: {
        field: "losses",
        type: "ordinal",
        axis: { title: "Number of energy losses", labelAngle: 0 },
        scale: { paddingInner: 0.25 },
      },
      xOffset: { field: "label", type: "nominal", sort: domain },
      y: { field: "intensity", type: "quantitative", axis: { title: "Electrons relative to those without" } },
      color: {
        field: "label",
        type: "nominal",
        scale: { domain, range: domain.map((_, i) => LINE_STYLES[i].color) },
        legend: { title: null, symbolType: "square", symbolStrokeWidth: 0 },
      },
    },
  });
}
