import { buildCommand } from "@stricli/core";
import { basename, dirname, extname, resolve } from "node:path";
import { cannot, InputError, suggest } from "../base/mod.ts";
import { type SpectrumFile, type SpectrumRegion, writeSpectrumFile } from "../formats/mod.ts";
import { writeFiles } from "./files.ts";
import { type Context, text } from "./flags.ts";
import { type ColumnPair, columnsFlag, readSpectra, regionFlag } from "./read.ts";

/** Format by the ending of a file's name. */
const FORMATS: Readonly<Record<string, SpectrumFile["format"]>> = {
  ".csv": "csv",
  ".vms": "ISO 14976",
  ".nxs": "NXmpes",
};

type ConvertFlags = { region?: readonly string[]; columns?: ColumnPair };

/** `convert` */
export const convertCommand = buildCommand({
  docs: {
    brief: "Convert a spectrum file between CSV, ISO 14976 (.vms) and NeXus NXmpes (.nxs)",
    fullDescription: [
      "Convert a spectrum file between CSV (.csv), ISO 14976 (.vms) and NeXus NXmpes (.nxs). The ending of OUT says what to",
      "write; IN is known by its contents. Nothing is lost: what was written is read back and compared first. CSV holds one",
      "region, so several regions go to OUT_1.csv, OUT_2.csv and so on.",
      "",
      "Examples:",
      "  twoedge convert sample.vms sample.nxs",
      "  twoedge convert sample.vms cutoff.csv --region SECO",
      "  twoedge convert out/clean_gold_he1/spectrum.csv gold.vms",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [
        { parse: text, brief: "File to read: CSV, ISO 14976 or NeXus NXmpes", placeholder: "IN" },
        { parse: text, brief: "File to write: .csv, .vms or .nxs", placeholder: "OUT" },
      ],
    },
    flags: {
      region: { ...regionFlag, brief: "Convert only the regions with this label; repeatable" },
      columns: columnsFlag,
    },
  },
  async func(this: Context, { region, columns }: ConvertFlags, from: string, to: string) {
    const format = FORMATS[extname(to).toLowerCase()];
    if (format === undefined) {
      const rule = `OUT must end in ${Object.keys(FORMATS).join(", ")}`;
      throw new InputError([{ place: "OUT", message: cannot("convert", rule, to) }]);
    }
    if (resolve(from) === resolve(to)) {
      throw new InputError([{
        place: "OUT",
        message: cannot("convert", "OUT must be another file than IN", to),
      }]);
    }
    const file = await readSpectra(from, columns);
    const regions = pick(file.regions, region);
    const files = await Promise.all(
      parts(format, regions, to).map(async ({ path, regions }) =>
        [basename(path), await writeSpectrumFile(format, regions, path)] as const
      ),
    );
    const written = await writeFiles(dirname(to), files);
    const count = `${regions.length} region${regions.length === 1 ? "" : "s"}`;
    this.process.stdout.write(`Wrote ${count} to ${written.join(", ")}\n`);
  },
});

function pick(regions: readonly SpectrumRegion[], labels?: readonly string[]): readonly SpectrumRegion[] {
  if (labels === undefined) return regions;
  const known = regions.map(({ label }) => label);
  const problems = labels.filter((label) => !known.includes(label)).map((label) => {
    const near = suggest(label, known);
    const list = [...new Set(known)].map((name) => JSON.stringify(name)).join(", ");
    const rule = `the label must be one of ${list}${near === undefined ? "" : ` (did you mean ${near}?)`}`;
    return { place: "--region", message: cannot("pick a region", rule, label) };
  });
  if (problems.length > 0) throw new InputError(problems);
  return regions.filter(({ label }) => labels.includes(label));
}

interface Part {
  readonly path: string;
  readonly regions: readonly SpectrumRegion[];
}

/** One file, or for CSV one a region. */
function parts(format: SpectrumFile["format"], regions: readonly SpectrumRegion[], path: string): Part[] {
  if (format !== "csv" || regions.length === 1) return [{ path, regions }];
  const ending = extname(path);
  const start = path.slice(0, path.length - ending.length);
  return regions.map((region, i) => ({ path: `${start}_${i + 1}${ending}`, regions: [region] }));
}
