import { buildCommand } from "@stricli/core";
import { VERSION } from "../base/mod.ts";
import { decodeText } from "../formats/mod.ts";
import { renderSvg, seriesFigure } from "../report/mod.ts";
import { readBytes, stem, writeFiles } from "./files.ts";
import { type Context, GOOD, jsonFlag, NOT_TRUSTED, outFlag, text } from "./flags.ts";
import { fitSeries, SERIES_KINDS, type SeriesKind } from "./series.ts";

function seriesKind(value: string): SeriesKind {
  const kind = SERIES_KINDS.find((known) => known === value);
  if (kind === undefined) {
    throw new SyntaxError(`must be one of ${SERIES_KINDS.join(", ")}, not ${JSON.stringify(value)}`);
  }
  return kind;
}

type SeriesFlags = { out?: string; json: boolean };

/** `series` */
export const seriesCommand = buildCommand({
  docs: {
    brief: "Fit a series of measurements: Fowler plot, stopping potentials, h/e, trends of the work function",
    fullDescription: [
      "Fit a series of measurements from a CSV file with a header row and, where named, lines '# key: value' above it.",
      "",
      "  fowler       photon_energy_ev,yield,yield_uncertainty; keys temperature_k, band_fwhm_ev",
      "  stopping     photon_energy_ev,retarding_v,current_a,current_uncertainty_a; keys temperature_k,",
      "               geometry (plane or sphere), dark_current_a, contact_potential_v and its",
      "               contact_potential_uncertainty_v (collector minus emitter)",
      "  kemax        frequency_hz,frequency_uncertainty_hz and either kinetic_energy_max_ev,",
      "               kinetic_energy_max_uncertainty_ev or stopping_potential_v,stopping_potential_uncertainty_v",
      "  bias         bias_v,work_function_ev,work_function_uncertainty_ev",
      "  temperature  temperature_k,work_function_ev,work_function_uncertainty_ev",
      "",
      "Every result says whose work function it is. Stopping potentials give the collector's.",
      "",
      "Examples:",
      "  twoedge series fowler yield.csv",
      "  twoedge series bias bias.csv --out out/bias",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [
        { parse: seriesKind, brief: SERIES_KINDS.join(", "), placeholder: "KIND" },
        { parse: text, brief: "CSV file", placeholder: "FILE" },
      ],
    },
    flags: {
      out: { ...outFlag, brief: "Folder for series.json and series.svg (default: none written)" },
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: SeriesFlags, kind: SeriesKind, path: string) {
    const answer = fitSeries(kind, decodeText(await readBytes(path), path), path, stem(path));
    const json = `${JSON.stringify({ kind, ...answer.json, version: VERSION }, null, 2)}\n`;
    this.process.stdout.write(flags.json ? json : `${answer.lines.join("\n")}\n`);
    if (flags.out !== undefined) {
      const written = await writeFiles(flags.out, [
        ["series.json", json],
        ["series.svg", await renderSvg(seriesFigure(answer.figure))],
      ]);
      if (!flags.json) this.process.stdout.write(`Wrote ${written.join(", ")}\n`);
    }
    this.exitCode = answer.verdict === "failed" ? NOT_TRUSTED : GOOD;
  },
});
