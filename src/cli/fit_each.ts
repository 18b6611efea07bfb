import type { Estimate } from "../base/mod.ts";
import type { Verdict } from "../edges/mod.ts";
import { exitCodeOf, stem } from "./files.ts";
import { fitFiles, type FitRun, type FitStatements } from "./fit.ts";
import { fitSvg } from "./fit_figure.ts";

/** What fitting many independent files gave. */
export interface FitTable {
  /** One header row and one row a file. */
  readonly csv: string;
  /** Name and text of one figure for each file that could be read. */
  readonly figures: readonly (readonly [name: string, svg: string])[];
  /** Verdict of each file; `failed` for one that could not be read. */
  readonly verdicts: readonly Verdict[];
}

const QUANTITIES = [
  ["work_function", "workFunctionEv"],
  ["max_kinetic_energy", "maxKineticEnergyEv"],
  ["ionization_energy", "ionizationEnergyEv"],
  ["valence_band_maximum", "valenceBandMaximumEv"],
  ["cutoff", "cutoffEv"],
  ["fermi_edge", "fermiEdgeEv"],
] as const;

const HEADER = [
  "file",
  "verdict",
  ...QUANTITIES.flatMap(([name]) => [`${name}_ev`, `${name}_standard_uncertainty_ev`]),
  "work_function_expanded_uncertainty_k2_ev",
  "reasons",
];

/**
 * Fits each file by itself: one row and one figure each. A file that cannot be read or fitted gets a row with the reason.
 *
 * @param paths The files.
 * @param statements What the user states, for all files alike.
 * @param withFigures `true` to draw.
 * @returns Table, figures, verdicts.
 */
export async function fitEach(
  paths: readonly string[],
  statements: FitStatements,
  withFigures: boolean,
): Promise<FitTable> {
  const rows = [HEADER.join(",")];
  const figures: (readonly [string, string])[] = [];
  const verdicts: Verdict[] = [];
  const names = new Set<string>();
  for (const path of paths) {
    const run = await fitFiles([path], statements).catch(problemOf);
    verdicts.push(typeof run === "string" ? "failed" : run.result.verdict);
    rows.push(csvRow(path, run));
    if (typeof run === "string" || !withFigures) continue;
    let name = stem(path);
    for (let n = 2; names.has(name); n++) name = `${stem(path)}_${n}`;
    names.add(name);
    figures.push([`${name}.svg`, await fitSvg(run, path)]);
  }
  return { csv: `${rows.join("\n")}\n`, figures, verdicts };
}

/** Mistakes of people become rows; defects of ours end the program. */
function problemOf(error: unknown): string {
  if (exitCodeOf(error) === 1) throw error;
  return (error as Error).message;
}

function csvRow(path: string, run: FitRun | string): string {
  const result = typeof run === "string" ? null : run.result;
  const pair = (estimate: Estimate | null | undefined): string[] =>
    estimate ? [String(estimate.value), String(estimate.standardUncertainty)] : ["", ""];
  return [
    path,
    result?.verdict ?? "failed",
    ...QUANTITIES.flatMap(([, key]) => pair(result?.[key])),
    String(result?.expanded.workFunctionEv?.expandedEv ?? ""),
    typeof run === "string" ? run : run.result.reasons.join("; "),
  ].map(quoted).join(",");
}

/** A CSV cell (RFC 4180). */
function quoted(cell: string): string {
  return /[",\r\n]/.test(cell) ? `"${cell.replaceAll('"', '""')}"` : cell;
}
