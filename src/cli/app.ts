import { buildApplication, buildCommand, buildRouteMap, run, text_en } from "@stricli/core";
import process from "node:process";
import { InputError, VERSION } from "../base/mod.ts";
import { listMaterialValues, material, MATERIAL_IDS } from "../data/mod.ts";
import { exitCodeOf, FileError, stem, writeFiles } from "./files.ts";
import { fitFiles, fitJson, type FitStatements, fitSvg, fitText, noticeText } from "./fit.ts";
import { progressLine, type TerminalStream } from "./progress.ts";
import { HISTORIES_PER_BATCH } from "../transport/mod.ts";
import { loadScenario, simulate, type Simulation, spectrumCsv, spectrumSvg } from "./simulate.ts";

/** What a command writes to and reports its exit code through. */
interface Context {
  readonly process: {
    readonly stdout: TerminalStream;
    readonly stderr: TerminalStream;
  };
  exitCode: number;
}

/** Exit codes: the whole contract of the command line. */
const GOOD = 0;
const NOT_TRUSTED = 1;
const USAGE = 2;

function count(text: string): number {
  const value = Number(text);
  if (!/^\d+(\.\d+)?(e\d+)?$/i.test(text.trim()) || !Number.isSafeInteger(value) || value < 1) {
    throw new SyntaxError(`must be a whole number >= 1, not ${JSON.stringify(text)}`);
  }
  return value;
}

/** A number as people write it: an empty text or a hexadecimal one is none. */
function decimal(text: string): number {
  if (!/^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(text) || !Number.isFinite(Number(text))) {
    throw new SyntaxError(`must be a decimal number, not ${JSON.stringify(text)}`);
  }
  return Number(text);
}

function columnPair(text: string): readonly [string, string] {
  const names = text.split(",").map((name) => name.trim());
  if (names.length !== 2 || names.includes("")) {
    throw new SyntaxError(`must be two column names ENERGY,COUNTS, not ${JSON.stringify(text)}`);
  }
  return [names[0], names[1]];
}

const text = (value: string): string => value;
const outFlag = {
  kind: "parsed",
  parse: text,
  brief: "Folder to write into",
  placeholder: "DIR",
  optional: true,
} as const;
const jsonFlag = {
  kind: "boolean",
  brief: "Print one JSON object on standard output and nothing else",
  default: false,
  withNegated: false,
} as const;
const setFlag = {
  kind: "parsed",
  parse: text,
  brief: "Override a scenario value, such as sample.temperatureK=77; repeatable",
  placeholder: "PATH=VALUE",
  variadic: true,
  optional: true,
} as const;
const workersFlag = {
  kind: "parsed",
  parse: count,
  brief: "Worker threads (default: one per processor)",
  placeholder: "N",
  optional: true,
} as const;
const scenarioArgument = { parse: text, brief: "Scenario file (JSON)", placeholder: "SCENARIO" } as const;

type SimulateFlags = {
  out?: string;
  seed?: number;
  histories?: number;
  workers?: number;
  set?: readonly string[];
  json: boolean;
};

const simulateCommand = buildCommand({
  docs: {
    brief: "Simulate the spectrum of a scenario: spectrum.csv, result.json, spectrum.svg",
    fullDescription: [
      "Simulate the spectrum of a scenario and write spectrum.csv, result.json and spectrum.svg. Ctrl-C stops early, writes",
      "what is done so far (result.json then says complete: false) and ends with exit code 1.",
      "",
      "Examples:",
      "  twoedge simulate scenarios/clean_gold_he1.json",
      "  twoedge simulate scenarios/clean_gold_he1.json --set sample.temperatureK=77 --out out/cold",
    ].join("\n"),
  },
  parameters: {
    positional: { kind: "tuple", parameters: [scenarioArgument] },
    flags: {
      out: { ...outFlag, brief: "Folder to write into (default: out/ and the scenario's name)" },
      seed: {
        kind: "parsed",
        parse: decimal,
        brief: "Seed of all random numbers",
        placeholder: "N",
        optional: true,
      },
      histories: {
        kind: "parsed",
        parse: decimal,
        brief: "Photons to follow",
        placeholder: "N",
        optional: true,
      },
      workers: workersFlag,
      set: setFlag,
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: SimulateFlags, path: string) {
    const overrides = [
      ...(flags.set ?? []),
      ...(flags.seed === undefined ? [] : [`simulation.seed=${flags.seed}`]),
      ...(flags.histories === undefined ? [] : [`simulation.histories=${flags.histories}`]),
    ];
    const simulation = await runScenario(this, path, overrides, flags.workers);
    if (simulation === null) return;
    const folder = flags.out ?? `out/${stem(path)}`;
    const written = await writeSimulation(simulation, folder);
    if (flags.json) {
      this.process.stdout.write(`${JSON.stringify(simulation.result, null, 2)}\n`);
      return;
    }
    const { result } = simulation;
    this.process.stdout.write([
      `${result.title}: ${result.histories} histories, scenario ${result.scenarioHash}`,
      `  work function put in       ${result.truth.workFunctionEv.toFixed(3)} eV`,
      `  cutoff / Fermi edge        ${result.truth.cutoffEv.toFixed(3)} / ${
        result.truth.fermiEdgeEv.toFixed(3)
      } eV as recorded`,
      `  highest expected counts    ${result.peakCounts.toPrecision(4)} in a channel`,
      `  Monte Carlo standard error at most ${
        (100 * result.worstRelativeStandardError).toPrecision(2)
      } % above a tenth of that`,
      `Wrote ${written.join(", ")}`,
      "",
    ].join("\n"));
  },
});

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

const optionalNumber = (brief: string, placeholder: string) =>
  ({ kind: "parsed", parse: decimal, brief, placeholder, optional: true }) as const;

const fitCommand = buildCommand({
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

const validateCommand = buildCommand({
  docs: { brief: "Check a scenario and say what will hide or disturb the edges" },
  parameters: {
    positional: { kind: "tuple", parameters: [scenarioArgument] },
    flags: { set: setFlag, json: jsonFlag },
  },
  async func(this: Context, flags: { set?: readonly string[]; json: boolean }, path: string) {
    const { resolved, hash } = await loadScenario(path, flags.set ?? []);
    const warnings = resolved.warnings.map(noticeText);
    this.process.stdout.write(
      flags.json
        ? `${JSON.stringify({ valid: true, scenarioHash: hash, warnings }, null, 2)}\n`
        : [`${path} is valid, scenario ${hash}`, ...warnings.map((warning) => `Warning: ${warning}`), ""]
          .join("\n"),
    );
  },
});

const materialsCommand = buildCommand({
  docs: { brief: "List the built-in materials, or every number of one with its source" },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [{ parse: text, brief: "Material, such as Au", placeholder: "NAME", optional: true }],
    },
    flags: { json: jsonFlag },
  },
  func(this: Context, flags: { json: boolean }, name?: string) {
    const values = (name === undefined ? MATERIAL_IDS : [name]).map((id) => {
      const chosen = material(id);
      return { id: chosen.id, name: chosen.name, values: listMaterialValues(chosen) };
    });
    const lines = name === undefined
      ? values.map((entry) => `${entry.id.padEnd(4)}${entry.name}`)
      : values[0].values.map((row) =>
        `${row.quantity}: ${row.value} ${row.unit} [${row.confidence}] ${row.source}`
      );
    this.process.stdout.write(flags.json ? `${JSON.stringify(values, null, 2)}\n` : `${lines.join("\n")}\n`);
  },
});

const DEMO_SCENARIO = new URL("../../scenarios/clean_gold_he1.json", import.meta.url);

const demoCommand = buildCommand({
  docs: { brief: "Simulate clean gold under a helium lamp, fit it, print the answer beside the truth" },
  parameters: { flags: { out: outFlag, workers: workersFlag } },
  async func(this: Context, flags: { out?: string; workers?: number }) {
    const { fileURLToPath } = await import("node:url");
    const path = fileURLToPath(DEMO_SCENARIO);
    const simulation = await runScenario(this, path, [], flags.workers);
    if (simulation === null) return;
    const folder = flags.out ?? "out/demo";
    const written = await writeSimulation(simulation, folder);
    const run = await fitFiles([written[0]], {});
    written.push(
      ...await writeFiles(folder, [
        ["fit.json", `${JSON.stringify(fitJson(run.result), null, 2)}\n`],
        ["fit.svg", await fitSvg(run, `${simulation.result.title} (simulated)`)],
      ]),
    );
    const { truth } = simulation.result;
    this.process.stdout.write([
      simulation.result.title,
      "",
      fitText(run.result),
      "",
      `Put in: work function ${truth.workFunctionEv.toFixed(3)} eV, maximum kinetic energy ${
        truth.maxKineticEnergyEv.toFixed(3)
      } eV`,
      `Wrote ${written.join(", ")}`,
      "",
    ].join("\n"));
    if (run.result.verdict === "failed") this.exitCode = NOT_TRUSTED;
  },
});

/**
 * Loads and runs a scenario with progress. Ctrl-C stops it: the batches done so far are kept, and the exit code says that
 * they are not what was asked for; null when there are fewer than the two batches that a standard error needs.
 */
async function runScenario(
  context: Context,
  path: string,
  overrides: readonly string[],
  workers: number | undefined,
): Promise<Simulation | null> {
  const { stderr } = context.process;
  const loaded = await loadScenario(path, overrides);
  const stop = new AbortController();
  const onInterrupt = (): void => stop.abort();
  process.on("SIGINT", onInterrupt);
  for (const warning of loaded.resolved.warnings) stderr.write(`Warning: ${noticeText(warning)}\n`);
  const progress = progressLine("Simulating", stderr, () => performance.now());
  try {
    const simulation = await simulate(loaded, {
      workers: workers ?? Math.max(1, navigator.hardwareConcurrency),
      signal: stop.signal,
      onProgress: progress.update,
    });
    progress.end();
    if (simulation.result.complete) return simulation;
    context.exitCode = NOT_TRUSTED;
    stderr.write(`Stopped after ${simulation.result.histories} histories\n`);
    return simulation.result.histories > HISTORIES_PER_BATCH ? simulation : null;
  } finally {
    progress.end();
    process.off("SIGINT", onInterrupt);
  }
}

async function writeSimulation(simulation: Simulation, folder: string): Promise<string[]> {
  return await writeFiles(folder, [
    ["spectrum.csv", spectrumCsv(simulation)],
    ["result.json", `${JSON.stringify(simulation.result, null, 2)}\n`],
    ["spectrum.svg", await spectrumSvg(simulation)],
  ]);
}

/** What a person is told of an error: the message alone for their mistakes, the stack for ours. */
function errorText(error: unknown): string {
  if (error instanceof InputError || error instanceof FileError) return error.message;
  return `Twoedge has a defect: ${error instanceof Error ? error.stack : error}`;
}

const application = buildApplication<Context>(
  buildRouteMap({
    routes: {
      simulate: simulateCommand,
      fit: fitCommand,
      validate: validateCommand,
      materials: materialsCommand,
      demo: demoCommand,
    },
    docs: { brief: "Twoedge: simulate and fit the two edges of a photoemission spectrum" },
  }),
  {
    name: "twoedge",
    versionInfo: { currentVersion: VERSION },
    scanner: { caseStyle: "allow-kebab-for-camel" },
    documentation: { disableAnsiColor: true },
    determineExitCode: exitCodeOf,
    localization: { text: { ...text_en, exceptionWhileRunningCommand: errorText } },
  },
);

/**
 * Runs the command line.
 *
 * @param args Arguments after the program's name.
 * @param streams Standard output and standard error.
 * @returns Exit code: 0 good, 1 ran but not to be trusted, 2 bad input or usage, 3 could not read or write.
 */
export async function runCli(
  args: readonly string[],
  streams: { readonly stdout: TerminalStream; readonly stderr: TerminalStream },
): Promise<number> {
  const context: Context = { process: { stdout: streams.stdout, stderr: streams.stderr }, exitCode: GOOD };
  const outer: { stdout: TerminalStream; stderr: TerminalStream; exitCode?: number | string | null } = {
    ...streams,
  };
  await run(application, args, { process: outer, forCommand: () => context });
  const code = Number(outer.exitCode ?? 0);
  // The argument parser reports its own usage errors as negative codes (as bytes: above 200).
  if (code < 0 || code > 200) return USAGE;
  return code !== 0 ? code : context.exitCode;
}
