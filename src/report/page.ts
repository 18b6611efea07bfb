import { cannot } from "../base/mod.ts";
import { shortened } from "./look.ts";
import { PAGE_SCRIPT } from "./page_script.ts";

/** A figure of a report page. */
export interface PageFigure {
  /** What it shows, one line. */
  readonly title: string;
  /** Text of an SVG file. */
  readonly svg: string;
  /**
   * `true` for a drawing of {@link renderSvg}, which becomes part of the page. Any other file is shown as an image, where
   * nothing in it can act.
   */
  readonly isOwn: boolean;
  /** What it says, for those who cannot see it. */
  readonly description: string;
}

/** A table of a report page. */
export interface PageTable {
  /** What it is. */
  readonly caption: string;
  /** Heads of the columns. */
  readonly head: readonly string[];
  /** Rows, each as long as the head; the first cell names the row. */
  readonly rows: readonly (readonly string[])[];
}

/** A spectrum that the reader of a page can zoom and read values off. */
export interface PageSpectrum {
  /** Title of the energy axis with its unit. */
  readonly axisTitle: string;
  /** Energies, eV, ascending, shape (n), n >= 2. */
  readonly energiesEv: ArrayLike<number>;
  /** Counts, shape (n). */
  readonly counts: ArrayLike<number>;
  /** Expected counts, shape (n), or null. */
  readonly expected: ArrayLike<number> | null;
}

/** What a report page says. All texts are plain: what looks like HTML in them is shown, not obeyed. */
export interface ReportPageInput {
  /** Title. */
  readonly title: string;
  /** The answer in whole sentences, the most important first. */
  readonly answer: readonly string[];
  /** Warnings. */
  readonly warnings: readonly string[];
  /** Figures. */
  readonly figures: readonly PageFigure[];
  /** Spectrum to look into, or null. */
  readonly spectrum: PageSpectrum | null;
  /** Tables. */
  readonly tables: readonly PageTable[];
  /** The scenario as JSON text, or null. */
  readonly scenario: string | null;
  /** Where everything comes from: names and values. */
  readonly provenance: readonly (readonly [name: string, value: string])[];
  /** The command that makes the results again, and what to know of it. */
  readonly reproduce: { readonly command: string; readonly notes: readonly string[] };
}

const STYLE = `
:root { color-scheme: light; }
body { font: 16px/1.5 "DejaVu Sans", Verdana, sans-serif; color: #222222; background: white; max-width: 52rem;
  margin: 0 auto; padding: 1rem; overflow-wrap: anywhere; }
h1 { font-size: 1.5rem; line-height: 1.25; } h2 { font-size: 1.15rem; margin-top: 2rem; }
.answer p:first-child { font-size: 1.2rem; font-weight: bold; }
.warnings li { border-left: 4px solid #D55E00; padding-left: 0.6rem; margin: 0.4rem 0; list-style: none; }
.warnings ul { padding: 0; }
figure { margin: 1rem 0; } figcaption, caption { font-weight: bold; text-align: left; padding: 0.3rem 0; }
.scroll { overflow-x: auto; } .scroll > svg, .scroll > img { max-width: 100%; height: auto; min-width: 38rem; }
#plot { width: 100%; min-width: 38rem; touch-action: pan-y; font-size: 11px; fill: #222222; }
:focus-visible { outline: 3px solid #0072B2; }
table { border-collapse: collapse; font-size: 0.9rem; }
th, td { border-top: 1px solid #8c8c8c; padding: 0.25rem 0.8rem 0.25rem 0; text-align: left; vertical-align: top;
  overflow-wrap: normal; }
pre { background: #f4f4f4; padding: 0.6rem; white-space: pre-wrap; font-size: 0.85rem; }
input { width: 7rem; font: inherit; } button { font: inherit; }
dt { font-weight: bold; } dd { margin: 0 0 0.4rem 1rem; }
@media print {
  body { max-width: none; font-size: 10pt; } #explore { display: none; } figure, tr { break-inside: avoid; }
  .scroll { overflow: visible; } .scroll > svg, .scroll > img { min-width: 0; max-height: 14cm; width: auto; }
}`;

/**
 * One HTML file that says everything: the answer, warnings, figures, tables, scenario, provenance.
 *
 * It loads nothing and sends nothing: its Content-Security-Policy (W3C, level 3) allows only the one script and the one
 * style in it, by their SHA-256, and images in the file itself. Without scripts everything but zoom and read-out is there.
 *
 * @param input What to say; not changed.
 * @returns Text of an HTML file.
 * @throws {RangeError} If a row of a table is not as long as its head, or lengths of the spectrum differ, or it has fewer
 * than two channels, or a number that is not finite.
 * @example Text is shown, not obeyed
 * ```ts
 * import { reportPage } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const html = await reportPage({
 *   title: "<b>Gold</b>", answer: ["The work function is 5.1 eV."], warnings: [], figures: [], spectrum: null, tables: [],
 *   scenario: null, provenance: [], reproduce: { command: "twoedge demo", notes: [] },
 * });
 * assert.match(html, /<h1><bdi>&lt;b&gt;Gold&lt;\/b&gt;<\/bdi><\/h1>/);
 * ```
 */
export async function reportPage(input: ReportPageInput): Promise<string> {
  const { title, answer, warnings, figures, spectrum, tables, scenario, provenance, reproduce } = input;
  check(input);
  const policy = [
    "default-src 'none'",
    "img-src data:",
    `style-src '${await sha256(STYLE)}'`,
    `script-src '${await sha256(PAGE_SCRIPT)}'`,
    "base-uri 'none'",
    "form-action 'none'",
  ].join("; ");
  const name = shortened(title);
  return [
    "<!DOCTYPE html>",
    '<html lang="en">',
    "<head>",
    '<meta charset="utf-8">',
    `<meta http-equiv="Content-Security-Policy" content="${policy}">`,
    '<meta name="viewport" content="width=device-width, initial-scale=1">',
    `<title>${escapeHtml(name)}</title>`,
    `<style>${STYLE}</style>`,
    "</head>",
    "<body>",
    "<main>",
    `<h1>${shown(name)}</h1>`,
    `<section class="answer">${answer.map((sentence) => `<p>${shown(sentence)}</p>`).join("\n")}</section>`,
    ...(warnings.length === 0 ? [] : [
      `<section class="warnings"><h2>Warnings</h2><ul>`,
      ...warnings.map((warning) => `<li>Warning: ${shown(warning)}</li>`),
      "</ul></section>",
    ]),
    ...(figures.length === 0 ? [] : ["<section><h2>Figures</h2>", ...figures.map(figureHtml), "</section>"]),
    ...(spectrum === null ? [] : explorerHtml(spectrum)),
    ...(tables.length === 0 ? [] : ["<section><h2>Numbers</h2>", ...tables.map(tableHtml), "</section>"]),
    ...(scenario === null ? [] : [
      "<section><h2>Scenario</h2>",
      `<pre tabindex="0">${escapeHtml(scenario)}</pre>`,
      "</section>",
    ]),
    "<section><h2>Where it comes from</h2><dl>",
    ...provenance.map(([key, value]) => `<dt>${shown(key)}</dt><dd>${shown(value)}</dd>`),
    "</dl></section>",
    "<section><h2>How to get it again</h2>",
    `<pre tabindex="0">${escapeHtml(reproduce.command)}</pre>`,
    ...reproduce.notes.map((note) => `<p>${shown(note)}</p>`),
    "</section>",
    "</main>",
    ...(spectrum === null ? [] : [dataHtml(spectrum), `<script>${PAGE_SCRIPT}</script>`]),
    "</body>",
    "</html>",
    "",
  ].join("\n");
}

function figureHtml({ title, svg, isOwn, description }: PageFigure): string {
  const label = escapeHtml(description);
  const content = isOwn
    ? `<div class="scroll" role="img" aria-label="${label}" tabindex="0">${svg}</div>`
    : `<div class="scroll" tabindex="0"><img alt="${label}" src="data:image/svg+xml;base64,${
      base64(new TextEncoder().encode(svg))
    }"></div>`;
  return `<figure><figcaption>${shown(title)}</figcaption>${content}</figure>`;
}

function tableHtml({ caption, head, rows }: PageTable): string {
  return [
    `<div class="scroll" tabindex="0"><table><caption>${shown(caption)}</caption>`,
    `<thead><tr>${head.map((cell) => `<th scope="col">${shown(cell)}</th>`).join("")}</tr></thead><tbody>`,
    ...rows.map(([first, ...rest]) =>
      `<tr><th scope="row">${shown(first)}</th>${rest.map((cell) => `<td>${shown(cell)}</td>`).join("")}</tr>`
    ),
    "</tbody></table></div>",
  ].join("\n");
}

function explorerHtml({ expected }: PageSpectrum): string[] {
  return [
    '<section id="explore" hidden><h2>Look into the spectrum</h2>',
    '<p><label>From <input id="from" type="number" step="any"> eV</label>',
    '<label>to <input id="to" type="number" step="any"> eV</label> <button id="all" type="button">All</button></p>',
    '<div class="scroll"><svg id="plot" viewBox="0 0 720 300" role="application" tabindex="0"',
    'aria-label="Spectrum: arrow keys read a channel, plus and minus zoom" aria-describedby="readout"></svg></div>',
    '<p><output id="readout" aria-live="polite"></output></p>',
    `<p>Counts on a square-root scale${
      expected ? ", expected counts as a wide light line" : ""
    }. Drag to zoom.</p>`,
    "</section>",
  ];
}

function dataHtml({ axisTitle, energiesEv, counts, expected }: PageSpectrum): string {
  const data = {
    energiesEv: Array.from(energiesEv),
    counts: Array.from(counts),
    expected: expected === null ? null : Array.from(expected),
  };
  // Numbers only; escaped all the same, as the end tag of a script would end it anywhere.
  const json = JSON.stringify(data).replaceAll("<", "\\u003c");
  return `<script type="application/json" id="data" data-axis="${escapeHtml(axisTitle)}">${json}</script>`;
}

/** Text of a person: isolated, so that marks of writing direction in it end with it. */
function shown(text: string): string {
  return `<bdi>${escapeHtml(text)}</bdi>`;
}

const ENTITIES: Readonly<Record<string, string>> = {
  "&": "&amp;",
  "<": "&lt;",
  ">": "&gt;",
  '"': "&quot;",
  "'": "&#39;",
};

/**
 * Text as HTML shows it, inside of an element or of a quoted attribute.
 *
 * Control characters that HTML forbids become U+FFFD.
 *
 * @param text Any text.
 * @returns HTML.
 */
export function escapeHtml(text: string): string {
  return text.replaceAll(/[&<>"']/g, (sign) => ENTITIES[sign])
    // deno-lint-ignore no-control-regex
    .replaceAll(/[\u0000-\u0008\u000b\u000c\u000e-\u001f\u007f]/g, "\ufffd");
}

async function sha256(text: string): Promise<string> {
  const digest = await crypto.subtle.digest("SHA-256", new TextEncoder().encode(text));
  return `sha256-${base64(new Uint8Array(digest))}`;
}

function base64(bytes: Uint8Array): string {
  let binary = "";
  for (const byte of bytes) binary += String.fromCharCode(byte);
  return btoa(binary);
}

function check({ tables, spectrum }: ReportPageInput): void {
  const fail = (rule: string, value: unknown) => new RangeError(cannot("write a report", rule, value));
  for (const { caption, head, rows } of tables) {
    const wrong = rows.find((row) => row.length !== head.length);
    if (wrong) throw fail(`rows of ${caption} must have ${head.length} cells`, wrong.length);
  }
  if (spectrum === null) return;
  const { energiesEv, counts, expected } = spectrum;
  if (energiesEv.length < 2) throw fail("the spectrum must have two channels", energiesEv.length);
  for (const list of [energiesEv, counts, expected ?? energiesEv]) {
    if (list.length !== energiesEv.length) {
      throw fail(`lists must have length ${energiesEv.length}`, list.length);
    }
    const wrong = Array.from(list).find((value) => !Number.isFinite(value));
    if (wrong !== undefined) throw fail("numbers of the spectrum must be finite", wrong);
  }
}
