import { buildApplication, buildRouteMap, run, text_en } from "@stricli/core";
import { InputError, VERSION } from "../base/mod.ts";
import { compareCommand } from "./compare_command.ts";
import { convertCommand } from "./convert_command.ts";
import { cellCommand } from "./cell_command.ts";
import { demoCommand } from "./demo_command.ts";
import { exitCodeOf, FileError } from "./files.ts";
import { fitCommand } from "./fit_command.ts";
import { type Context, GOOD, USAGE } from "./flags.ts";
import { inspectCommand } from "./inspect_command.ts";
import type { TerminalStream } from "./progress.ts";
import { linesCommand } from "./lines_command.ts";
import { planCommand } from "./plan_command.ts";
import { reportCommand } from "./report_command.ts";
import { materialsCommand, validateCommand } from "./scenario_commands.ts";
import { seriesCommand } from "./series_command.ts";
import { simulateCommand } from "./simulate_command.ts";
import { sweepCommand } from "./sweep_command.ts";
import { sweepCollectCommand, sweepStatusCommand } from "./sweep_folder_commands.ts";

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
      convert: convertCommand,
      compare: compareCommand,
      inspect: inspectCommand,
      series: seriesCommand,
      lines: linesCommand,
      plan: planCommand,
      validate: validateCommand,
      materials: materialsCommand,
      cell: cellCommand,
      demo: demoCommand,
      report: reportCommand,
      sweep: sweepCommand,
      sweepStatus: sweepStatusCommand,
      sweepCollect: sweepCollectCommand,
    },
    docs: { brief: "Twoedge: simulate and fit the two edges of a photoemission spectrum" },
  }),
  {
    name: "twoedge",
    versionInfo: { currentVersion: VERSION },
    scanner: {
      caseStyle: "allow-kebab-for-camel",
      // Letters left out cost little, wrong ones much: a beginning finds its flag, another word none.
      distanceOptions: {
        threshold: 7,
        weights: { insertion: 1, deletion: 4, substitution: 4, transposition: 1 },
      },
    },
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
