import { escapeHtml } from "./page.ts";

/** A picture of a run sheet. */
export interface SheetPicture {
  /** What it shows, for those who do not see it. */
  readonly description: string;
  /** Text of an SVG file. */
  readonly svg: string;
  /** Name of that file beside the Markdown. */
  readonly fileName: string;
}

/** A part of a run sheet. */
export interface SheetSection {
  /** Heading. */
  readonly heading: string;
  /** Rows of names and values. Default: none. */
  readonly rows?: readonly (readonly [name: string, value: string])[];
  /** Steps in their order, or points of a list. Default: none. */
  readonly items?: { readonly numbered: boolean; readonly texts: readonly string[] };
  /** Pictures side by side. Default: none. */
  readonly pictures?: readonly SheetPicture[];
}

/** A run sheet: what to do at the instrument, to be printed. */
export interface RunSheet {
  /** Title. */
  readonly title: string;
  /** Lines under it. */
  readonly lines: readonly string[];
  /** Parts in order. */
  readonly sections: readonly SheetSection[];
}

const STYLE = [
  "@page{size:A4;margin:12mm}",
  "body{font:10pt/1.3 'DejaVu Sans',sans-serif;color:#222;background:#fff;max-width:190mm;margin:auto;padding:4mm}",
  "h1{font-size:14pt;margin:0 0 2mm}h2{font-size:11pt;margin:3mm 0 1mm;break-after:avoid}p{margin:0 0 1mm}",
  "table{border-collapse:collapse}th,td{text-align:left;font-weight:normal;padding:0 4mm 0 0;vertical-align:top}",
  "ol,ul{margin:0;padding-left:6mm}figure{display:inline-block;width:49%;margin:0;break-inside:avoid}",
  "img{width:100%}td{overflow-wrap:anywhere}",
].join("");

/**
 * A run sheet as one HTML file that loads nothing: its Content-Security-Policy (W3C, level 3) allows only the one style
 * sheet and the pictures in it.
 *
 * @param sheet Contents; all text is escaped.
 * @returns Text of the file.
 * @example Text of a person stays text
 * ```ts
 * import { runSheetHtml } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const html = await runSheetHtml({ title: "<b>Au</b>", lines: [], sections: [] });
 * assert.ok(html.includes("&lt;b&gt;Au&lt;/b&gt;") && !html.includes("<b>"));
 * ```
 */
export async function runSheetHtml({ title, lines, sections }: RunSheet): Promise<string> {
  const digest = new Uint8Array(await crypto.subtle.digest("SHA-256", new TextEncoder().encode(STYLE)));
  const policy = `default-src 'none'; style-src 'sha256-${
    btoa(String.fromCharCode(...digest))
  }'; img-src data:; base-uri 'none'; form-action 'none'`;
  return [
    "<!doctype html>",
    '<html lang="en">',
    "<head>",
    '<meta charset="utf-8">',
    `<meta http-equiv="Content-Security-Policy" content="${policy}">`,
    '<meta name="viewport" content="width=device-width">',
    `<title>${escapeHtml(title)}</title>`,
    `<style>${STYLE}</style>`,
    "</head>",
    "<body>",
    `<h1>${escapeHtml(title)}</h1>`,
    ...lines.map((line) => `<p>${escapeHtml(line)}</p>`),
    ...sections.flatMap(sectionHtml),
    "</body>",
    "</html>",
    "",
  ].join("\n");
}

function sectionHtml({ heading, rows = [], items, pictures = [] }: SheetSection): string[] {
  const list = items?.numbered ? "ol" : "ul";
  return [
    `<h2>${escapeHtml(heading)}</h2>`,
    ...(rows.length === 0 ? [] : [
      "<table>",
      ...rows.map(([name, value]) =>
        `<tr><th scope="row">${escapeHtml(name)}</th><td>${escapeHtml(value)}</td></tr>`
      ),
      "</table>",
    ]),
    ...(items === undefined ? [] : [
      `<${list}>`,
      ...items.texts.map((text) => `<li>${escapeHtml(text)}</li>`),
      `</${list}>`,
    ]),
    ...pictures.map(({ description, svg }) =>
      `<figure><img alt="${escapeHtml(description)}" src="data:image/svg+xml,${dataText(svg)}"></figure>`
    ),
  ];
}

/** Percent encoding that is also safe inside of quotes and parentheses. */
function dataText(svg: string): string {
  return encodeURIComponent(svg).replaceAll(/['()]/g, (sign) => `%${sign.charCodeAt(0).toString(16)}`);
}

/**
 * A run sheet as Markdown (CommonMark 0.31 with tables of GitHub); pictures are files beside it.
 *
 * @param sheet Contents; signs that mean something in Markdown are escaped.
 * @returns Text of the file.
 */
export function runSheetMarkdown({ title, lines, sections }: RunSheet): string {
  return [
    `# ${plain(title)}`,
    "",
    ...lines.flatMap((line) => [plain(line), ""]),
    ...sections.flatMap(({ heading, rows = [], items, pictures = [] }) => [
      `## ${plain(heading)}`,
      "",
      ...(rows.length === 0 ? [] : [
        "| Setting | Value |",
        "| --- | --- |",
        ...rows.map((row) => `| ${row.map(plain).join(" | ")} |`),
        "",
      ]),
      ...(items === undefined ? [] : [
        ...items.texts.map((text, i) => `${items.numbered ? `${i + 1}.` : "-"} ${plain(text)}`),
        "",
      ]),
      ...pictures.flatMap(({ description, fileName }) => [
        `![${plain(description)}](${encodeURIComponent(fileName)})`,
        "",
      ]),
    ]),
  ].join("\n");
}

/** Text in one line with no sign that Markdown or HTML would take for its own. */
function plain(text: string): string {
  return text.replaceAll(/\s+/g, " ").trim()
    .replaceAll(/[\\`*_[\]<>|~#]/g, (sign) => `\\${sign}`)
    .replaceAll("&", "&amp;")
    .replace(/^(?=[-+](\s|$)|-{3,}$|=+$)/, "\\")
    .replace(/^(\d+)([.)])(?=\s|$)/, "$1\\$2");
}
