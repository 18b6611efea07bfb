import { cannot, InputError, VERSION } from "../base/mod.ts";
import { nearestLine } from "../data/mod.ts";
import {
  comparePlans,
  type LightPlan,
  type PlanFacts,
  planFacts,
  type PlanTarget,
  planWithinRate,
  ratesFrom,
  replicateRun,
  type Replicates,
  type RunPlan,
  type TimeLimit,
} from "../plan/mod.ts";
import { runSweep } from "../run/mod.ts";
import type { ResolvedScenario, Scenario } from "../scenario/mod.ts";
import { checkSweepPaths, type JsonValue, type Sweep, sweepPoints } from "../sweep/mod.ts";
import { type LoadedScenario, loadScenario, simulate } from "./simulate.ts";

/** What a plan is asked for, checked. */
export interface PlanRequest {
  /** Scenario file. */
  readonly path: string;
  /** Changes of the scenario for all settings. */
  readonly overrides: readonly string[];
  /** Wanted standard uncertainty, eV. */
  readonly targetEv: number;
  /** Time there is, h; null for any. */
  readonly hours: number | null;
  /** Highest count rate, counts/s; null for any. */
  readonly mostCountsPerS: number | null;
  /** Highest dose with the area it falls on; null for any. */
  readonly dose: { readonly photonsPerCm2: number; readonly spotMm2: number } | null;
  /** Settings to be varied, all combinations. */
  readonly vary: readonly { readonly path: string; readonly values: readonly JsonValue[] }[];
  /** Simulated runs of the best plan; 0 for none. */
  readonly replicates: number;
  /** Photons followed for the best plan; null for the scenario's, at most {@link MOST_HISTORIES}. */
  readonly histories: number | null;
  /** Worker threads. */
  readonly workers: number;
}

/** One setting of the table. */
export interface RankedSetting {
  /** What it changes. */
  readonly settings: Readonly<Record<string, JsonValue>>;
  /** The plan, or null where the settings give no scenario. */
  readonly plan: RunPlan | null;
  /** Share of the scenario's light. */
  readonly lightShare: number;
  /** Why there is no plan; empty where there is one. */
  readonly failure: string;
}

/** The answer of `plan`. */
export interface PlanAnswer {
  /** Version of the program. */
  readonly version: string;
  /** The request. */
  readonly request: PlanRequest;
  /** All settings, best first. */
  readonly ranking: readonly RankedSetting[];
  /** The best one, simulated with more photons, windows drawn in where that saves time. */
  readonly best: LightPlan & {
    readonly settings: RankedSetting["settings"];
    readonly facts: PlanFacts;
    readonly scenario: Scenario;
    readonly scenarioHash: string;
    readonly histories: number;
    /** Photons on the spot over the whole run, per cm^2; null where its area is not given. */
    readonly dosePerCm2: number | null;
  };
  /** Proof by simulation; null where not asked for. */
  readonly replicates: Replicates | null;
}

/** Combinations beyond this are no plan any more. */
const MOST_COMBINATIONS = 2000;
/** Photons followed for each of several settings: enough to rank them. */
const RANKING_HISTORIES = 262_144;
/** Photons followed for the best plan, at most, unless the user says otherwise. */
export const MOST_HISTORIES = 4_194_304;
/** Energies simulated below the cutoff, and above the Fermi level or the highest edge of a satellite, eV. */
const BELOW_EV = 1.2;
const ABOVE_EV = 1.2;
/** A step above this share of the resolution leaves too few channels on an edge; a quarter is fine (chosen). */
const COARSE_STEP = 0.4;
const FINE_STEP = 0.25;

/**
 * Plans a run: ranks all settings, works out the best one, and proves it by replicates where asked.
 *
 * @param request What is asked.
 * @param onProgress Called with the number of settings done.
 * @returns The answer.
 * @throws {InputError} If a setting or a limit breaks a rule.
 */
export async function planScenario(
  request: PlanRequest,
  onProgress: (done: number, all: number) => void,
): Promise<PlanAnswer> {
  const { path, overrides, vary } = request;
  const base = await loadScenario(path, overrides);
  const sweep = sweepOf(request);
  checkSweepPaths(sweep, base.scenario);
  const { count } = sweepPoints(sweep);
  if (count > MOST_COMBINATIONS) {
    throw new InputError([{
      place: "--vary",
      message: cannot("plan", `there must be at most ${MOST_COMBINATIONS} combinations`, count),
    }]);
  }
  const ranking = vary.length === 0 ? [] : await rank(request, sweep, onProgress);
  const settings = ranking[0]?.settings ?? {};
  if (ranking.length > 0 && ranking[0].plan === null) {
    throw new InputError([{ place: "--vary", message: ranking[0].failure }]);
  }
  const changes = [...overrides, ...overridesOf(settings)];
  const histories = request.histories ?? Math.min(base.scenario.simulation.histories, MOST_HISTORIES);
  const loaded = await loadWide(path, [...changes, `simulation.histories=${histories}`]);
  const simulation = await simulate(loaded, { workers: request.workers });
  const facts = planFacts(loaded.resolved);
  const rates = ratesFrom(
    { ...simulation.expected, expectedCounts: simulation.expected.counts },
    facts.timePerChannelS,
  );
  const best = planWithinRate(rates, facts, targetOf(request, loaded.scenario), {
    mostCountsPerS: request.mostCountsPerS ?? Infinity,
    drawIn: true,
  });
  const { plan, lightShare } = best;
  const flux = lightShare * loaded.scenario.light.photonFluxPerS;
  return {
    version: VERSION,
    request,
    ranking: ranking.length > 0 ? ranking : [{ settings, plan, lightShare, failure: "" }],
    best: {
      ...best,
      settings,
      facts,
      scenario: loaded.scenario,
      scenarioHash: loaded.hash,
      histories: simulation.result.histories,
      dosePerCm2: request.dose === null ? null : (flux * plan.timeS) / cm2(request.dose.spotMm2),
    },
    replicates: request.replicates === 0 || plan.numbers === null
      ? null
      : replicateRun(best.rates, facts, plan.windows, {
        runs: request.replicates,
        seed: loaded.resolved.seed,
        quantity: plan.numbers.quantity,
        statisticalEv: plan.numbers.statisticalEv,
      }),
  };
}

function sweepOf({ path, vary }: PlanRequest): Sweep {
  return {
    title: "plan",
    note: "",
    scenario: path,
    axes: vary.map(({ path, values }) => ({ kind: "list", path, values })),
    seeds: "common",
    seed: 1,
    record: { values: ["peakCounts"], spectra: true },
  };
}

async function rank(
  request: PlanRequest,
  sweep: Sweep,
  onProgress: (done: number, all: number) => void,
): Promise<RankedSetting[]> {
  const points = sweepPoints(sweep);
  const scenarios = new Map<ResolvedScenario, Scenario>();
  const resolve = async (settings: readonly string[]): Promise<ResolvedScenario> => {
    const { scenario, resolved } = await loadWide(request.path, [
      ...request.overrides,
      ...settings,
      `simulation.histories=${Math.min(request.histories ?? RANKING_HISTORIES, RANKING_HISTORIES)}`,
    ]);
    scenarios.set(resolved, scenario);
    return resolved;
  };
  const ranked: (RankedSetting & { readonly index: number })[] = [];
  for await (
    const { index, record, resolved, spectrum } of runSweep(sweep, resolve, { workers: request.workers })
  ) {
    const settings = points.at(index);
    if (resolved === null || spectrum === null) {
      ranked.push({ index, settings, plan: null, lightShare: 1, failure: record.reason });
    } else {
      const facts = planFacts(resolved);
      const target = targetOf(request, scenarios.get(resolved)!);
      const { plan, lightShare } = planWithinRate(ratesFrom(spectrum, facts.timePerChannelS), facts, target, {
        mostCountsPerS: request.mostCountsPerS ?? Infinity,
      });
      ranked.push({ index, settings, plan, lightShare, failure: "" });
    }
    onProgress(ranked.length, points.count);
  }
  return ranked.sort((a, b) =>
    a.plan === null || b.plan === null
      ? Number(a.plan === null) - Number(b.plan === null) || a.index - b.index
      : comparePlans(a.plan, b.plan) || a.index - b.index
  ).map(({ index: _, ...setting }) => setting);
}

/** `PATH=VALUE` texts of settings. */
export function overridesOf(settings: RankedSetting["settings"]): string[] {
  return Object.entries(settings).map(([path, value]) => `${path}=${JSON.stringify(value)}`);
}

/**
 * A scenario whose window holds both edges and the satellites' edges above, whatever its settings, in steps that the
 * resolution needs unless the user gave the step.
 */
async function loadWide(path: string, overrides: readonly string[]): Promise<LoadedScenario> {
  const { resolved } = await loadScenario(path, overrides);
  if (resolved.fast !== null) {
    const rule = "the photon energy must be <= 60 eV, for both edges are needed";
    throw new InputError([{
      place: path,
      message: cannot("plan", rule, `${Number(resolved.photonEnergyEv.toPrecision(6))} eV`),
    }]);
  }
  const { cutoffEv, fermiLevelEv, photonEnergyEv, stepEv, resolutionFwhmEv } = planFacts(resolved);
  const isStepGiven = overrides.some((one) => one.startsWith("acquisition.stepEv="));
  const reach = Math.max(0, ...(nearestLine(photonEnergyEv)?.satellites ?? []).map(({ shiftEv }) => shiftEv));
  const startEv = Math.max(stepEv, Math.min(cutoffEv, fermiLevelEv) - BELOW_EV);
  const endEv = Math.max(cutoffEv, fermiLevelEv, startEv) + reach + ABOVE_EV;
  return await loadScenario(path, [
    ...overrides,
    `acquisition.startEv=${startEv.toFixed(6)}`,
    `acquisition.endEv=${endEv.toFixed(6)}`,
    ...(isStepGiven || stepEv <= COARSE_STEP * resolutionFwhmEv
      ? []
      : [`acquisition.stepEv=${roundStep(FINE_STEP * resolutionFwhmEv)}`]),
  ]);
}

/** The largest of 1, 2 and 5 times a power of ten that is no larger, eV. */
function roundStep(stepEv: number): string {
  const decade = 10 ** Math.floor(Math.log10(stepEv));
  const digit = [5, 2, 1].find((one) => one * decade <= stepEv * (1 + 1e-9)) ?? 1;
  return (digit * decade).toPrecision(1);
}

function targetOf({ targetEv, hours, dose }: PlanRequest, { light }: Scenario): PlanTarget {
  const limits: TimeLimit[] = [];
  if (hours !== null) limits.push({ name: "--hours", timeS: 3600 * hours, byLight: false });
  if (dose !== null) {
    limits.push({
      name: "--max-dose",
      timeS: (dose.photonsPerCm2 * cm2(dose.spotMm2)) / light.photonFluxPerS,
      byLight: true,
    });
  }
  return { targetEv, limits };
}

function cm2(areaMm2: number): number {
  return areaMm2 / 100;
}
