import { type Template, type TemplateFamily, templateFamily, type TemplateNode } from "../compare/mod.ts";
import { engineData, expectedSpectrum } from "../model/mod.ts";
import type { EngineData } from "../transport/mod.ts";
import { batchesFor, runHistories } from "../run/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import { engineKey } from "../sweep/mod.ts";
import { HISTORIES_PER_BATCH, type Tally } from "../transport/mod.ts";
import type { ScenarioParameter } from "./compare_parameters.ts";
import type { LoadedScenario } from "./simulate.ts";

/** A template with what its histories can be used for again. */
export interface SimulatedTemplate {
  /** The template. */
  readonly template: Template;
  /** Its scenario, on the window of the template. */
  readonly resolved: ResolvedScenario;
  /** Identity of its transport. */
  readonly key: string;
  /** Its tables. */
  readonly engine: EngineData;
  /** Its histories. */
  readonly tally: Tally;
}

/** How templates are made. */
export interface TemplateSettings {
  /** Window, as recorded, eV. */
  readonly windowEv: readonly [number, number];
  /** Step of the measured channels, eV. */
  readonly channelStepEv: number;
  /** Worker threads. */
  readonly workers: number;
  /** Stops the histories. */
  readonly signal?: AbortSignal;
  /** Called as histories are done. */
  readonly onProgress?: (done: number, all: number) => void;
  /** Runs that may come after that of the base, for the progress. */
  readonly runs: number;
}

/** Makes templates of one scenario. */
export interface TemplateMaker {
  /** The scenario itself, with all its histories; null when stopped. */
  readonly base: () => Promise<SimulatedTemplate | null>;
  /** Templates along one parameter; null when stopped. */
  readonly family: (base: SimulatedTemplate, parameter: ScenarioParameter) => Promise<TemplateFamily | null>;
  /** Histories of the base. */
  readonly baseHistories: number;
  /** Histories of each change that needs its own. */
  readonly changeHistories: number;
}

/** Points of a template per resolution, fine enough for half the resolution and cubic interpolation. */
const POINTS_PER_FWHM = 8;
const MOST_POINTS = 20_000;
const LEAST_STEP_EV = 0.001;
/** Energies that a scenario may hold, eV. */
const LOWEST_EV = -20;
/** Groups of histories that standard errors come from: known to 18 %. */
const GROUPS = 16;
/** Changes are simulated with this share of the histories of the base, within limits. */
const CHANGE_SHARE = 1 / 16;
const CHANGE_HISTORIES = [262_144, 2_097_152] as const;

/**
 * Makes templates of a scenario on a wide window and a fine step.
 *
 * The base takes the histories of the scenario. A change that the histories do not see is evaluated from those, exactly.
 * Every other change is simulated as a pair with the base, both with the random numbers of the next seed: noise of the
 * base template can then not pass for a change.
 *
 * @param load Makes the scenario with overrides.
 * @param settings Window, step, workers.
 * @returns The maker.
 */
export async function templateMaker(
  load: (overrides: readonly string[]) => Promise<LoadedScenario>,
  settings: TemplateSettings,
): Promise<TemplateMaker> {
  const { resolved: asGiven } = await load([]);
  const [lowEv, highEv] = settings.windowEv;
  const startEv = Math.max(LOWEST_EV, lowEv);
  const stepEv = Math.max(
    LEAST_STEP_EV,
    (highEv - startEv) / MOST_POINTS,
    Math.min(asGiven.resolutionFwhmEv / POINTS_PER_FWHM, settings.channelStepEv),
  );
  const baseBatches = batchesFor(asGiven.histories);
  const [least, most] = CHANGE_HISTORIES;
  const changeHistories = Math.min(
    most,
    Math.max(least, CHANGE_SHARE * asGiven.histories),
    asGiven.histories,
  );
  const changeBatches = Math.max(GROUPS, batchesFor(changeHistories));
  const allBatches = baseBatches + settings.runs * changeBatches;
  let doneBatches = 0;

  /** A scenario on the template's window, which follows the Fermi edge. */
  async function resolve(overrides: readonly string[]): Promise<ResolvedScenario> {
    const { resolved } = await load(overrides);
    const movedEv = fermiEdgeEv(resolved) - fermiEdgeEv(asGiven);
    return (await load([
      ...overrides,
      `acquisition.startEv=${Math.max(LOWEST_EV, startEv + movedEv)}`,
      `acquisition.endEv=${highEv + movedEv}`,
      `acquisition.stepEv=${stepEv}`,
    ])).resolved;
  }

  async function simulate(resolved: ResolvedScenario, seed: number, batches: number) {
    const engine = engineData(resolved);
    const { signal, onProgress, workers } = settings;
    const tally = await runHistories(engine, seed, batches, {
      workers,
      ...(signal && { signal }),
      onProgress: (done) => onProgress?.(doneBatches + done, allBatches),
    });
    doneBatches += batches;
    if (tally.batches < batches) return null;
    return { template: templateOf(resolved, engine, tally, true), resolved, engine, tally };
  }

  let reference: Awaited<ReturnType<typeof simulate>> | undefined;

  return {
    baseHistories: baseBatches * HISTORIES_PER_BATCH,
    changeHistories: changeBatches * HISTORIES_PER_BATCH,
    async base() {
      const resolved = await resolve([]);
      const run = await simulate(resolved, resolved.seed, baseBatches);
      return run && { ...run, key: await engineKey(resolved) };
    },
    async family(base, parameter) {
      const nodes: TemplateNode[] = [];
      const place = (template: Template): Template =>
        parameter.isRigid
          ? { ...template, cutoffEv: base.template.cutoffEv, fermiEdgeEv: base.template.fermiEdgeEv }
          : template;
      for (const value of parameter.values) {
        const resolved = await resolve(parameter.overrides(value));
        if (await engineKey(resolved) === base.key) {
          const template = place(templateOf(resolved, base.engine, base.tally, false));
          nodes.push({ value, template, reference: null });
          continue;
        }
        reference ??= await simulate(base.resolved, base.resolved.seed + 1, changeBatches);
        const run = reference && await simulate(resolved, base.resolved.seed + 1, changeBatches);
        if (!run || !reference) return null;
        nodes.push({ value, template: place(run.template), reference: reference.template });
      }
      const { name, unit, baseValue, range: [lower, upper] } = parameter;
      return templateFamily({ name, unit, baseValue, lower, upper }, base.template, nodes);
    },
  };
}

function templateOf(
  resolved: ResolvedScenario,
  engine: EngineData,
  tally: Tally,
  withGroups: boolean,
): Template {
  const { acquisition } = resolved;
  const spectrum = expectedSpectrum(resolved, engine, tally);
  const [first] = tally.groups;
  const nothing = {
    ...first,
    forced: new Float64Array(first.forced.length),
    analogue: new Float64Array(first.analogue.length),
    events: new Float64Array(first.events.length),
  };
  const countsOf = (group: Tally["groups"][number]): Float64Array =>
    expectedSpectrum(resolved, engine, { batches: 1, histories: group.histories, groups: [group] }).counts;
  return {
    startEv: spectrum.kineticEnergiesEv[0],
    stepEv: acquisition.stepEv,
    counts: spectrum.counts,
    direct: countsOf(nothing),
    groups: withGroups ? mergedGroups(tally).map(countsOf) : [],
    darkCounts: acquisition.darkRateCountsPerS * acquisition.dwellS * acquisition.sweeps,
    cutoffEv: resolved.workFunctionEv + resolved.kineticEnergyShiftEv,
    fermiEdgeEv: fermiEdgeEv(resolved),
    resolutionFwhmEv: resolved.resolutionFwhmEv,
    isSlow: engine.kind === "pair",
  };
}

function fermiEdgeEv({ photonEnergyEv, kineticEnergyShiftEv }: ResolvedScenario): number {
  return photonEnergyEv + kineticEnergyShiftEv;
}

/** The groups of a tally added up to fewer. */
function mergedGroups({ groups }: Tally): Tally["groups"] {
  const merged: Tally["groups"][number][] = [];
  groups.forEach((group, g) => {
    const into = merged[g % GROUPS];
    if (into === undefined) return merged.push(structuredClone(group));
    merged[g % GROUPS] = {
      histories: into.histories + group.histories,
      forced: into.forced.map((value, i) => value + group.forced[i]),
      analogue: into.analogue.map((value, i) => value + group.analogue[i]),
      events: into.events.map((value, i) => value + group.events[i]),
    };
  });
  return merged;
}
