import { buildCommand } from "@stricli/core";
import { cannot, InputError } from "../base/mod.ts";
import type { Verdict } from "../edges/mod.ts";
import { readCalibration } from "./calibration_file.ts";
import { stem, writeFiles } from "./files.ts";
import { fitFiles, fitJson, type FitStatements, MOST_ACCEPTANCE_DEG } from "./fit.ts";
import { fitEach } from "./fit_each.ts";
import { fitSvg, regionsOnFitAxis } from "./fit_figure.ts";
import { explanationText, fitText } from "./fit_text.ts";
import { type Context, count, GOOD, jsonFlag, NOT_TRUSTED, optionalNumber, outFlag, text } from "./flags.ts";
import { columnsFlag, regionFlag } from "./read.ts";
import { terminalPlot } from "./terminal_plot.ts";

/** Seed of the bootstrap unless one is given. */
const DEFAULT_SEED = 1;
/** Fewer replicates do not make a standard deviation. */
const LEAST_REPLICATES = 10;

type FitFlags = {
  photonEnergy?: number;
  bias?: number;
  axis?: "kinetic" | "binding";
  region?: readonly string[];
  columns?: readonly [string, string];
  temperature?: number;
  acceptance?: number;
  fermiLevel?: number;
  resolution?: number;
  calibration?: string;
  profile: boolean;
  bootstrap?: number;
  seed?: number;
  each: boolean;
  explain: boolean;
  plot: boolean;
  strict: boolean;
  out?: string;
  json: boolean;
};

/** A flag that is there or not. */
function isSet(brief: string): { kind: "boolean"; brief: string; default: false; withNegated: false } {
  return { kind: "boolean", brief, default: false, withNegated: false };
}

/** `fit` */
export const fitCommand = buildCommand({
  docs: {
    brief: "Fit both edges of a measured or simulated spectrum: work function with uncertainty",
    fullDescription: [
      "Fit both edges of a measured or simulated spectrum (CSV, ISO 14976, NeXus NXmpes) and print work function, maximum kinetic",
      "energy and ionization energy with uncertainties. Several files or regions of one measurement are joined; with",
      "--each every file is a measurement of its own.",
      "",
      "Examples:",
      "  twoedge fit out/clean_gold_he1/spectrum.csv",
      "  twoedge fit cutoff.csv edge.csv --photon-energy 21.218 --bias -9",
      "  twoedge fit sample.vms --region SECO --region VBM --out out/sample",
      "  twoedge fit sample.csv --calibration lines.csv --bootstrap 1000 --explain",
      "  twoedge fit map/*.csv --each --strict --out out/map",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "array",
      parameter: { parse: text, brief: "CSV, ISO 14976 or NeXus NXmpes file", placeholder: "FILE" },
      minimum: 1,
    },
    flags: {
      photonEnergy: optionalNumber("Photon energy, eV", "EV"),
      bias: optionalNumber("Sample bias, V, negative accelerates; energies are then as recorded", "V"),
      axis: {
        kind: "enum",
        values: ["kinetic", "binding"],
        brief: "Kind of energy axis",
        optional: true,
      },
      region: regionFlag,
      columns: columnsFlag,
      temperature: optionalNumber("Sample temperature, K", "K"),
      acceptance: optionalNumber("Half-angle of the analyzer's acceptance, degrees", "DEG"),
      fermiLevel: optionalNumber("Position of the Fermi level on the energy axis, eV", "EV"),
      resolution: optionalNumber("Energy resolution, full width at half maximum, eV", "EV"),
      calibration: {
        kind: "parsed",
        parse: text,
        brief: "CSV of reference lines: reference_ev, measured_ev, and standard_uncertainty_ev where known",
        placeholder: "FILE",
        optional: true,
      },
      profile: isSet("Also profile-likelihood intervals of both edges"),
      bootstrap: {
        kind: "parsed",
        parse: count,
        brief: "Also a parametric bootstrap with N replicates",
        placeholder: "N",
        optional: true,
      },
      seed: {
        kind: "parsed",
        parse: count,
        brief: "Seed of the bootstrap (default: 1)",
        placeholder: "N",
        optional: true,
      },
      each: isSet("Fit every file by itself: a CSV row each, and with --out a figure each"),
      explain: isSet("Tell in words what was done and why"),
      plot: isSet("Also draw the spectrum as text of 80 columns"),
      strict: isSet("Doubtful answers end with exit code 1 too"),
      out: {
        ...outFlag,
        brief:
          "Folder for fit.json and fit.svg, with --each for results.csv and figures (default: none written)",
      },
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: FitFlags, ...paths: string[]) {
    const statements = await fitStatements(flags);
    const isTrusted = (verdict: Verdict): boolean =>
      verdict === "good" || (verdict === "doubtful" && !flags.strict);
    if (flags.each) {
      const table = await fitEach(paths, statements, flags.out !== undefined);
      this.process.stdout.write(table.csv);
      if (flags.out !== undefined) {
        await writeFiles(flags.out, [["results.csv", table.csv], ...table.figures]);
      }
      this.exitCode = table.verdicts.every(isTrusted) ? GOOD : NOT_TRUSTED;
      return;
    }
    const run = await fitFiles(paths, statements);
    const json = `${JSON.stringify(fitJson(run.result), null, 2)}\n`;
    this.process.stdout.write(flags.json ? json : `${fitText(run.result)}\n`);
    if (flags.plot && !flags.json) {
      const { cutoffEv, fermiEdgeEv } = run.result;
      const marks = ([["secondary cutoff", cutoffEv], ["Fermi edge", fermiEdgeEv]] as const).flatMap((
        [label, edge],
      ) => edge === null ? [] : [{ label, energyEv: edge.value }]);
      for (const region of regionsOnFitAxis(run)) {
        this.process.stdout.write(`${terminalPlot({ ...region, marks })}\n`);
      }
    }
    if (flags.explain && !flags.json) {
      this.process.stdout.write(`What was done and why:\n${explanationText(run.result)}\n`);
    }
    if (flags.out !== undefined) {
      const written = await writeFiles(flags.out, [
        ["fit.json", json],
        ["fit.svg", await fitSvg(run, run.title || paths.map(stem).join(", "))],
      ]);
      if (!flags.json) this.process.stdout.write(`Wrote ${written.join(", ")}\n`);
    }
    this.exitCode = isTrusted(run.result.verdict) ? GOOD : NOT_TRUSTED;
  },
});

/** Checks what the argument parser cannot: ranges, and flags that exclude each other. */
async function fitStatements(flags: FitFlags): Promise<FitStatements> {
  const ranges = [
    ["--photon-energy", flags.photonEnergy, 1, 20000, "eV"],
    ["--bias", flags.bias, -1000, 1000, "V"],
    ["--temperature", flags.temperature, 0, 3000, "K"],
    ["--acceptance", flags.acceptance, 0, MOST_ACCEPTANCE_DEG, "degrees"],
    ["--fermi-level", flags.fermiLevel, -1000, 20000, "eV"],
    ["--resolution", flags.resolution, 1e-4, 10, "eV"],
    ["--bootstrap", flags.bootstrap, LEAST_REPLICATES, 1e6, "replicates"],
  ] as const;
  const problems = ranges.flatMap(([place, value, low, high, unit]) =>
    value === undefined || (value >= low && value <= high) ? [] : [{
      place,
      message: `Cannot fit as ${place} must be in ${low}..${high} ${unit}: current value is ${value} ${unit}`,
    }]
  );
  if (flags.each && (flags.json || flags.explain || flags.plot)) {
    const other = flags.json ? "--json" : flags.explain ? "--explain" : "--plot";
    const message = cannot("fit", `${other} must not be given with --each, which prints CSV`, other);
    throw new InputError([{ place: other, message }]);
  }
  if (problems.length > 0) throw new InputError(problems);
  const defined = {
    photonEnergyEv: flags.photonEnergy,
    biasV: flags.bias,
    axis: flags.axis,
    regions: flags.region,
    columns: flags.columns,
    temperatureK: flags.temperature,
    acceptanceHalfAngleDeg: flags.acceptance,
    fermiLevelEv: flags.fermiLevel,
    resolutionFwhmEv: flags.resolution,
    scaleGain: flags.calibration === undefined ? undefined : (await readCalibration(flags.calibration)).gain,
    profile: flags.profile || undefined,
    bootstrap: flags.bootstrap === undefined
      ? undefined
      : { replicates: flags.bootstrap, seed: flags.seed ?? DEFAULT_SEED },
  };
  return Object.fromEntries(
    Object.entries(defined).filter(([, value]) => value !== undefined),
  ) as FitStatements;
}
