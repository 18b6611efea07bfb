import { buildCommand } from "@stricli/core";
import process from "node:process";
import { HISTORIES_PER_BATCH } from "../transport/mod.ts";
import { depthsSvg, strongestLevels } from "./depths_svg.ts";
import { stem, writeFiles } from "./files.ts";
import { noticeText } from "./fit.ts";
import {
  type Context,
  decimal,
  jsonFlag,
  NOT_TRUSTED,
  outFlag,
  scenarioArgument,
  setFlag,
  text,
  workersFlag,
} from "./flags.ts";
import { lossesSvg } from "./losses_svg.ts";
import { progressLine } from "./progress.ts";
import { workFunctionsText } from "./report_content.ts";
import {
  loadScenario,
  simulate,
  type SimulateOptions,
  type Simulation,
  spectrumCsv,
  spectrumSvg,
} from "./simulate.ts";
import { terminalPlot } from "./terminal_plot.ts";

type SimulateFlags = {
  out?: string;
  seed?: number;
  histories?: number;
  until?: number;
  checkpoint?: string;
  replicate?: number;
  workers?: number;
  set?: readonly string[];
  plot: boolean;
  json: boolean;
};

/** `simulate` */
export const simulateCommand = buildCommand({
  docs: {
    brief: "Simulate the spectrum of a scenario: spectrum.csv, result.json, spectrum.svg, losses.svg",
    fullDescription: [
      "Simulate the spectrum of a scenario and write spectrum.csv, result.json, spectrum.svg and losses.svg, what the",
      "electrons went through; where core levels give lines, also depths.svg, the depths that their electrons come from.",
      "Ctrl-C stops early, writes what is done so far (result.json then says complete: false) and ends with exit code 1.",
      "",
      "--until 0.5% follows photons until the relative standard error of the worst channel is below that, among channels",
      "with more than a tenth of the highest counts; --histories is then the most that may be followed.",
      "",
      "--checkpoint FILE keeps the sums. The same command with more --histories, a smaller --until or other settings of",
      "the instrument (resolution, window, step, dwell, flux, dead time) goes on from there, to the same bits as one long",
      "run. Other changes are refused.",
      "",
      "Examples:",
      "  twoedge simulate scenarios/clean_gold_he1.json",
      "  twoedge simulate scenarios/clean_gold_he1.json --set sample.temperatureK=77 --out out/cold",
      "  twoedge simulate scenarios/clean_gold_he1.json --until 0.5% --checkpoint out/gold.sums",
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
        brief: "Photons to follow; with --until, at most",
        placeholder: "N",
        optional: true,
      },
      until: {
        kind: "parsed",
        parse: precision,
        brief: "Relative standard error of the worst channel at which to stop, such as 0.5%",
        placeholder: "PERCENT",
        optional: true,
      },
      checkpoint: {
        kind: "parsed",
        parse: text,
        brief: "File that keeps the sums, to go on from later",
        placeholder: "FILE",
        optional: true,
      },
      replicate: {
        kind: "parsed",
        parse: replicateNumber,
        brief: "Which independent draw of the counting noise (default: 0)",
        placeholder: "N",
        optional: true,
      },
      workers: workersFlag,
      set: setFlag,
      plot: {
        kind: "boolean",
        brief: "Also draw the spectrum as text of 80 columns",
        default: false,
        withNegated: false,
      },
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: SimulateFlags, path: string) {
    const overrides = [
      ...(flags.set ?? []),
      ...(flags.seed === undefined ? [] : [`simulation.seed=${flags.seed}`]),
      ...(flags.histories === undefined ? [] : [`simulation.histories=${flags.histories}`]),
    ];
    const { until, histories, checkpoint, replicate } = flags;
    const simulation = await runScenario(this, path, overrides, flags.workers, {
      ...(until !== undefined && { until }),
      ...(until !== undefined && histories !== undefined && { mostHistories: histories }),
      ...(checkpoint !== undefined && { checkpoint }),
      ...(replicate !== undefined && { replicate }),
    });
    if (simulation === null) return;
    const folder = flags.out ?? `out/${stem(path)}`;
    const written = await writeSimulation(simulation, folder);
    if (flags.json) {
      this.process.stdout.write(`${JSON.stringify(simulation.result, null, 2)}\n`);
      return;
    }
    const { result } = simulation;
    const spread = workFunctionsText(result.patches);
    const edges = `  cutoff / Fermi edge        ${result.truth.cutoffEv.toFixed(3)} / ${
      result.truth.fermiEdgeEv.toFixed(3)
    } eV as recorded${spread && ", cutoff of that mean"}`;
    this.process.stdout.write([
      `${result.title}: ${result.histories} histories, scenario ${result.scenarioHash}`,
      `  work function put in       ${result.truth.workFunctionEv.toFixed(3)} eV${spread && `, ${spread}`}`,
      ...(simulation.resolved.fast === null ? [edges] : levelLines(simulation)),
      `  highest expected counts    ${result.peakCounts.toPrecision(4)} in a channel`,
      `  Monte Carlo standard error at most ${
        (100 * result.worstRelativeStandardError).toPrecision(2)
      } % above a tenth of that`,
      ...(flags.plot ? [simulationPlot(simulation)] : []),
      `Wrote ${written.join(", ")}`,
      "",
    ].join("\n"));
  },
});

/** The core levels that give electrons, strongest first: under X-rays the window seldom holds an edge. */
function levelLines({ expected }: Simulation): string[] {
  const { shown, note } = strongestLevels(expected);
  return [
    ...shown.map(({ name, kineticEnergyEv, meanEscapeDepthNm }) =>
      `  ${name.padEnd(26)} ${kineticEnergyEv.toFixed(3)} eV as recorded, mean escape depth ${
        meanEscapeDepthNm.toFixed(2)
      } nm`
    ),
    ...(shown.length === 0
      ? ["  no core level gives electrons in the window"]
      : note.map((line) => `  ${line}`)),
  ];
}

function simulationPlot({ counts, expected, resolved, result }: Simulation): string {
  return terminalPlot({
    energiesEv: expected.kineticEnergiesEv,
    counts,
    marks: resolved.fast === null
      ? [
        { label: "secondary cutoff", energyEv: result.truth.cutoffEv },
        { label: "Fermi edge", energyEv: result.truth.fermiEdgeEv },
      ]
      : strongestLevels(expected).shown.map(({ name, kineticEnergyEv }) => ({
        label: name,
        energyEv: kineticEnergyEv,
      })),
  });
}

/** Parses `0.5%` as 0.005; a number without the sign could mean either. */
function precision(text: string): number {
  const value = text.endsWith("%") ? decimal(text.slice(0, -1)) / 100 : NaN;
  if (!(value > 0 && value < 1)) {
    throw new SyntaxError(`must be a percentage > 0% and < 100% such as 0.5%, not ${JSON.stringify(text)}`);
  }
  return value;
}

/** Parses a whole number 0..2^53 - 1. */
function replicateNumber(text: string): number {
  const value = decimal(text);
  if (!Number.isSafeInteger(value) || value < 0) {
    throw new SyntaxError(`must be a whole number 0..2^53 - 1, not ${JSON.stringify(text)}`);
  }
  return value;
}

/**
 * Loads and runs a scenario with progress. Ctrl-C stops it: the batches done so far are kept, and the exit code says that
 * they are not what was asked for; null when there are fewer than the two batches that a standard error needs.
 */
export async function runScenario(
  context: Context,
  path: string,
  overrides: readonly string[],
  workers: number | undefined,
  options: Pick<SimulateOptions, "until" | "mostHistories" | "checkpoint" | "replicate"> = {},
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
      ...options,
      workers: workers ?? Math.max(1, navigator.hardwareConcurrency),
      signal: stop.signal,
      onProgress: progress.update,
    });
    progress.end();
    if (simulation.result.complete) return simulation;
    context.exitCode = NOT_TRUSTED;
    stderr.write(`Stopped after ${simulation.result.histories} histories\n`);
    if (options.checkpoint !== undefined) {
      stderr.write(`The same command goes on from the sums in ${options.checkpoint}\n`);
    }
    return simulation.result.histories > HISTORIES_PER_BATCH ? simulation : null;
  } finally {
    progress.end();
    process.off("SIGINT", onInterrupt);
  }
}

/** Writes what a simulation gives. */
export async function writeSimulation(simulation: Simulation, folder: string): Promise<string[]> {
  const losses = await lossesSvg(simulation);
  const depths = await depthsSvg(simulation);
  return await writeFiles(folder, [
    ["spectrum.csv", spectrumCsv(simulation)],
    ["result.json", `${JSON.stringify(simulation.result, null, 2)}\n`],
    ["spectrum.svg", await spectrumSvg(simulation)],
    ...(losses === null ? [] : [["losses.svg", losses] as const]),
    ...(depths === null ? [] : [["depths.svg", depths] as const]),
  ]);
}
