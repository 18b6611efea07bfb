import { buildCommand } from "@stricli/core";
import { join } from "node:path";
import { writeFiles } from "./files.ts";
import { type Context, NOT_TRUSTED, text } from "./flags.ts";

type ReportFlags = { png: boolean; spec: boolean };

/** Figures of other commands. */
const FIGURE_TITLES: Readonly<Record<string, string>> = {
  "depths.svg": "Depths that electrons come from (depths.svg)",
  "fit.svg": "Spectrum and both fitted edges (fit.svg)",
  "losses.svg": "What the electrons went through (losses.svg)",
  "spectrum.svg": "Spectrum as simulated (spectrum.svg)",
};

function isSet(brief: string): { kind: "boolean"; brief: string; default: false; withNegated: false } {
  return { kind: "boolean", brief, default: false, withNegated: false };
}

/** `report` */
export const reportCommand = buildCommand({
  docs: {
    brief: "Write one page with everything that simulate, fit or demo left in a folder",
    fullDescription: [
      "Write report.html into a folder that simulate, fit or demo wrote: the answer, figures, tables, warnings, scenario and",
      "where everything comes from, in one file that loads nothing. Its figures (levels, cutoff, budget) are also written as",
      "SVG, and the scenario with all defaults as scenario.json.",
      "",
      "--png also writes every figure in the folder as PNG, --spec those of the report as Vega-Lite with their data.",
      "",
      "Examples:",
      "  twoedge report out/demo",
      "  twoedge report out/demo --png --spec",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [{ parse: text, brief: "Folder of results", placeholder: "DIR" }],
    },
    flags: {
      png: isSet("Also every figure in the folder as PNG"),
      spec: isSet("Also the figures of the report as Vega-Lite with their data"),
    },
  },
  async func(this: Context, flags: ReportFlags, path: string) {
    const [
      { readResultFolder },
      { CHART_NAMES, reportCharts, reportContent },
      { renderSvg, reportPage, svgToPng },
    ] = await Promise.all([
      import("./report_folder.ts"),
      import("./report_content.ts"),
      import("../report/mod.ts"),
    ]);
    const folder = await readResultFolder(path, CHART_NAMES.map((name) => `${name}.svg`));
    const charts: (ReturnType<typeof reportCharts>[number] & { svg: string })[] = [];
    for (const chart of reportCharts(folder)) charts.push({ ...chart, svg: await renderSvg(chart.spec) });
    const content = reportContent(path, folder);
    const html = await reportPage({
      ...content,
      figures: [
        ...folder.svgs.map(([name, svg]) => ({
          title: FIGURE_TITLES[name] ?? name,
          svg,
          isOwn: false,
          description: `The figure ${name}; its values are in the tables of this page`,
        })),
        ...charts.map((chart) => ({ ...chart, isOwn: true })),
      ],
    });
    const drawings: (readonly [string, string])[] = charts.map(({ name, svg }) => [`${name}.svg`, svg]);
    const pngs: (readonly [string, Uint8Array])[] = [];
    if (flags.png) {
      for (const [name, svg] of [...folder.svgs, ...drawings]) {
        pngs.push([name.replace(/svg$/, "png"), await svgToPng(svg)]);
      }
    }
    const written = await writeFiles(path, [
      ["report.html", html],
      ...drawings,
      ...(content.scenario === null ? [] : [["scenario.json", `${content.scenario}\n`] as const]),
      ...pngs,
      ...(flags.spec
        ? charts.map(({ name, spec }) => [`${name}.vl.json`, `${JSON.stringify(spec, null, 2)}\n`] as const)
        : []),
    ]);
    this.process.stdout.write([
      ...content.answer,
      ...folder.doubts.map((doubt) => `Warning: ${doubt}`),
      `Wrote ${written.join(", ")}; open ${join(path, "report.html")} in a browser`,
      "",
    ].join("\n"));
    if (folder.doubts.length > 0) this.exitCode = NOT_TRUSTED;
  },
});
