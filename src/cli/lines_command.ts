import { buildCommand } from "@stricli/core";
import { cannot, InputError, suggest, VERSION } from "../base/mod.ts";
import { readSpectrumFile, type SpectrumRegion } from "../formats/mod.ts";
import { anodeLight } from "../light/mod.ts";
import {
  areaRatio,
  fitLines,
  lightShifts,
  type LineBackground,
  type LinesFit,
  type LineSpec,
  type LineSpectrum,
  type LineValue,
} from "../lines/mod.ts";
import { renderSvg, seriesFigure } from "../report/mod.ts";
import { readBytes, stem, writeFiles } from "./files.ts";
import { poissonCounts } from "./fit.ts";
import { type Context, decimal, GOOD, jsonFlag, NOT_TRUSTED, outFlag, text } from "./flags.ts";
import { blamingFile } from "./number_table.ts";
import { judgmentLines, row } from "./series.ts";

const LINE_KEYS = ["at", "gauss", "lorentz", "asymmetry", "split", "ratio"] as const;
const BACKGROUNDS = ["linear", "shirley", "tougaard"] as const;
const ANODES = ["Al", "Mg"] as const;
/** The universal cross-section: S. Tougaard, Surf. Interface Anal. 11, 453 (1988). */
const UNIVERSAL = { cEv2: 1643, dEv2: null, onsetEv: 0 };

/** `metal,at~72.8,gauss~0.6,lorentz=0.04`: a tilde begins a fitted value, an equals sign keeps it. */
function lineSpec(option: string): LineSpec {
  const [name, ...parts] = option.split(",").map((part) => part.trim());
  const fail = (rule: string): SyntaxError => new SyntaxError(`${rule}, not ${JSON.stringify(option)}`);
  if (!name || /[=~]/.test(name)) throw fail("must begin with a name, as in metal,at~72.8,gauss~0.6");
  const values = new Map<string, LineValue>();
  for (const part of parts) {
    const [, key, mark, number] = /^([a-z]+)([=~])(.*)$/.exec(part) ?? [];
    if (!LINE_KEYS.some((known) => known === key)) {
      throw fail(`must hold ${LINE_KEYS.join(", ")}, each as KEY~START to fit or KEY=VALUE to keep`);
    }
    if (values.has(key)) throw fail(`must give ${key} once`);
    values.set(key, { value: decimal(number), fitted: mark === "~" });
  }
  const [at, gauss] = [values.get("at"), values.get("gauss")];
  if (at === undefined || gauss === undefined) throw fail("must give at and gauss");
  const [split, ratio] = [values.get("split"), values.get("ratio")];
  if ((split === undefined) !== (ratio === undefined)) throw fail("must give split and ratio together");
  const zero = { value: 0, fitted: false };
  return {
    name,
    positionEv: at,
    gaussFwhmEv: gauss,
    lorentzFwhmEv: values.get("lorentz") ?? zero,
    asymmetry: values.get("asymmetry") ?? zero,
    partner: split && ratio ? { splittingEv: split, areaRatio: ratio } : null,
  };
}

function pair(separator: string, example: string): (option: string) => readonly [string, string] {
  return (option) => {
    const parts = option.split(separator);
    if (parts.length !== 2 || parts.includes("")) {
      throw new SyntaxError(`must be two parts as in ${example}, not ${JSON.stringify(option)}`);
    }
    return [parts[0], parts[1]];
  };
}

function windowEv(option: string): readonly [number, number] {
  const [low, high] = pair("..", "1411..1421")(option).map(decimal);
  if (!(low < high)) throw new SyntaxError(`must rise from left to right, not ${JSON.stringify(option)}`);
  return [low, high];
}

type LinesFlags = {
  region?: string;
  line: readonly LineSpec[];
  background: (typeof BACKGROUNDS)[number];
  anode?: (typeof ANODES)[number];
  window?: readonly [number, number];
  ratio?: readonly [string, string];
  out?: string;
  json: boolean;
};

/** `lines` */
export const linesCommand = buildCommand({
  docs: {
    brief: "Fit core-level lines with their background: positions, widths, areas, ratios with uncertainties",
    fullDescription: [
      "Fit core-level lines to every region with the label given. A line is NAME,KEY~START,KEY=VALUE,...: a tilde begins",
      "a fitted value, an equals sign keeps it. Keys: at (position on the axis of the file, eV), gauss and lorentz (full",
      "widths, eV), asymmetry (Doniach-Sunjic), split and ratio (partner of a pair at higher binding energy).",
      "at and gauss must be given; the others are 0 and no partner without.",
      "",
      "Examples:",
      "  twoedge lines foil.vms --region 'Al 2p' --line metal,at~72.8,gauss~0.5,lorentz=0.04,split=0.41,ratio=0.5 \\",
      "    --line oxide,at~75.5,gauss~1.5 --background shirley --ratio oxide/metal",
      "  twoedge lines carbon.csv --line C1s,at~284.8,gauss~1,lorentz=0.1 --anode Mg",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [{ parse: text, brief: "CSV, ISO 14976 or NeXus NXmpes file", placeholder: "FILE" }],
    },
    flags: {
      region: {
        kind: "parsed",
        parse: text,
        brief: "Label of the regions to fit (default: all)",
        placeholder: "LABEL",
        optional: true,
      },
      line: {
        kind: "parsed",
        parse: lineSpec,
        brief: "A line with its values; repeatable",
        placeholder: "LINE",
        variadic: true,
      },
      background: {
        kind: "enum",
        values: BACKGROUNDS,
        brief: "Background; tougaard is his universal one",
        default: "shirley",
      },
      anode: {
        kind: "enum",
        values: ANODES,
        brief: "X-ray anode without monochromator, whose satellites are part of the fit",
        optional: true,
      },
      window: {
        kind: "parsed",
        parse: windowEv,
        brief: "Energies to fit, on the axis of the file",
        placeholder: "FROM..TO",
        optional: true,
      },
      ratio: {
        kind: "parsed",
        parse: pair("/", "oxide/metal"),
        brief: "Ratio of two areas",
        placeholder: "NAME/NAME",
        optional: true,
      },
      out: { ...outFlag, brief: "Folder for lines.json and a figure of each region (default: none written)" },
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: LinesFlags, path: string) {
    const file = await readSpectrumFile(await readBytes(path), path);
    const background: LineBackground = flags.background === "tougaard"
      ? { kind: "tougaard", shape: UNIVERSAL }
      : { kind: flags.background };
    const light = flags.anode && lightShifts(anodeLight(flags.anode, true));
    checkNames(flags);
    const results = chosenRegions(file.regions, flags.region).map((region) => {
      const spectrum = lineSpectrum(region, path, flags.window);
      const fit = blamingFile(path, () => fitLines(spectrum, flags.line, background, light));
      const ratio = flags.ratio && fit.verdict !== "failed"
        ? blamingFile(path, () => areaRatio(fit, ...flags.ratio!))
        : null;
      return { region, spectrum, fit, ratio };
    });
    const json = `${
      JSON.stringify(
        {
          file: path,
          background: flags.background,
          anode: flags.anode ?? null,
          regions: results.map(({ region, spectrum: { energiesEv, energyKind }, fit, ratio }) => ({
            label: region.label,
            experimentalVariables: experimentalVariables(region),
            energyKind,
            windowEv: [energiesEv[0], energiesEv[energiesEv.length - 1]],
            ...withoutCurves(fit),
            ...(flags.ratio && { ratio: { of: flags.ratio.join("/"), estimate: ratio } }),
          })),
          version: VERSION,
        },
        null,
        2,
      )
    }\n`;
    const shown = results.flatMap(({ region, spectrum, fit, ratio }) => [
      [region.label || stem(path), ...experimentalVariables(region)].join(", "),
      ...judgmentLines(fit),
      ...fit.strongCorrelations.map((sentence) => `  correlated: ${sentence}`),
      ...fit.lines.flatMap((line) => [
        ...row(`${line.name}, ${spectrum.energyKind} energy`, line.positionEv, "eV"),
        ...row(`${line.name}, full width`, line.fwhmEv, "eV"),
        ...row(`${line.name}, area`, line.areaCountsEv, "counts eV"),
        ...(line.asymmetry.value > 0 ? row(`${line.name}, asymmetry`, line.asymmetry, "") : []),
      ]),
      ...(fit.lines.length > 0 ? [`  ${"areas".padEnd(30)}${fit.areaIs}`] : []),
      ...row(flags.ratio?.join("/") ?? "", ratio, ""),
    ]);
    this.process.stdout.write(flags.json ? json : `${shown.join("\n")}\n`);
    if (flags.out !== undefined) {
      const figures = await Promise.all(results.map(async (result, i) =>
        [
          results.length === 1 ? "lines.svg" : `lines_${i + 1}.svg`,
          await renderSvg(linesFigure(stem(path), result)),
        ] as const
      ));
      const written = await writeFiles(flags.out, [["lines.json", json], ...figures]);
      if (!flags.json) this.process.stdout.write(`Wrote ${written.join(", ")}\n`);
    }
    this.exitCode = results.some(({ fit }) => fit.verdict === "failed") ? NOT_TRUSTED : GOOD;
  },
});

function checkNames({ line, ratio }: LinesFlags): void {
  const names = line.map(({ name }) => name);
  const problems = [
    ...names.filter((name, i) => names.indexOf(name) !== i).map((name) => ({
      place: "--line",
      message: cannot("fit lines", "every line must have its own name", name),
    })),
    ...(ratio ?? []).filter((name) => !names.includes(name)).map((name) => ({
      place: "--ratio",
      message: cannot("divide areas", `the line must be one of ${names.join(", ")}`, name),
    })),
  ];
  if (problems.length > 0) throw new InputError(problems);
}

function chosenRegions(regions: readonly SpectrumRegion[], label: string | undefined): SpectrumRegion[] {
  const chosen = regions.filter((region) => label === undefined || region.label === label);
  if (chosen.length > 0) return chosen;
  const labels = [...new Set(regions.map((region) => region.label))];
  const near = suggest(label ?? "", labels);
  const rule = `the label must be one of ${labels.map((one) => JSON.stringify(one)).join(", ")}${
    near ? ` (did you mean ${near}?)` : ""
  }`;
  throw new InputError([{ place: "--region", message: cannot("pick a region", rule, label) }]);
}

function lineSpectrum(
  region: SpectrumRegion,
  path: string,
  window: readonly [number, number] | undefined,
): LineSpectrum {
  const { energyKind } = region;
  if (energyKind === "unknown") {
    throw new InputError([{
      place: path,
      message: cannot(
        "fit lines",
        "the energy axis must be called kinetic or binding energy in the file",
        "unknown",
      ),
    }]);
  }
  const counts = poissonCounts(region, path);
  const [low, high] = window ?? [-Infinity, Infinity];
  const isInside = (_: number, i: number): boolean =>
    region.energiesEv[i] >= low && region.energiesEv[i] <= high;
  return { energyKind, energiesEv: region.energiesEv.filter(isInside), counts: counts.filter(isInside) };
}

/** Such as `Angle 40 degree`. */
function experimentalVariables({ metadata }: SpectrumRegion): string[] {
  const prefix = "experimental variable ";
  return Object.entries(metadata).filter(([key]) => key.startsWith(prefix))
    .map(([key, value]) => `${key.slice(prefix.length)} ${value}`);
}

function withoutCurves(fit: LinesFit): Record<string, unknown> {
  const { fitted: _, background: __, lines, areaCovariance, ...rest } = fit;
  return {
    ...rest,
    lines: lines.map(({ counts: ___, ...line }) => line),
    areaCovarianceCounts2Ev2: Array.from(areaCovariance),
  };
}

function linesFigure(
  title: string,
  { region, spectrum, fit }: { region: SpectrumRegion; spectrum: LineSpectrum; fit: LinesFit },
): Record<string, unknown> {
  const { energiesEv: x, counts, energyKind } = spectrum;
  const curve = (label: string, y: Float64Array) =>
    ({ label, x, y, yUncertainties: null, mark: "line" }) as const;
  return seriesFigure({
    title: [title, region.label, ...experimentalVariables(region).slice(0, 1)].filter(Boolean).join(", "),
    subtitle: [`verdict: ${fit.verdict}`],
    xTitle: `${energyKind === "binding" ? "Binding" : "Kinetic"} energy / eV`,
    yTitle: "Counts",
    isReversed: energyKind === "binding",
    series: [
      {
        label: "measured",
        x,
        y: counts,
        yUncertainties: counts.map((value) => Math.sqrt(value)),
        mark: "points",
      },
      curve("fit", fit.fitted),
      curve("background", fit.background),
      ...fit.lines.map((line) => curve(line.name, line.counts.map((value, i) => value + fit.background[i]))),
    ],
  });
}
