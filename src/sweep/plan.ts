import { InputError, VERSION } from "../base/mod.ts";
import { type ResolvedScenario, scenarioHash } from "../scenario/mod.ts";
import type { Settings } from "./axes.ts";
import type { Sweep } from "./types.ts";

/** What has to be computed for a point; plain data. */
export interface PointJob {
  /** Identity of the point. */
  readonly id: string;
  /** Everything a number, with the seed of the point. */
  readonly resolved: ResolvedScenario;
  /** Identity of the scenario, as in `result.json`. */
  readonly scenarioHash: string;
  /** Points with the same key and the same number of histories share one tally; with the same key, tables. */
  readonly engineKey: string;
  /** Which independent draw of the counting noise. */
  readonly replicate: number;
  /** `true` to fit the counts. */
  readonly fit: boolean;
  /** `true` to keep the spectrum. */
  readonly spectrum: boolean;
}

/** A point of a sweep, looked up. */
export interface PlannedPoint {
  /** Number of the point, from 0. */
  readonly index: number;
  /** What it changes in the scenario. */
  readonly settings: Settings;
  /** Identity. */
  readonly id: string;
  /** What to compute, or null when the settings give no scenario. */
  readonly job: PointJob | null;
  /** Why there is no job; empty when there is one. */
  readonly reason: string;
}

/**
 * Makes a scenario of `PATH=VALUE` texts.
 *
 * @throws {InputError} If they break a rule: the point then fails with that reason.
 */
export type ResolvePoint = (overrides: readonly string[]) => ResolvedScenario | Promise<ResolvedScenario>;

/**
 * What the histories do not see: a point that differs from another in these alone is evaluated from the same tally, to
 * the same bits as from a run of its own. Everything not listed here needs new transport, bias and acceptance included
 * (the forced detection contains them), except where bias and analyzer work function change together and leave the
 * acceleration as it is.
 */
const SEEN_BY_INSTRUMENT_ALONE = [
  "title",
  "warnings",
  "workFunctionSource",
  "absorbedPhotonsPerS",
  "analyzerWorkFunctionEv",
  "biasV",
  "kineticEnergyShiftEv",
  "resolutionFwhmEv",
  "transmissionExponent",
  "detectionFraction",
  "acquisition",
] as const satisfies readonly (keyof ResolvedScenario)[];

/**
 * Identity of the tables of a scenario: equal for scenarios that differ only in what the histories do not see (flux,
 * resolution, transmission, detection, window, step, dwell, dead time, dark rate, title), in seed or in histories.
 *
 * @param resolved The scenario.
 * @returns 16 hexadecimal digits.
 */
export function engineKey(resolved: ResolvedScenario): Promise<string> {
  const outside = new Set<string>([...SEEN_BY_INSTRUMENT_ALONE, "seed", "histories"]);
  // Bias and analyzer work function enter the acceptance by the energy gained in the field, and only by it.
  const gainedEv = -resolved.biasV - resolved.analyzerWorkFunctionEv;
  return scenarioHash({
    gainedEv,
    ...Object.fromEntries(Object.entries(resolved).filter(([key]) => !outside.has(key))),
  });
}

/**
 * Looks up a point: its scenario, seeds and identity.
 *
 * Independent points take the seed of their histories from (seed of the sweep, {@link engineKey}), so that points which
 * differ only in the instrument share their histories, and the counting noise from their own identity. Both are in the
 * record: `simulate` with the same settings, `--seed` and `--replicate` gives the same counts.
 *
 * @param sweep The sweep.
 * @param index Number of the point.
 * @param settings What it changes, from {@link sweepPoints}.
 * @param resolve Makes the scenario.
 * @returns The point; settings that break a rule give one without a job, and the reason.
 */
export async function planPoint(
  sweep: Sweep,
  index: number,
  settings: Settings,
  resolve: ResolvePoint,
): Promise<PlannedPoint> {
  let plain: ResolvedScenario;
  try {
    plain = await resolve(
      Object.entries(settings).map(([path, value]) => `${path}=${JSON.stringify(value)}`),
    );
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    const reason = error.message;
    return {
      index,
      settings,
      id: await scenarioHash({ settings, reason, version: VERSION }),
      job: null,
      reason,
    };
  }
  const key = await engineKey(plain);
  const independent = sweep.seeds === "independent";
  const resolved = independent ? { ...plain, seed: numberOf(await scenarioHash([sweep.seed, key])) } : plain;
  const { warnings: _, ...identity } = resolved;
  const hash = await scenarioHash(identity);
  const replicate = independent ? numberOf(await scenarioHash([sweep.seed, hash])) : 0;
  const fit = sweep.record.values.some((name) => name.startsWith("fit."));
  const spectrum = sweep.record.spectra;
  const id = await scenarioHash({ scenario: hash, replicate, version: VERSION, fit, spectrum });
  return {
    index,
    settings,
    id,
    reason: "",
    job: { id, resolved, scenarioHash: hash, engineKey: key, replicate, fit, spectrum },
  };
}

/** The first 52 bits of a hash as a whole number. */
function numberOf(hash: string): number {
  return Number.parseInt(hash.slice(0, 13), 16);
}

/**
 * First and last point of a part.
 *
 * @param part Which part, 1..parts.
 * @param parts How many parts.
 * @param count Points of the sweep.
 * @returns Half-open range of point numbers; all parts together hold every point once.
 */
export function partRange(
  part: number,
  parts: number,
  count: number,
): { readonly from: number; readonly to: number } {
  return { from: Math.floor(((part - 1) * count) / parts), to: Math.floor((part * count) / parts) };
}
