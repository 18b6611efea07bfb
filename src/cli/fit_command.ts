import { buildCommand } from "@stricli/core";
import { InputError } from "../base/mod.ts";
import { stem, writeFiles } from "./files.ts";
import { fitFiles, fitJson, type FitStatements, fitSvg, fitText } from "./fit.ts";
import { type Context, GOOD, jsonFlag, NOT_TRUSTED, optionalNumber, outFlag, text } from "./flags.ts";

function columnPair(text: string): readonly [string, string] {
  const names = text.split(",").map((name) => name.trim());
  if (names.length !== 2 || names.includes("")) {
    throw new SyntaxError(`must be two column names ENERGY,COUNTS, not ${JSON.stringify(text)}`);
  }
  return [names[0], names[1]];
}

type FitFlags = {
  photonEnergy?: number;
  bias?: number;
  axis?: "kinetic" | "binding";
  region?: readonly string[];
  columns?: readonly [string, string];
  temperature?: number;
  acceptance?: number;
  fermiLevel?: number;
  out?: string;
  json: boolean;
};

/** `fit` */
export const fitCommand = buildCommand({
  docs: {
    brief: "Fit both edges of a measured or simulated spectrum: work function with uncertainty",
    fullDescription: [
      "Fit both edges of a measured or simulated spectrum (CSV or ISO 14976) and print work function, maximum kinetic",
      "energy and ionization energy with uncertainties. Several files or regions of one measurement are joined.",
      "",
      "Examples:",
      "  twoedge fit out/clean_gold_he1/spectrum.csv",
      "  twoedge fit cutoff.csv edge.csv --photon-energy 21.218 --bias -9",
      "  twoedge fit sample.vms --region SECO --region VBM --out out/sample",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "array",
      parameter: { parse: text, brief: "CSV or ISO 14976 file", placeholder: "FILE" },
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
      region: {
        kind: "parsed",
        parse: text,
        brief: "Use only the region with this label; repeatable",
        placeholder: "LABEL",
        variadic: true,
        optional: true,
      },
      columns: {
        kind: "parsed",
        parse: columnPair,
        brief: "Names of the energy and the counts column of a CSV file",
        placeholder: "ENERGY,COUNTS",
        optional: true,
      },
      temperature: optionalNumber("Sample temperature, K", "K"),
      acceptance: optionalNumber("Half-angle of the analyzer's acceptance, degrees", "DEG"),
      fermiLevel: optionalNumber("Position of the Fermi level on the energy axis, eV", "EV"),
      out: { ...outFlag, brief: "Folder for fit.json and fit.svg (default: none written)" },
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: FitFlags, ...paths: string[]) {
    const run = await fitFiles(paths, fitStatements(flags));
    const json = `${JSON.stringify(fitJson(run.result), null, 2)}\n`;
    this.process.stdout.write(flags.json ? json : `${fitText(run.result)}\n`);
    if (flags.out !== undefined) {
      const written = await writeFiles(flags.out, [
        ["fit.json", json],
        ["fit.svg", await fitSvg(run, paths.map(stem).join(", "))],
      ]);
      if (!flags.json) this.process.stdout.write(`Wrote ${written.join(", ")}\n`);
    }
    this.exitCode = run.result.verdict === "failed" ? NOT_TRUSTED : GOOD;
  },
});

/** Checks what the argument parser cannot: ranges. */
function fitStatements(flags: FitFlags): FitStatements {
  const ranges = [
    ["--photon-energy", flags.photonEnergy, 1, 20000, "eV"],
    ["--bias", flags.bias, -1000, 1000, "V"],
    ["--temperature", flags.temperature, 0, 3000, "K"],
    ["--acceptance", flags.acceptance, 0, 90, "degrees"],
    ["--fermi-level", flags.fermiLevel, -1000, 20000, "eV"],
  ] as const;
  const problems = ranges.flatMap(([place, value, low, high, unit]) =>
    value === undefined || (value >= low && value <= high) ? [] : [{
      place,
      message: `Cannot fit as ${place} must be in ${low}..${high} ${unit}: current value is ${value} ${unit}`,
    }]
  );
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
  };
  return Object.fromEntries(
    Object.entries(defined).filter(([, value]) => value !== undefined),
  ) as FitStatements;
}
