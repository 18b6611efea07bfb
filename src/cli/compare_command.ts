import { buildCommand } from "@stricli/core";
import process from "node:process";
import type { MatchedValue, PartTest } from "../compare/mod.ts";
import { compareFigure, formatEstimate, renderSvg } from "../report/mod.ts";
import { compareCsv, compareFiles, compareJson, type Comparison } from "./compare.ts";
import type { FreePath } from "./compare_parameters.ts";
import { writeFiles } from "./files.ts";
import {
  type Context,
  decimal,
  GOOD,
  jsonFlag,
  NOT_TRUSTED,
  outFlag,
  scenarioArgument,
  setFlag,
  text,
  workersFlag,
} from "./flags.ts";
import { progressLine } from "./progress.ts";
import { type ColumnPair, columnsFlag, regionFlag } from "./read.ts";

type CompareFlags = {
  free?: readonly FreePath[];
  region?: readonly string[];
  axis?: "kinetic" | "binding";
  columns?: ColumnPair;
  suspect?: readonly string[];
  set?: readonly string[];
  workers?: number;
  out?: string;
  json: boolean;
};

/** `compare` */
export const compareCommand = buildCommand({
  docs: {
    brief:
      "Compare a measured spectrum with a scenario: where they differ, and which single change explains it",
    fullDescription: [
      "Compare a measured spectrum with the expectation of a scenario.",
      "",
      "1. Offset and gain of the energy axis, an extra Gaussian width, intensity and a constant background are fitted to the",
      "   counts (maximum likelihood); the cutoff, the middle and the Fermi edge are tested apart. A gain or a width that",
      "   the instrument cannot have is a difference of the sample.",
      "2. Suspects: one change of the scenario at a time, only offset and intensity free, ranked by how much each explains,",
      "   penalized for its freedom (QAICc). A ranking knows only what is on its list.",
      "3. --free PATH=LO:HI fits numbers of the scenario, offset, intensity and background free.",
      "",
      "Spectra at other values are simulated at a few nodes and interpolated; uncertainties include the noise of the",
      "simulation. Exit code 1 when the alignment or the fit gave no answer; a difference is an answer.",
      "",
      "Examples:",
      "  twoedge compare measured.csv scenarios/clean_gold_he1.json",
      "  twoedge compare measured.vms scenario.json --region valence --axis binding --out out/compare",
      "  twoedge compare measured.csv scenario.json --suspect none --free sample.workFunctionEv=4.9:5.3",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [
        { parse: text, brief: "Measured spectrum: CSV, ISO 14976 or NXmpes", placeholder: "MEASURED" },
        scenarioArgument,
      ],
    },
    flags: {
      free: {
        kind: "parsed",
        parse: freePath,
        brief: "Fit a number of the scenario in a range, such as sample.workFunctionEv=4.9:5.3; repeatable",
        placeholder: "PATH=LO:HI",
        variadic: true,
        optional: true,
      },
      region: regionFlag,
      axis: {
        kind: "enum",
        values: ["kinetic", "binding"],
        brief: "Kind of energy axis, where the file does not say",
        optional: true,
      },
      columns: columnsFlag,
      suspect: {
        kind: "parsed",
        parse: text,
        brief: "Try only this suspect, or none; repeatable (default: all)",
        placeholder: "NAME",
        variadic: true,
        optional: true,
      },
      set: setFlag,
      workers: workersFlag,
      out: {
        ...outFlag,
        brief: "Folder for compare.json, compare.csv and compare.svg (default: none written)",
      },
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: CompareFlags, measured: string, scenario: string) {
    const { stdout, stderr } = this.process;
    const stop = new AbortController();
    const onInterrupt = (): void => stop.abort();
    process.on("SIGINT", onInterrupt);
    const progress = progressLine("Simulating", stderr, () => performance.now());
    let comparison: Comparison | null;
    try {
      comparison = await compareFiles(measured, scenario, {
        set: flags.set ?? [],
        regions: flags.region ?? [],
        ...(flags.axis && { axis: flags.axis }),
        ...(flags.columns && { columns: flags.columns }),
        free: flags.free ?? [],
        suspects: flags.suspect?.includes("none") ? [] : flags.suspect ?? null,
        workers: flags.workers ?? Math.max(1, navigator.hardwareConcurrency),
        signal: stop.signal,
        onProgress: progress.update,
      });
    } finally {
      progress.end();
      process.off("SIGINT", onInterrupt);
    }
    if (comparison === null) {
      this.exitCode = NOT_TRUSTED;
      stderr.write("Stopped: nothing was compared\n");
      return;
    }
    const json = `${JSON.stringify(compareJson(comparison), null, 2)}\n`;
    stdout.write(flags.json ? json : `${compareText(comparison).join("\n")}\n`);
    if (flags.out !== undefined) {
      const written = await writeFiles(flags.out, [
        ["compare.json", json],
        ["compare.csv", compareCsv(comparison)],
        ["compare.svg", await compareSvg(comparison)],
      ]);
      if (!flags.json) stdout.write(`Wrote ${written.join(", ")}\n`);
    }
    const verdicts = [comparison.agreement, ...(comparison.fitted ? [comparison.fitted.agreement] : [])];
    this.exitCode = verdicts.some(({ verdict }) => verdict === "failed") ? NOT_TRUSTED : GOOD;
  },
});

/** Parses `PATH=LO:HI`. */
function freePath(value: string): FreePath {
  const [, path, low, high] = /^([^=]+)=([^:]+):([^:]+)$/.exec(value) ?? [];
  const range = path === undefined ? [NaN, NaN] : [decimal(low), decimal(high)];
  if (!(range[0] < range[1])) {
    throw new SyntaxError(`must be PATH=LO:HI with LO < HI, not ${JSON.stringify(value)}`);
  }
  return { path, low: range[0], high: range[1] };
}

function compareText(comparison: Comparison): string[] {
  const { agreement, axis, alignment, parts, suspects, notTried, fitted, histories } = comparison;
  return [
    `Verdict: ${agreement.verdict}`,
    ...agreement.reasons.map((reason) => `  because ${reason}`),
    "Alignment (offset, gain, width, background, intensity free):",
    ...alignment.map(valueLine),
    ...parts.map(partLine),
    ...(fitted === null ? [] : [
      `Fitted scenario parameters: ${fitted.agreement.verdict}`,
      ...fitted.agreement.reasons.map((reason) => `  because ${reason}`),
      ...fitted.values.map(valueLine),
      ...fitted.parts.map(partLine),
    ]),
    ...(suspects === null ? [] : [
      `Suspects: ${suspects.conclusion}`,
      `  chi-square of the scenario as it is, offset and intensity free: ${
        suspects.chiSquare.toFixed(0)
      } for ${suspects.degreesOfFreedom}`,
      ...suspects.suspects.map((suspect) => {
        const { best, unit, scenarioValue, criterionChange, explainedShare } = suspect;
        const value = estimateText(best, unit);
        return `  ${suspect.name.padEnd(46)}${value.padEnd(30)}scenario ${
          String(Number(scenarioValue.toPrecision(6))).padEnd(9)
        } explains ${(100 * explainedShare).toFixed(0).padStart(3)} %, criterion ${
          criterionChange.toFixed(1)
        }`;
      }),
    ]),
    ...notTried.map(({ name, reason }) => `  not tried: ${name} (${reason.split("\n")[0]})`),
    `Used: ${axis.how}; ${histories.base} histories, ${histories.change} for each change`,
    ...axis.others.map((other) =>
      `Caution: the file does not say how its energies are counted; ${other} fits worse`
    ),
    ...[...agreement.cautions, ...(fitted?.agreement.cautions ?? [])].map((caution) => `Caution: ${caution}`),
  ];
}

function valueLine(value: MatchedValue): string {
  const unit = /Ev$/.test(value.name) ? "eV" : "";
  return `  ${value.name.padEnd(34)}${estimateText(value, unit)}`;
}

function estimateText({ value, standardUncertainty }: MatchedValue, unit: string): string {
  return standardUncertainty === null
    ? `${value.toPrecision(4)} ${unit} (no uncertainty)`
    : formatEstimate({ value, standardUncertainty }, unit);
}

function partLine(
  { part, chiSquare, degreesOfFreedom, chiSquareProbability, runsProbability }: PartTest,
): string {
  return `  ${part.padEnd(12)} chi-square ${chiSquare.toFixed(0)} for ${
    degreesOfFreedom.toFixed(0)
  }, probability ${chiSquareProbability.toPrecision(2)}; runs test ${runsProbability.toPrecision(2)}`;
}

function compareSvg({ title, measured, regions, agreement, suspects, curves }: Comparison): Promise<string> {
  const { channels, match } = curves;
  return renderSvg(compareFigure({
    title: `${measured} and ${title}`,
    subtitle: [`verdict: ${agreement.verdict}`, ...(suspects === null ? [] : [suspects.conclusion])],
    regions: regions.map((label, r) => {
      const pick = (values: Float64Array) => values.filter((_, i) => channels.regions[i] === r);
      return {
        label,
        energiesEv: pick(channels.energiesEv),
        counts: pick(channels.counts),
        expected: pick(match.expected),
        standardErrors: pick(match.standardErrors),
      };
    }),
    suspects: (suspects?.suspects ?? []).map(({ name, drop }) => ({
      name,
      drop,
      isNamed: suspects?.named.includes(name) ?? false,
    })),
  }));
}
