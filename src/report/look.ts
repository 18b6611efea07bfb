import { cannot } from "../base/mod.ts";

/** Part of a Vega-Lite chart. */
export type Spec = Record<string, unknown>;

/** Lines and text. */
export const DARK = "#222222";

/** Edges: blue and vermillion of M. Okabe, K. Ito, Color Universal Design (2008), with dashes for gray print. */
export const EDGE_STYLES = [{ color: "#0072B2", dash: [1, 0] }, {
  color: "#D55E00",
  dash: [7, 3],
}] as const;

/** Lines of a family: colors of Okabe and Ito that differ in gray too, each with its own dashes. */
export const LINE_STYLES = [
  { color: "#0072B2", dash: [1, 0] },
  { color: "#D55E00", dash: [7, 3] },
  { color: "#009E73", dash: [3, 2] },
  { color: "#CC79A7", dash: [10, 3, 2, 3] },
  { color: "#56B4E9", dash: [2, 2] },
  { color: "#4d4d4d", dash: [12, 4] },
] as const;

/** Width of the plot of every figure; text stays readable when that fills a column of print. */
export const WIDTH = 640;

/** The same look for every figure. */
export const CONFIG = {
  // Otherwise each of thousands of points carries a sentence.
  aria: false,
  font: "DejaVu Sans, sans-serif",
  view: { stroke: DARK },
  title: { anchor: "start", color: DARK, fontSize: 13, subtitleColor: DARK, subtitleFontSize: 11, offset: 8 },
  axis: {
    domain: false,
    grid: false,
    tickColor: DARK,
    labelColor: DARK,
    labelFontSize: 11,
    titleColor: DARK,
    titleFontSize: 11.5,
    titleFontWeight: "normal",
  },
  axisX: { labelFlush: false },
  // The same room for the labels of every panel puts the titles of the vertical axes in line.
  axisY: { minExtent: 48, maxExtent: 48, labelOverlap: false },
  legend: {
    orient: "top",
    offset: 6,
    labelColor: DARK,
    labelFontSize: 11,
    labelLimit: 0,
    symbolSize: 200,
    symbolStrokeWidth: 2,
  },
};

/** A figure of one panel: title, lines under it and the look. */
export function frame(title: string, subtitle: readonly string[], content: Spec): Spec {
  return {
    $schema: "https://vega.github.io/schema/vega-lite/v6.json",
    description: [title, ...subtitle].join("; "),
    background: "white",
    padding: 12,
    title: {
      text: wrap(shortened(title), 60),
      subtitle: subtitle.flatMap((line) => wrap(shortened(line), 72)),
    },
    config: CONFIG,
    ...content,
  };
}

/** At most so much of a text as a figure has room for. */
export function shortened(text: string, letters = 240): string {
  return text.length > letters ? `${text.slice(0, letters - 1)}…` : text;
}

/** The text in lines of at most so many letters; a longer word has its own line. */
export function wrap(text: string, letters: number): string[] {
  const lines: string[] = [];
  for (const word of text.split(/\s+/)) {
    const line = lines.at(-1);
    if (line !== undefined && `${line} ${word}`.length <= letters) {
      lines[lines.length - 1] = `${line} ${word}`;
    } else lines.push(word);
  }
  return lines;
}

/** Throws unless a number that is drawn is finite. */
export function demandFinite(action: string, name: string, value: number): void {
  if (!Number.isFinite(value)) throw new RangeError(cannot(action, `${name} must be finite`, value));
}
