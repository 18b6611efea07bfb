import { cannot, InputError, type Notice, suggest } from "../base/mod.ts";
import { type BadChannels, badChannels, deadTimeCorrected, withoutBadChannels } from "./data_checks.ts";
import type { Satellite } from "./satellites.ts";

/** One measured region as a fit needs it. */
export interface EdgeRegion {
  /** Name of the region in its file; may be empty. */
  readonly label: string;
  /** File it came from. */
  readonly file: string;
  /** Kind of energy axis, as the file says. */
  readonly energyKind: "kinetic" | "binding" | "unknown";
  /** Energies, ascending, eV, shape (n). */
  readonly energiesEv: Float64Array;
  /** Counts, >= 0, shape (n). */
  readonly counts: Float64Array;
  /** Photon energy, eV, or null. */
  readonly photonEnergyEv: number | null;
  /** Sample bias as written, V, or null. */
  readonly biasV: number | null;
  /** `true` when the bias is negative for acceleration and the axis is as recorded, by the definition of the format. */
  readonly asRecorded: boolean;
  /** Analyzer work function as written, eV, or null. */
  readonly analyzerWorkFunctionEv: number | null;
  /** Half-angle of the acceptance, degrees, or null. */
  readonly acceptanceHalfAngleDeg: number | null;
  /** Temperature, K, or null. */
  readonly temperatureK: number | null;
  /** Energy resolution, full width at half maximum, eV. Default: not known. */
  readonly resolutionFwhmEv?: number | null;
  /** Dead time of the counter, s; counts are corrected for it where the counting time is known. Default: not known. */
  readonly deadTimeS?: number | null;
  /** Time for which each channel was counted, all sweeps together, s. Default: not known. */
  readonly countingTimeS?: number | null;
}

/** Gain of the energy scale from reference lines: measured distance over true distance. */
export interface ScaleGain {
  /** Gain, > 0. */
  readonly value: number;
  /** Its standard uncertainty. */
  readonly standardUncertainty: number;
  /** Degrees of freedom of that uncertainty; Infinity when it was stated. */
  readonly degreesOfFreedom: number;
}

/** What the user states beyond the files; every value overrides the files. */
export interface MeasureOptions {
  /** Photon energy, eV, > 0. */
  readonly photonEnergyEv?: number;
  /** Sample bias, V, negative accelerates; states that energies are as recorded. */
  readonly biasV?: number;
  /** Kind of energy axis. */
  readonly axis?: "kinetic" | "binding";
  /** Position of the Fermi level on the axis, eV, for example from a reference metal. */
  readonly fermiLevelEv?: number;
  /** Use only regions with these labels. */
  readonly regions?: readonly string[];
  /** Temperature, K, >= 0. */
  readonly temperatureK?: number;
  /** Half-angle of the acceptance, degrees. */
  readonly acceptanceHalfAngleDeg?: number;
  /** Energy resolution, full width at half maximum, eV, > 0. */
  readonly resolutionFwhmEv?: number;
  /** Gain of the energy scale; distances are divided by it. Default: 1, uncertainty not known. */
  readonly scaleGain?: ScaleGain;
  /** `true` to compute profile-likelihood intervals of both edges. Default: false. */
  readonly profile?: boolean;
  /** Parametric bootstrap of both edges: number of replicates >= 10, and seed. Default: none. */
  readonly bootstrap?: { readonly replicates: number; readonly seed: number };
  /** Known line nearest to a photon energy, with the weaker lines of its lamp; null when it is none. */
  readonly knownLine: (
    photonEnergyEv: number,
  ) => { readonly name: string; readonly energyEv: number; readonly satellites: readonly Satellite[] } | null;
}

/** A region on an ascending kinetic axis, counts corrected for dead time and cleaned of single bad channels. */
export type KineticRegion = EdgeRegion & {
  readonly photonEnergyEv: number;
  readonly photonFrom: string;
  /** Photon energy that the file says, eV, or null. */
  readonly readPhotonEnergyEv: number | null;
  readonly axisFrom: string;
  readonly fromBinding: boolean;
  readonly readRangeEv: readonly [number, number];
  /** Counts as read, on the same axis. */
  readonly rawCounts: Float64Array;
  /** Channels that cannot be counting statistics; in `counts` dropouts and spikes are the mean of their neighbors. */
  readonly bad: BadChannels;
  /** Largest share of the electrons lost to dead time. */
  readonly deadShare: number;
};

/** Facts that all chosen regions share, each with its origin. */
export interface CommonFacts {
  readonly biasV: number | null;
  readonly biasFrom: string;
  readonly asRecorded: boolean;
  readonly analyzerWorkFunctionEv: number | null;
  readonly analyzerFrom: string;
  readonly temperatureK: number;
  readonly temperatureFrom: string;
  readonly acceptanceHalfAngleDeg: number | null;
  readonly acceptanceFrom: string;
  readonly resolutionFwhmEv: number | null;
  readonly resolutionFrom: string;
}

const DEFAULT_TEMPERATURE_K = 300;
/** No edge can be fitted in coarser steps, eV (chosen; edges of interest are below 0.5 eV wide). */
const COARSEST_STEP_EV = 1;
/** Values closer than this, in their units, are the same but for rounding. */
const ROUNDING = 0.001;
/** Photon energies above this are core-level work and are not picked without being named, eV. */
const HIGHEST_ULTRAVIOLET_EV = 100;

/**
 * Regions of one photon energy, the named ones or those of the lowest photon energy in the ultraviolet, on a kinetic axis.
 *
 * @param regions All regions.
 * @param options What the user states.
 * @returns At least one region.
 * @throws {InputError} If no region, photon energy or axis can be settled, or the biases or kinds of axis differ.
 */
export function chooseRegions(regions: readonly EdgeRegion[], options: MeasureOptions): KineticRegion[] {
  const labels = [...new Set(regions.map((region) => region.label))];
  const problems = (options.regions ?? []).filter((label) => !labels.includes(label)).map((label) => {
    const near = suggest(label, labels);
    return {
      place: "--region",
      message: cannot(
        "pick a region",
        `the label must be one of ${labels.map((l) => JSON.stringify(l)).join(", ")}${
          near ? ` (did you mean ${near}?)` : ""
        }`,
        label,
      ),
    };
  });
  if (problems.length > 0) throw new InputError(problems);
  const named = regions.filter((region) => options.regions?.includes(region.label) ?? true);
  const lit = named.flatMap((region) => {
    const photonEnergyEv = options.photonEnergyEv ?? region.photonEnergyEv;
    if (photonEnergyEv === null) return [];
    const photonFrom = options.photonEnergyEv !== undefined ? "given by the user" : "file";
    return [{ ...region, photonEnergyEv, photonFrom, readPhotonEnergyEv: region.photonEnergyEv }];
  });
  if (lit.length === 0) {
    throw new InputError([{
      place: named[0]?.file ?? "",
      message: cannot(
        "fit spectrum",
        "the photon energy must be in the file or given with --photon-energy",
        "unknown",
      ),
    }]);
  }
  const lowest = Math.min(...lit.map((region) => region.photonEnergyEv));
  if (lowest > HIGHEST_ULTRAVIOLET_EV && options.regions === undefined) {
    throw new InputError([{
      place: lit[0].file,
      message: cannot(
        "find a region for a work function",
        `a photon energy must be <= ${HIGHEST_ULTRAVIOLET_EV} eV unless regions are named with --region`,
        `${lowest} eV`,
      ),
    }]);
  }
  const lowestLit = lit.filter((region) => Math.abs(region.photonEnergyEv - lowest) < 0.01);
  const chosen = lowestLit.filter((region) => !(stepOf(region) > COARSEST_STEP_EV));
  if (chosen.length === 0) {
    throw new InputError([{
      place: lowestLit[0].file,
      message: cannot(
        "fit spectrum",
        `the energy step must be <= ${COARSEST_STEP_EV} eV (too coarse for any edge; are the energies in eV?)`,
        `${Number(stepOf(lowestLit[0]).toPrecision(6))} eV`,
      ),
    }]);
  }
  const biases = [...new Set(chosen.map((region) => region.biasV))];
  if (biases.length > 1 && options.biasV === undefined) {
    throw new InputError([{
      place: chosen.map((region) => region.file).join(", "),
      message: cannot(
        "fit regions together",
        "all must have the same bias (name regions with --region, or state the bias with --bias)",
        biases.map((bias) => (bias === null ? "unknown" : `${bias} V`)).join(", "),
      ),
    }]);
  }
  const kinetic = chosen.map((region) => ontoKineticAxis(region, options));
  if (kinetic.some((region) => region.fromBinding !== kinetic[0].fromBinding)) {
    throw new InputError([{
      place: chosen.map((region) => region.file).join(", "),
      message: cannot(
        "fit regions together",
        "all must have one kind of energy axis (convert one, or name regions with --region)",
        kinetic.map((region) => region.fromBinding ? "binding" : "kinetic").join(", "),
      ),
    }]);
  }
  return kinetic;
}

/** Mean step of a region, eV. */
function stepOf({ energiesEv }: EdgeRegion): number {
  return Math.abs(energiesEv[energiesEv.length - 1] - energiesEv[0]) / (energiesEv.length - 1);
}

function ontoKineticAxis(
  region: EdgeRegion & Pick<KineticRegion, "photonEnergyEv" | "photonFrom" | "readPhotonEnergyEv">,
  options: MeasureOptions,
): KineticRegion {
  const kind = options.axis ?? region.energyKind;
  if (kind === "unknown") {
    throw new InputError([{
      place: region.file,
      message: cannot(
        "fit spectrum",
        "the kind of energy axis must be in the file or given with --axis",
        "unknown",
      ),
    }]);
  }
  const n = region.energiesEv.length;
  const fromBinding = kind === "binding";
  const rawCounts = fromBinding ? region.counts.slice().reverse() : region.counts;
  const { deadTimeS = null, countingTimeS = null } = region;
  const live = deadTimeS === null || countingTimeS === null
    ? { counts: rawCounts, deadShare: 0 }
    : deadTimeCorrected(rawCounts, deadTimeS, countingTimeS);
  const bad = badChannels(rawCounts);
  return {
    ...region,
    counts: withoutBadChannels(live.counts, bad),
    deadShare: live.deadShare,
    rawCounts,
    bad,
    fromBinding,
    axisFrom: options.axis !== undefined ? "given by the user" : "file",
    readRangeEv: [region.energiesEv[0], region.energiesEv[n - 1]],
    energiesEv: fromBinding
      ? region.energiesEv.map((_, i) => region.photonEnergyEv - region.energiesEv[n - 1 - i])
      : region.energiesEv,
  };
}

/**
 * Warnings for values that the user states and the files say otherwise.
 *
 * @param regions The chosen regions.
 * @param options What the user states.
 * @returns One warning for each value and each contradiction.
 */
export function overrides(regions: readonly KineticRegion[], options: MeasureOptions): Notice[] {
  const values: readonly (readonly [
    name: string,
    unit: string,
    given: number | undefined,
    read: (region: KineticRegion) => number | null | undefined,
  ])[] = [
    ["photon energy", "eV", options.photonEnergyEv, (region) => region.readPhotonEnergyEv],
    // Without a definition by the format the sign of a bias is the writer's.
    [
      "bias",
      "V",
      options.biasV,
      ({ biasV, asRecorded }) =>
        biasV === null || asRecorded || options.biasV === undefined
          ? biasV
          : Math.sign(options.biasV) * Math.abs(biasV),
    ],
    ["temperature", "K", options.temperatureK, (region) => region.temperatureK],
    ["acceptance", "degrees", options.acceptanceHalfAngleDeg, (region) => region.acceptanceHalfAngleDeg],
    ["resolution", "eV", options.resolutionFwhmEv, (region) => region.resolutionFwhmEv],
  ];
  const messages = regions.flatMap((region) => {
    const { axis } = options;
    const contradictions = values.flatMap(([name, unit, given, read]) => {
      const said = read(region) ?? null;
      return given === undefined || said === null || Math.abs(given - said) <= ROUNDING
        ? []
        : [`${name} ${given} ${unit} is used as stated, but the file says ${said} ${unit}`];
    });
    return axis === undefined || region.energyKind === "unknown" || axis === region.energyKind
      ? contradictions
      : [
        ...contradictions,
        `a ${axis} energy axis is used as stated, but the file says ${region.energyKind} energies`,
      ];
  });
  return [...new Set(messages)].map((message) => ({ code: "overridden", message, place: "" }));
}

/**
 * What is known about the measurement as a whole.
 *
 * @param regions The chosen regions.
 * @param options What the user states.
 * @returns Facts with where each came from.
 */
export function commonFacts(regions: readonly KineticRegion[], options: MeasureOptions): CommonFacts {
  const first = regions[0];
  const origin = (given: number | undefined, read: number | null, missing: string): string =>
    given !== undefined ? "given by the user" : read !== null ? "file" : missing;
  const known = (pick: (region: EdgeRegion) => number | null | undefined): number | null =>
    regions.map(pick).find((value) => typeof value === "number") ?? null;
  const temperature = known((region) => region.temperatureK);
  const acceptance = known((region) => region.acceptanceHalfAngleDeg);
  const resolution = known((region) => region.resolutionFwhmEv);
  return {
    biasV: options.biasV ?? first.biasV,
    biasFrom: origin(options.biasV, first.biasV, "not known"),
    asRecorded: options.biasV !== undefined || regions.every((region) => region.asRecorded),
    analyzerWorkFunctionEv: first.analyzerWorkFunctionEv,
    analyzerFrom: origin(undefined, first.analyzerWorkFunctionEv, "not known"),
    temperatureK: options.temperatureK ?? temperature ?? DEFAULT_TEMPERATURE_K,
    temperatureFrom: origin(
      options.temperatureK,
      temperature,
      `not known, ${DEFAULT_TEMPERATURE_K} K assumed`,
    ),
    acceptanceHalfAngleDeg: options.acceptanceHalfAngleDeg ?? acceptance,
    acceptanceFrom: origin(options.acceptanceHalfAngleDeg, acceptance, "not known"),
    resolutionFwhmEv: options.resolutionFwhmEv ?? resolution,
    resolutionFrom: origin(options.resolutionFwhmEv, resolution, "not known"),
  };
}
