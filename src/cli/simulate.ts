import { VERSION } from "../base/mod.ts";
import { decodeText, readSpectrumCsv, writeSpectrumCsv } from "../formats/mod.ts";
import { countSpectrum, engineData, type ExpectedSpectrum, expectedSpectrum } from "../model/mod.ts";
import { renderSvg, spectrumFigure } from "../report/mod.ts";
import { batchesFor, runHistories } from "../run/mod.ts";
import {
  parseScenario,
  type ResolvedScenario,
  resolveScenario,
  type Scenario,
  scenarioHash,
  type UserTables,
} from "../scenario/mod.ts";
import type { Tally } from "../transport/mod.ts";
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
export interface SimulationResult {
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
  /** Histories run. */
  readonly histories: number;
  /** `false` when stopped before the wanted number. */
  readonly complete: boolean;
  /** What was put in, eV: the values that a fit should find. */
  readonly truth: {
    readonly workFunctionEv: number;
    readonly workFunctionSource: string;
    readonly maxKineticEnergyEv: number;
    readonly cutoffEv: number;
    readonly fermiEdgeEv: number;
  };
  /** Electrons into the analyzer per absorbed photon, by both tallies, and how far apart they are. */
  readonly electronsPerPhoton: {
    readonly forced: number;
    readonly analogue: number;
    readonly analogueStandardError: number;
  };
  /** Core levels in reach; empty in the ultraviolet. */
  readonly levels: readonly Omit<ExpectedSpectrum["levels"][number], "emissionDepth">[];
  /** Highest expected counts of a channel, and the largest relative standard error among channels above 10 % of it. */
  readonly peakCounts: number;
  readonly worstRelativeStandardError: number;
  /** Warnings. */
  readonly warnings: ResolvedScenario["warnings"];
  /** The scenario with defaults. */
  readonly scenario: Scenario;
}

/**
 * Reads a scenario file and the tables it names.
 *
 * @param path The file.
 * @param overrides `PATH=VALUE` texts.
 * @returns The scenario, resolved.
 */
export async function loadScenario(path: string, overrides: readonly string[]): Promise<LoadedScenario> {
  const scenario = parseScenario(decodeText(await readBytes(path), path), path, overrides);
  const table = async (name: string | null, column: string) => {
    if (name === null) return undefined;
    const file = beside(path, name);
    const [region] = readSpectrumCsv(decodeText(await readBytes(file), file), file, {
      columns: ["energy_ev", column],
    }).regions;
    return { energiesEv: Array.from(region.energiesEv), values: Array.from(region.counts) };
  };
  const light = await table(scenario.light.kind === "table" ? scenario.light.file : null, "photons_per_ev");
  const densityOfStates = await table(scenario.sample.densityOfStatesFile, "states_per_ev");
  const meanFreePath = await table(scenario.sample.meanFreePathFile, "length_nm");
  const tables: UserTables = {
    ...(densityOfStates && { densityOfStates }),
    ...(meanFreePath && { meanFreePath }),
    ...(light && { light }),
  };
  const resolved = resolveScenario(scenario, tables);
  const { warnings: _, ...identity } = resolved;
  return { scenario, resolved, hash: await scenarioHash(identity) };
}

/**
 * Runs a loaded scenario.
 *
 * @param loaded The scenario.
 * @param options Workers, stop signal, progress.
 * @returns Expectation, counts and summary.
 */
export async function simulate(
  loaded: LoadedScenario,
  options: {
    readonly workers: number;
    readonly signal?: AbortSignal;
    readonly onProgress?: (done: number, all: number) => void;
  },
): Promise<Simulation> {
  const { resolved } = loaded;
  const engine = engineData(resolved);
  const batches = batchesFor(resolved.histories);
  const tally = await runHistories(engine, resolved.seed, batches, options);
  const expected = expectedSpectrum(resolved, engine, tally);
  const counts = countSpectrum(expected, resolved.seed);
  return { ...loaded, expected, counts, result: summary(loaded, expected, tally, tally.batches === batches) };
}

function summary(
  { scenario, resolved, hash }: LoadedScenario,
  expected: ExpectedSpectrum,
  tally: Tally,
  complete: boolean,
): SimulationResult {
  const peak = expected.counts.reduce((a, b) => Math.max(a, b), 0);
  const relativeErrors = expected.standardErrors.map((error, c) =>
    expected.counts[c] > 0.1 * peak ? error / expected.counts[c] : 0
  );
  return {
    version: VERSION,
    scenarioHash: hash,
    title: resolved.title,
    simulated: true,
    seed: resolved.seed,
    histories: tally.histories,
    complete,
    truth: {
      workFunctionEv: resolved.workFunctionEv,
      workFunctionSource: resolved.workFunctionSource,
      maxKineticEnergyEv: resolved.photonEnergyEv - resolved.workFunctionEv,
      cutoffEv: resolved.workFunctionEv + resolved.kineticEnergyShiftEv,
      fermiEdgeEv: resolved.photonEnergyEv + resolved.kineticEnergyShiftEv,
    },
    electronsPerPhoton: {
      forced: expected.electronsPerPhoton,
      analogue: expected.analoguePerPhoton.value,
      analogueStandardError: expected.analoguePerPhoton.standardError,
    },
    levels: expected.levels.map(({ emissionDepth: _, ...level }) => level),
    peakCounts: peak,
    worstRelativeStandardError: relativeErrors.reduce((a, b) => Math.max(a, b), 0),
    warnings: resolved.warnings,
    scenario,
  };
}

/**
 * The spectrum as a CSV file that `fit` reads back.
 *
 * @param simulation The simulation.
 * @returns Text of `spectrum.csv`.
 */
export function spectrumCsv({ resolved, hash, expected, counts, result }: Simulation): string {
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
    ["sweeps", String(resolved.acquisition.sweeps)],
    ["seed", String(resolved.seed)],
    ["histories", String(result.histories)],
    ["version", VERSION],
    ["scenario_hash", hash],
  ], [
    { name: "kinetic_energy_ev", values: expected.kineticEnergiesEv.map(round9) },
    { name: "expected_counts", values: expected.counts },
    { name: "counts", values: counts },
    { name: "standard_error", values: expected.standardErrors },
  ]);
}

/** Channel energies are sums of steps; nine decimals take the rounding of binary fractions off. */
function round9(value: number): number {
  return Math.round(value * 1e9) / 1e9;
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
