import { cannot } from "../base/mod.ts";
import { DARK, frame, type Spec, WIDTH } from "./look.ts";

/** A bar of the uncertainty budget. */
export interface FigureBudgetTerm {
  /** What it is. */
  readonly name: string;
  /** Its share of the result: sensitivity times standard uncertainty, without sign, eV, >= 0. */
  readonly contributionEv: number;
}

/** What a figure of an uncertainty budget shows. */
export interface BudgetFigureInput {
  /** Title; wrapped when long. */
  readonly title: string;
  /** Lines under the title. */
  readonly subtitle: readonly string[];
  /** Terms, at least one. */
  readonly terms: readonly FigureBudgetTerm[];
  /** Combined standard uncertainty, eV, >= 0. */
  readonly combinedEv: number;
}

const ROW_HEIGHT = 24;
/** Room for the names of the terms: pixels, and letters. */
const NAME_WIDTH = 270;
const MOST_LETTERS = 44;
const COMBINED = "combined";

/**
 * The uncertainty budget as bars in meV, largest first, the combined standard uncertainty last.
 *
 * @param input What to show; not changed.
 * @returns A complete Vega-Lite 6 chart with its data inline.
 * @throws {RangeError} If there is no term, or an uncertainty is negative or not finite.
 * @example Two terms
 * ```ts
 * import { budgetFigure, renderSvg } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const terms = [{ name: "counting", contributionEv: 0.003 }, { name: "photon energy", contributionEv: 0.004 }];
 * const svg = await renderSvg(budgetFigure({ title: "Gold", subtitle: [], terms, combinedEv: 0.005 }));
 * assert.match(svg, /5\.0 meV/);
 * ```
 */
export function budgetFigure(
  { title, subtitle, terms, combinedEv }: BudgetFigureInput,
): Record<string, unknown> {
  const check = (name: string, value: number): void => {
    if (!(value >= 0 && value < Infinity)) {
      throw new RangeError(cannot("draw a budget", `${name} must be finite and >= 0 eV`, `${value} eV`));
    }
  };
  if (terms.length === 0) throw new RangeError(cannot("draw a budget", "there must be a term", 0));
  for (const { name, contributionEv } of terms) check(name, contributionEv);
  check(COMBINED, combinedEv);
  const rows = [
    ...terms.toSorted((a, b) => b.contributionEv - a.contributionEv),
    { name: COMBINED, contributionEv: combinedEv },
  ].map(({ name, contributionEv }, place) => ({
    // Names may be equal; places are not.
    place,
    name: name.length > MOST_LETTERS ? `${name.slice(0, MOST_LETTERS - 1)}…` : name,
    meV: 1000 * contributionEv,
    text: `${(1000 * contributionEv).toFixed(1)} meV`,
    isCombined: place === terms.length,
  }));
  const y = { field: "place", type: "ordinal", axis: { title: null, ticks: false, labels: false } };
  const highest = Math.max(...rows.map(({ meV }) => meV));
  const x = {
    field: "meV",
    type: "quantitative",
    // Room for the text of the longest bar.
    scale: { domain: [0, highest > 0 ? 1.25 * highest : 1], nice: false },
    axis: { title: "Standard uncertainty of the work function / meV", tickCount: 6 },
  };
  const figure = frame(title, subtitle, {
    width: WIDTH - NAME_WIDTH,
    // Room is kept by hand: the width of a text is only guessed where there is no screen.
    autosize: "none",
    padding: { left: NAME_WIDTH, top: 46 + 14 * subtitle.length, right: 16, bottom: 48 },
    height: ROW_HEIGHT * rows.length,
    data: { values: rows },
    encoding: { y },
    layer: [
      {
        mark: { type: "bar", height: 14 },
        encoding: { x, color: { condition: { test: "datum.isCombined", value: DARK }, value: "#8c8c8c" } },
      },
      {
        mark: { type: "text", align: "right", dx: -6, color: DARK, fontSize: 11 },
        encoding: { x: { value: 0 }, text: { field: "name" } },
      },
      {
        mark: { type: "text", align: "left", dx: 5, color: DARK, fontSize: 11 },
        encoding: { x, text: { field: "text" } },
      },
    ],
  });
  return { ...figure, title: { ...figure.title as Spec, frame: "group", dx: 12 - NAME_WIDTH } };
}
