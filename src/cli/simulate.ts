import { cannot, InputError, VERSION } from "../base/mod.ts";
import { materialFrom } from "../data/mod.ts";
import { decodeText, readSpectrumCsv, writeSpectrumCsv } from "../formats/mod.ts";
import { countSpectrum, engineData, type ExpectedSpectrum, expectedSpectrum } from "../model/mod.ts";
import { renderSvg, spectrumFigure } from "../report/mod.ts";
import {
  batchesFor,
  HistoryPool,
  isIdle,
  type PointSpectrum,
  round9,
  type SpectrumSummary,
  summarize,
  worstRelativeStandardError,
} from "../run/mod.ts";
import {
  parseScenario,
  type ResolvedScenario,
  resolveScenario,
  type Scenario,
  scenarioHash,
  type UserTable,
  type UserTables,
} from "../scenario/mod.ts";
import { HISTORIES_PER_BATCH } from "../transport/mod.ts";
import { checkpointKey, readCheckpoint, writeCheckpoint } from "./checkpoint.ts";
import { beside, readBytes } from "./files.ts";

/** A scenario file, read, checked and resolved. */
export interface LoadedScenario {
  /** As written, defaults filled in. */
  readonly scenario: Scenario;
  /** Everything a number. */
  readonly resolved: ResolvedScenario;
  /** Identity. */
  readonly hash: string;
}

/** What a simulation gives. */
export interface Simulation extends LoadedScenario {
  /** Expected counts. */
  readonly expected: ExpectedSpectrum;
  /** Counts with counting noise. */
  readonly counts: Float64Array;
  /** Summary, as in `result.json`. */
  readonly result: SimulationResult;
}

/** Contents of `result.json`. */
export interface SimulationResult extends SpectrumSummary {
  /** Version of the program. */
  readonly version: string;
  /** Identity of the scenario. */
  readonly scenarioHash: string;
  /** Title of the scenario. */
  readonly title: string;
  /** Always `true`: these are no measured data. */
  readonly simulated: true;
  /** Seed. */
  readonly seed: number;
  /** Which independent draw of the counting noise. */
  readonly replicate: number;
  /** Histories run. */
  readonly histories: number;
  /** `false` when stopped before the wanted number or precision. */
  readonly complete: boolean;
  /** The precision asked for, relative standard error of the worst channel; null when histories were asked for. */
  readonly wantedRelativeStandardError: number | null;
  /** Warnings. */
  readonly warnings: ResolvedScenario["warnings"];
  /** The scenario with defaults. */
  readonly scenario: Scenario;
}

/** How a simulation is run. */
export interface SimulateOptions {
  /** Worker threads. */
  readonly workers: number;
  /** Which independent draw of the counting noise. Default: 0. */
  readonly replicate?: number;
  /** Goes on until {@link worstRelativeStandardError} is below this; the histories of the scenario are then ignored. */
  readonly until?: number;
  /** With `until`: no more histories than these. Default: 1e12. */
  readonly mostHistories?: number;
  /** File that keeps the sums: read at the start where it exists, written at the end and from time to time. */
  readonly checkpoint?: string;
  /** Stops early. */
  readonly signal?: AbortSignal;
  /** Called as batches are finished; with `until`, with the batches that the wanted precision will probably take. */
  readonly onProgress?: (done: number, all: number) => void;
}

/** Sums in a checkpoint are never older than about so many batches (some seconds of work). */
const CHECKPOINT_BATCHES = 4096;
/** Batches between the first looks at the precision: one for each group of the tally. */
const LOOK_BATCHES = 64;
/** The largest number of histories that a scenario may ask for. */
const MOST_HISTORIES = 1e12;

/**
 * Reads a scenario file and the tables it names.
 *
 * @param path The file.
 * @param overrides `PATH=VALUE` texts.
 * @returns The scenario, resolved.
 */
export async function loadScenario(path: string, overrides: readonly string[]): Promise<LoadedScenario> {
  const load = scenarioLoader(
    decodeText(await readBytes(path), path),
    path,
    async (file) => decodeText(await readBytes(file), file),
  );
  return await load(overrides);
}

/**
 * Makes scenarios of one text; each table is read once.
 *
 * @param text Contents of the scenario file.
 * @param path Its path, for messages and for the tables beside it.
 * @param readTable Reads the text of a table by its path.
 * @returns A function that applies overrides and resolves.
 */
export function scenarioLoader(
  text: string,
  path: string,
  readTable: (file: string) => Promise<string>,
): (overrides: readonly string[]) => Promise<LoadedScenario> {
  const tables = new Map<string, Promise<UserTable>>();
  const table = (name: string, column: string): Promise<UserTable> => {
    const file = beside(path, name);
    const key = `${column} ${file}`;
    const known = tables.get(key) ?? readTable(file).then((contents) => userTable(contents, file, column));
    tables.set(key, known);
    return known;
  };
  return async (overrides) => {
    const scenario = parseScenario(text, path, overrides);
    const { densityOfStatesFile, lossFile, materialFile, meanFreePathFile } = scenario.sample;
    const named: UserTables = {
      ...(materialFile !== null && {
        material: materialFrom(await readTable(beside(path, materialFile)), beside(path, materialFile)),
      }),
      ...(densityOfStatesFile !== null && {
        densityOfStates: await table(densityOfStatesFile, "states_per_ev"),
      }),
      ...(lossFile !== null && { loss: await table(lossFile, "losses_per_ev") }),
      ...(meanFreePathFile !== null && { meanFreePath: await table(meanFreePathFile, "length_nm") }),
      ...(scenario.light.kind === "table" && { light: await table(scenario.light.file, "photons_per_ev") }),
    };
    const resolved = resolveScenario(scenario, named);
    const { warnings: _, ...identity } = resolved;
    return { scenario, resolved, hash: await scenarioHash(identity) };
  };
}

function userTable(contents: string, file: string, column: string): UserTable {
  const [region] = readSpectrumCsv(contents, file, { columns: ["energy_ev", column] }).regions;
  return { energiesEv: Array.from(region.energiesEv), values: Array.from(region.counts) };
}

/**
 * Runs a loaded scenario.
 *
 * The number of batches at which the precision is looked at depends on nothing but that number, so a run stops at the same
 * history whatever the number of workers, and wherever it was interrupted and continued.
 *
 * @param loaded The scenario.
 * @param options Workers, precision, checkpoint, stop signal, progress.
 * @returns Expectation, counts and summary.
 * @throws {InputError} If the checkpoint is of another simulation, or holds more histories than asked for.
 */
export async function simulate(loaded: LoadedScenario, options: SimulateOptions): Promise<Simulation> {
  const { resolved } = loaded;
  const { until, checkpoint, signal } = options;
  const engine = engineData(resolved);
  const wanted = until === undefined
    ? batchesFor(resolved.histories)
    : batchesFor(options.mostHistories ?? MOST_HISTORIES);
  const key = checkpoint === undefined ? "" : await checkpointKey(resolved);
  const start = checkpoint === undefined ? undefined : await readCheckpoint(checkpoint, key);
  if (start !== undefined && start.batches > wanted) {
    throw new InputError([{
      place: checkpoint!,
      message: cannot(
        "continue from checkpoint",
        `histories must be >= ${start.histories}, which it already holds`,
        wanted * HISTORIES_PER_BATCH,
      ),
    }]);
  }
  const precise = (expected: ExpectedSpectrum): boolean =>
    until !== undefined &&
    (isIdle(engine) ||
      expected.counts.some((counts) => counts > 0) && worstRelativeStandardError(expected) < until);

  await using pool = new HistoryPool(engine, resolved.seed, options.workers, start);
  let tally = await pool.runTo(start?.batches ?? 0);
  let expected = expectedSpectrum(resolved, engine, tally);
  let saved = tally.batches;
  let likely = until === undefined ? wanted : LOOK_BATCHES;
  const save = async (): Promise<void> => {
    if (checkpoint !== undefined) await writeCheckpoint(checkpoint, key, tally);
    saved = tally.batches;
  };
  while (tally.batches < wanted && !signal?.aborted && !(isLook(tally.batches) && precise(expected))) {
    const next = until === undefined
      ? Math.min(wanted, tally.batches + CHECKPOINT_BATCHES)
      : Math.min(wanted, nextLook(tally.batches));
    tally = await pool.runTo(next, {
      ...(signal && { signal }),
      onProgress: (done) => options.onProgress?.(done, Math.max(done, likely)),
    });
    if (until !== undefined && !signal?.aborted) {
      expected = expectedSpectrum(resolved, engine, tally);
      // The error falls with the square root of the histories.
      likely = Math.min(wanted, tally.batches * (worstRelativeStandardError(expected) / until) ** 2);
    }
    if (tally.batches - saved >= CHECKPOINT_BATCHES) await save();
  }
  if (tally.batches > saved) await save();
  expected = expectedSpectrum(resolved, engine, tally);
  const replicate = options.replicate ?? 0;
  const counts = countSpectrum(expected, resolved.seed, replicate);
  const { scenario, hash } = loaded;
  const { truth, electronsPerPhoton, ...rest } = summarize(resolved, expected);
  return {
    ...loaded,
    expected,
    counts,
    result: {
      version: VERSION,
      scenarioHash: hash,
      title: resolved.title,
      simulated: true,
      seed: resolved.seed,
      replicate,
      histories: tally.histories,
      complete: until === undefined ? tally.batches === wanted : precise(expected),
      wantedRelativeStandardError: until ?? null,
      truth,
      electronsPerPhoton,
      ...rest,
      warnings: resolved.warnings,
      scenario,
    },
  };
}

/** Numbers of batches at which the precision is looked at: 64, 128, ... and from 1280 on about a tenth apart. */
function nextLook(batches: number): number {
  let look = LOOK_BATCHES;
  while (look <= batches) look += LOOK_BATCHES * Math.max(1, Math.floor(look / (10 * LOOK_BATCHES)));
  return look;
}

function isLook(batches: number): boolean {
  return batches > 0 && nextLook(batches - 1) === batches;
}

/**
 * The spectrum as a CSV file that `fit` reads back.
 *
 * @param simulation The simulation.
 * @returns Text of `spectrum.csv`.
 */
export function spectrumCsv(simulation: Simulation): string {
  const { resolved, hash, expected, counts, result } = simulation;
  return spectrumFileText(resolved, hash, {
    kineticEnergiesEv: expected.kineticEnergiesEv,
    expectedCounts: expected.counts,
    counts,
    standardErrors: expected.standardErrors,
    histories: result.histories,
  });
}

/** Text of `spectrum.csv`. */
export function spectrumFileText(resolved: ResolvedScenario, hash: string, spectrum: PointSpectrum): string {
  return writeSpectrumCsv([
    ["title", resolved.title.replaceAll(/[\r\n]+/g, " ")],
    ["simulated", "true"],
    ["photon_energy_ev", String(resolved.photonEnergyEv)],
    ["bias_v", String(resolved.biasV)],
    ["analyzer_work_function_ev", String(resolved.analyzerWorkFunctionEv)],
    ["acceptance_half_angle_deg", String(resolved.acceptanceHalfAngleDeg)],
    ["temperature_k", String(resolved.temperatureK)],
    ["resolution_fwhm_ev", String(resolved.resolutionFwhmEv)],
    ["dwell_s", String(resolved.acquisition.dwellS)],
    ["dead_time_s", String(resolved.acquisition.deadTimeS)],
    ["sweeps", String(resolved.acquisition.sweeps)],
    ["seed", String(resolved.seed)],
    ["histories", String(spectrum.histories)],
    ["version", VERSION],
    ["scenario_hash", hash],
  ], [
    { name: "kinetic_energy_ev", values: spectrum.kineticEnergiesEv.map(round9) },
    { name: "expected_counts", values: spectrum.expectedCounts },
    { name: "counts", values: spectrum.counts },
    { name: "standard_error", values: spectrum.standardErrors },
  ]);
}

/**
 * The figure of a simulated spectrum.
 *
 * @param simulation The simulation.
 * @returns Text of `spectrum.svg`.
 */
export function spectrumSvg({ resolved, expected, counts, result }: Simulation): Promise<string> {
  const energiesEv = expected.kineticEnergiesEv;
  return renderSvg(spectrumFigure({
    title: resolved.title,
    subtitle: [
      `simulated: h\u03bd = ${resolved.photonEnergyEv.toFixed(3)} eV, bias ${resolved.biasV} V, W = ${
        resolved.workFunctionEv.toFixed(3)
      } eV`,
      `${result.histories.toExponential(2)} histories, seed ${resolved.seed}`,
    ],
    axisTitle: "Kinetic energy as recorded / eV",
    measured: [{ label: "simulated counts", curve: { energiesEv, counts } }],
    expected: { energiesEv, counts: expected.counts, standardErrors: expected.standardErrors },
    edges: [],
  }));
}
