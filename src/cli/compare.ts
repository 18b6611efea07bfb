import { cannot, InputError, suggest, VERSION } from "../base/mod.ts";
import {
  type Agreement,
  type AxisReading,
  judgeMatch,
  type Match,
  type MatchChannels,
  type MatchedValue,
  matchTemplate,
  type PartTest,
  placeAxis,
  rankSuspects,
  type SuspectReport,
  type TemplateFamily,
  testParts,
} from "../compare/mod.ts";
import type { SpectrumRegion } from "../formats/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import { type SimulatedTemplate, type TemplateMaker, templateMaker } from "./compare_templates.ts";
import {
  freeParameter,
  type FreePath,
  type ScenarioParameter,
  suspectParameters,
} from "./compare_parameters.ts";
import { poissonCounts } from "./fit.ts";
import { type ColumnPair, readSpectra } from "./read.ts";
import { loadScenario } from "./simulate.ts";

/** What the user asks of a comparison. */
export interface CompareOptions {
  /** `PATH=VALUE` changes of the scenario. */
  readonly set: readonly string[];
  /** Labels of the regions to use; all that fit the photon energy when empty. */
  readonly regions: readonly string[];
  /** Kind of energy axis, where the file does not say or is wrong. */
  readonly axis?: "kinetic" | "binding";
  /** Columns of a CSV file. */
  readonly columns?: ColumnPair;
  /** Scenario parameters to fit. */
  readonly free: readonly FreePath[];
  /** Names of the suspects to try; null for all, none when empty. */
  readonly suspects: readonly string[] | null;
  /** Worker threads. */
  readonly workers: number;
  /** Stops the simulations. */
  readonly signal?: AbortSignal;
  /** Called as histories are done. */
  readonly onProgress?: (done: number, all: number) => void;
}

/** A comparison. */
export interface Comparison {
  /** The file. */
  readonly measured: string;
  /** Title of the scenario. */
  readonly title: string;
  /** Regions used. */
  readonly regions: readonly string[];
  /** How the energy axis was read, and what else would fit. */
  readonly axis: { readonly how: string; readonly isAbsolute: boolean; readonly others: readonly string[] };
  /** Verdict on the scenario as it is, instrument aligned. */
  readonly agreement: Agreement;
  /** Parameters of the alignment. */
  readonly alignment: readonly MatchedValue[];
  /** Tests of the alignment. */
  readonly parts: readonly PartTest[];
  /** Single changes; null where none was tried. */
  readonly suspects: SuspectReport | null;
  /** Suspects that could not be tried, and why. */
  readonly notTried: readonly { readonly name: string; readonly reason: string }[];
  /** Fitted scenario parameters; null where none was free. */
  readonly fitted: {
    readonly values: readonly MatchedValue[];
    readonly parts: readonly PartTest[];
    readonly agreement: Agreement;
  } | null;
  /** Histories of the scenario and of each change. */
  readonly histories: { readonly base: number; readonly change: number };
  /** Curves for the figure: the fit of the free parameters where there is one, else the alignment. */
  readonly curves: { readonly channels: MatchChannels; readonly match: Match };
}

/** A file that differs in photon energy by more is of another experiment, eV (a nominal value may be rounded). */
const PHOTON_TOLERANCE_EV = 0.05;
/** Template around the measured window: as far as the axis may move, and a little. */
const MARGIN_EV = 2;
/** Electrons are expected from so far below the cutoff to so far above the Fermi edge (satellites), eV. */
const BELOW_EV = 1;
const ABOVE_EV = 5;
const ALIGNED = { gain: true, extraFwhm: true, background: true } as const;
/** With free scenario parameters, gain and width stay those of the scenario, since they would take their part. */
const FITTED = { gain: false, extraFwhm: false, background: true } as const;

/**
 * Compares a measured spectrum with a scenario.
 *
 * @param measured Path of the measured file.
 * @param scenario Path of the scenario.
 * @param options What is asked.
 * @returns The comparison; null when stopped.
 * @throws {InputError} If the two cannot be of one experiment, or a parameter cannot be varied.
 */
export async function compareFiles(
  measured: string,
  scenario: string,
  options: CompareOptions,
): Promise<Comparison | null> {
  const load = (overrides: readonly string[]) => loadScenario(scenario, [...options.set, ...overrides]);
  const loaded = await load([]);
  const { resolved } = loaded;
  const regions = chooseRegions(
    (await readSpectra(measured, options.columns)).regions,
    measured,
    resolved,
    options,
  );
  const isBinding = axisKind(regions[0], measured, options) === "binding";
  const channels = channelsOf(regions, measured, isBinding);
  const readings = axisReadings(regions[0], measured, resolved, isBinding);
  const possible = readings.filter((reading) => overlaps(channels, reading, resolved));
  if (possible.length === 0) throw noOverlap(measured, channels, readings, resolved);

  const free = options.free.map((path) => freeParameter(path, loaded));
  const named = suspectParameters(loaded);
  const wanted = wantedSuspects(named, options.suspects);
  const maker = await templateMaker(load, {
    windowEv: [
      Math.min(...possible.map(({ shiftEv }) => channels.energiesEv[0] + shiftEv)) - MARGIN_EV,
      Math.max(
        ...possible.map(({ shiftEv }) => channels.energiesEv[channels.energiesEv.length - 1] + shiftEv),
      ) +
      MARGIN_EV,
    ],
    channelStepEv: medianStep(channels.energiesEv),
    workers: options.workers,
    ...(options.signal && { signal: options.signal }),
    ...(options.onProgress && { onProgress: options.onProgress }),
    runs: [...wanted, ...free].reduce((sum, { values }) => sum + values.length, 0),
  });
  const base = await maker.base();
  if (base === null) return null;

  const placed = placeAxis(base.template, channels, possible);
  const onModel = { ...channels, energiesEv: channels.energiesEv.map((e) => e + placed[0].shiftEv) };
  const startOffsetEv = placed[0].startOffsetEv;
  const alignment = matchTemplate(base.template, [], onModel, ALIGNED, startOffsetEv);
  const isAbsolute = readings.length === 1;
  const parts = testParts(alignment, onModel, base.template, resolved.resolutionFwhmEv);

  const notTried: { name: string; reason: string }[] = [];
  const families = await familiesOf(maker, base, wanted, (name, reason) => notTried.push({ name, reason }));
  if (families === null) return null;
  const suspects = wanted.length === 0 ? null : rankSuspects(base.template, families, onModel, startOffsetEv);
  const freeFamilies = await familiesOf(maker, base, free, (name, reason) => {
    throw new InputError([{ place: `--free ${name}`, message: reason }]);
  });
  if (freeFamilies === null) return null;
  const freeMatch = free.length === 0
    ? null
    : matchTemplate(base.template, freeFamilies, onModel, FITTED, startOffsetEv);
  const fittedParts = freeMatch && testParts(freeMatch, onModel, base.template, resolved.resolutionFwhmEv);
  return {
    measured,
    title: resolved.title,
    regions: regions.map(({ label }) => label),
    axis: {
      how: placed[0].how,
      isAbsolute,
      others: placed.slice(1).map(({ how, deviance }) =>
        `${how} (deviance ${deviance.toPrecision(3)} against ${placed[0].deviance.toPrecision(3)})`
      ),
    },
    agreement: withCautions(judgeMatch(alignment, parts, isAbsolute), regions, resolved),
    alignment: alignment.values,
    parts,
    suspects,
    notTried,
    fitted: freeMatch && fittedParts && {
      values: freeMatch.values,
      parts: fittedParts,
      agreement: judgeMatch(freeMatch, fittedParts, isAbsolute),
    },
    histories: { base: maker.baseHistories, change: maker.changeHistories },
    curves: { channels: onModel, match: freeMatch ?? alignment },
  };
}

/** The comparison as one JSON object, curves left out. */
export function compareJson({ curves: _, ...rest }: Comparison): Record<string, unknown> {
  return { ...rest, version: VERSION };
}

/** The curves as a CSV table. */
export function compareCsv({ curves: { channels, match } }: Comparison): string {
  const rows = Array.from(channels.energiesEv, (energyEv, i) =>
    [
      channels.regions[i] + 1,
      Number(energyEv.toFixed(9)),
      channels.counts[i],
      match.expected[i],
      match.standardErrors[i],
    ].join(","));
  return ["region,kinetic_energy_ev,counts,expected_counts,standard_error", ...rows, ""].join("\n");
}

async function familiesOf(
  maker: TemplateMaker,
  base: SimulatedTemplate,
  parameters: readonly ScenarioParameter[],
  refused: (name: string, reason: string) => void,
): Promise<TemplateFamily[] | null> {
  const families: TemplateFamily[] = [];
  for (const parameter of parameters) {
    try {
      const family = await maker.family(base, parameter);
      if (family === null) return null;
      families.push(family);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      refused(parameter.name, error.message);
    }
  }
  return families;
}

function chooseRegions(
  regions: readonly SpectrumRegion[],
  file: string,
  resolved: ResolvedScenario,
  options: CompareOptions,
): SpectrumRegion[] {
  const labels = regions.map(({ label }) => label);
  const unknown = options.regions.find((label) => !labels.includes(label));
  if (unknown !== undefined) {
    const near = suggest(unknown, labels);
    const rule = `the label must be one of ${labels.map((label) => JSON.stringify(label)).join(", ")}${
      near ? ` (did you mean ${near}?)` : ""
    }`;
    throw new InputError([{ place: "--region", message: cannot("pick a region", rule, unknown) }]);
  }
  const chosen = regions.filter(({ label }) =>
    options.regions.length === 0 || options.regions.includes(label)
  );
  const lit = chosen.filter(({ photonEnergyEv }) =>
    photonEnergyEv === null || Math.abs(photonEnergyEv - resolved.photonEnergyEv) < PHOTON_TOLERANCE_EV
  );
  if (lit.length === 0 || (options.regions.length > 0 && lit.length < chosen.length)) {
    const other = chosen.find((region) => !lit.includes(region))!;
    throw new InputError([{
      place: file,
      message: cannot(
        "compare",
        `the photon energy must be that of the scenario, ${resolved.photonEnergyEv.toFixed(3)} eV`,
        `${other.photonEnergyEv} eV (region ${other.label || "without a label"})`,
      ),
    }]);
  }
  const kinds = new Set(
    lit.map((region) => `${axisKind(region, file, options)} ${region.asRecorded} ${region.biasV}`),
  );
  if (kinds.size > 1) {
    throw new InputError([{
      place: file,
      message: cannot(
        "compare regions together",
        "all must have one kind of energy axis and one bias (name regions with --region)",
        [...kinds].join(", "),
      ),
    }]);
  }
  return lit;
}

function axisKind(region: SpectrumRegion, file: string, { axis }: CompareOptions): "kinetic" | "binding" {
  const kind = axis ?? region.energyKind;
  if (kind !== "unknown") return kind;
  throw new InputError([{
    place: file,
    message: cannot("compare", "the kind of energy axis must be in the file or given with --axis", "unknown"),
  }]);
}

/** All channels in order of energy, binding energies as their negative. */
function channelsOf(regions: readonly SpectrumRegion[], file: string, isBinding: boolean): MatchChannels {
  const rows = regions.flatMap((region, r) => {
    const counts = poissonCounts(region, file);
    return Array.from(region.energiesEv, (energy, i) => ({
      energyEv: isBinding ? -energy : energy,
      counts: counts[i],
      region: r,
    }));
  }).sort((a, b) => a.energyEv - b.energyEv);
  return {
    energiesEv: Float64Array.from(rows, ({ energyEv }) => energyEv),
    counts: Float64Array.from(rows, ({ counts }) => counts),
    regions: Int32Array.from(rows, ({ region }) => region),
    regionCount: regions.length,
  };
}

/** Ways to put the energies of a file on the axis as recorded. */
function axisReadings(
  region: SpectrumRegion,
  file: string,
  resolved: ResolvedScenario,
  isBinding: boolean,
): AxisReading[] {
  const { biasV, kineticEnergyShiftEv, photonEnergyEv } = resolved;
  if (isBinding) {
    return [{
      shiftEv: photonEnergyEv + kineticEnergyShiftEv,
      how: "binding energies, zero at the Fermi edge of the scenario's photon energy",
    }];
  }
  const asRecorded = { shiftEv: 0, how: "kinetic energies as recorded" };
  if (region.asRecorded) {
    const stated = [
      ["bias", "biasV", region.biasV, biasV, "V"],
      [
        "analyzer work function",
        "analyzer.workFunctionEv",
        region.analyzerWorkFunctionEv,
        resolved.analyzerWorkFunctionEv,
        "eV",
      ],
    ] as const;
    const problems = stated.flatMap(([name, path, inFile, inScenario, unit]) =>
      inFile === null || Math.abs(inFile - inScenario) < 1e-6 ? [] : [{
        place: file,
        message: cannot(
          "compare",
          `the ${name} must be that of the scenario, ${inScenario} ${unit} (or --set ${path}=${inFile})`,
          `${inFile} ${unit}`,
        ),
      }]
    );
    if (problems.length > 0) throw new InputError(problems);
    return [asRecorded];
  }
  return [
    asRecorded,
    ...(biasV === 0 ? [] : [{ shiftEv: -biasV, how: "kinetic energies with the bias taken off" }]),
    {
      shiftEv: kineticEnergyShiftEv,
      how:
        "kinetic energies with bias and analyzer work function taken off: the Fermi edge at the photon energy",
    },
  ];
}

function overlaps(channels: MatchChannels, { shiftEv }: AxisReading, resolved: ResolvedScenario): boolean {
  const { energiesEv } = channels;
  const [low, high] = emissionRange(resolved);
  return energiesEv[energiesEv.length - 1] + shiftEv > low && energiesEv[0] + shiftEv < high;
}

function emissionRange(
  { workFunctionEv, photonEnergyEv, kineticEnergyShiftEv }: ResolvedScenario,
): [number, number] {
  return [workFunctionEv + kineticEnergyShiftEv - BELOW_EV, photonEnergyEv + kineticEnergyShiftEv + ABOVE_EV];
}

function noOverlap(
  file: string,
  { energiesEv }: MatchChannels,
  readings: readonly AxisReading[],
  resolved: ResolvedScenario,
): InputError {
  const [low, high] = emissionRange(resolved).map((energy) => energy.toFixed(2));
  const found = readings.map(({ shiftEv, how }) =>
    `${(energiesEv[0] + shiftEv).toFixed(2)} to ${
      (energiesEv[energiesEv.length - 1] + shiftEv).toFixed(2)
    } eV read as ${how}`
  );
  return new InputError([{
    place: file,
    message:
      `Cannot compare as energies must overlap those of the scenario, ${low} to ${high} eV as recorded: ` +
      `current value is ${found.join("; ")} (is the axis reversed? see --axis)`,
  }]);
}

function wantedSuspects(
  all: readonly ScenarioParameter[],
  names: readonly string[] | null,
): ScenarioParameter[] {
  if (names === null) return [...all];
  const known = all.map(({ name }) => name);
  const problems = names.filter((name) => !known.includes(name)).map((name) => ({
    place: "--suspect",
    message: cannot("try a suspect", `it must be one of ${known.join(", ")}`, name),
  }));
  if (problems.length > 0) throw new InputError(problems);
  return all.filter(({ name }) => names.includes(name));
}

/** Facts of the file that differ from the scenario do not stop a comparison, but are said. */
function withCautions(
  agreement: Agreement,
  regions: readonly SpectrumRegion[],
  resolved: ResolvedScenario,
): Agreement {
  const facts = [
    ["temperature_k", resolved.temperatureK, "K"],
    ["resolution_fwhm_ev", resolved.resolutionFwhmEv, "eV"],
    ["acceptance_half_angle_deg", resolved.acceptanceHalfAngleDeg, "degrees"],
  ] as const;
  const said = facts.flatMap(([key, inScenario, unit]) => {
    const text = regions[0].metadata[key];
    const inFile = Number(text);
    if (text === undefined || !(Math.abs(inFile - inScenario) > 1e-6 * Math.abs(inScenario))) return [];
    return [`the file says ${key} ${inFile} ${unit}, the scenario ${inScenario} ${unit}`];
  });
  return { ...agreement, cautions: [...agreement.cautions, ...said] };
}

function medianStep(energiesEv: Float64Array): number {
  const steps = Array.from(energiesEv.subarray(1), (energy, i) => energy - energiesEv[i]).filter((s) =>
    s > 1e-9
  )
    .sort((a, b) => a - b);
  return steps[steps.length >> 1];
}
