import { cannot, type Estimate, InputError, type Notice, suggest } from "../base/mod.ts";
import { BOLTZMANN_EV_PER_K } from "../data/mod.ts";
import { fitCutoff, type FittedEdge } from "./cutoff.ts";
import { type EnergyReference, energyReferences } from "./energy_reference.ts";
import { fitFermiEdge, type FittedFermiEdge } from "./fermi.ts";
import {
  cutoffCandidate,
  type EdgeCandidate,
  edgeCandidates,
  meanCounts,
  SHARP_EV,
  SLOW_EV,
} from "./locate.ts";
import type { Satellite } from "./satellites.ts";
import { type FittedValenceEdge, fitValenceEdge } from "./valence.ts";

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
  /** Known line nearest to a photon energy, with the weaker lines of its lamp; null when it is none. */
  readonly knownLine: (
    photonEnergyEv: number,
  ) => { readonly name: string; readonly energyEv: number; readonly satellites: readonly Satellite[] } | null;
}

/** How far an answer is to be trusted. */
export type Verdict = "good" | "doubtful" | "failed";

/** One line of the uncertainty budget (JCGM 100, ch. 4 and 5). */
export interface BudgetTerm {
  /** What it is. */
  readonly name: string;
  /** Standard uncertainty, eV; 0 where it cancels. */
  readonly standardUncertaintyEv: number;
  /** Which results it enters. */
  readonly enters: readonly (
    | "workFunctionEv"
    | "cutoffEv"
    | "fermiEdgeEv"
    | "maxKineticEnergyEv"
    | "ionizationEnergyEv"
    | "valenceBandMaximumEv"
  )[];
  /** Where it comes from. */
  readonly note: string;
}

/** A region that was used. */
export interface RegionUse {
  /** File. */
  readonly file: string;
  /** Label in the file. */
  readonly region: string;
  /** First and last energy as read, eV. */
  readonly rangeEv: readonly [number, number];
  /** What it was used for. */
  readonly use: string;
}

/** What was read and assumed, each with where it came from. */
export interface FitInputs {
  /** Regions. */
  readonly regions: readonly RegionUse[];
  /** Kind of axis and its origin. */
  readonly axis: { readonly kind: "kinetic" | "binding"; readonly from: string };
  /** Photon energy and its origin. */
  readonly photonEnergyEv: { readonly value: number; readonly from: string };
  /** Bias and its origin. */
  readonly biasV: { readonly value: number | null; readonly from: string };
  /** Analyzer work function and its origin. */
  readonly analyzerWorkFunctionEv: { readonly value: number | null; readonly from: string };
  /** Temperature and its origin. */
  readonly temperatureK: { readonly value: number; readonly from: string };
  /** Acceptance half-angle and its origin. */
  readonly acceptanceHalfAngleDeg: { readonly value: number | null; readonly from: string };
  /** Position of the Fermi level on the axis and its origin; null when not known. */
  readonly fermiLevelEv: { readonly value: number | null; readonly from: string };
}

/** The answer of a fit. Values are null where they do not exist or cannot be trusted. */
export interface WorkFunctionResult {
  /** Work function, eV. */
  readonly workFunctionEv: Estimate | null;
  /** Secondary cutoff on the kinetic axis, eV (a binding-energy file is turned into `h nu - E_B`). */
  readonly cutoffEv: Estimate | null;
  /** Fermi edge on the same axis, eV; null without one. */
  readonly fermiEdgeEv: Estimate | null;
  /** Valence-band maximum below the Fermi level, eV; null for a metal. */
  readonly valenceBandMaximumEv: Estimate | null;
  /** Ionization energy, eV; the work function for a metal. */
  readonly ionizationEnergyEv: Estimate | null;
  /** Maximum kinetic energy outside the sample `h nu - W`, eV. */
  readonly maxKineticEnergyEv: Estimate | null;
  /** How far to trust it. */
  readonly verdict: Verdict;
  /** Why the verdict is not good. */
  readonly reasons: readonly string[];
  /** What else should be known. */
  readonly warnings: readonly Notice[];
  /** What was read and assumed. */
  readonly inputs: FitInputs;
  /** Uncertainty budget. */
  readonly budget: readonly BudgetTerm[];
  /** The fitted cutoff, with its curve. */
  readonly cutoffFit: FittedEdge | null;
  /** The fitted Fermi edge or valence edge, with its curve. */
  readonly upperFit: FittedEdge | null;
}

const DEFAULT_TEMPERATURE_K = 300;
/** Photon energies above this are core-level work and are not picked without being named, eV. */
const HIGHEST_ULTRAVIOLET_EV = 100;
/** Wavelengths of lamp lines are known better than this; pressure and self-absorption shift less, eV (chosen). */
const LINE_UNCERTAINTY_EV = 0.001;
/** A Fermi level read off a supplier's axis and not measured here, eV (chosen; typical between calibrations). */
const AXIS_UNCERTAINTY_EV = 0.03;
/** A fall weaker than this share of another one a satellite's distance below is that one's ghost. */
const GHOST_SHARE = 0.04;
const GHOST_DISTANCE_EV = 0.15;
/** Standard uncertainty of the acceptance ramp as a share of its width: flat emitter, flat entrance, sharp cone (chosen). */
const RAMP_SHARE = 0.02;
/**
 * A top that rises by more than this share is not that of a clean step. The sharp quantum barrier of our own simulation
 * (Au, Al) rises by 0.4 to 0.5 and moves the fitted cutoff up by 18 to 20 meV, taken as standard uncertainty (chosen).
 */
const LATE_RISE_SHARE = 0.1;
const LATE_RISE_EV = 0.02;
/** Misfit that makes an edge doubtful: reduced chi-square and chance probability together. */
const MISFIT_REDUCED = 2;
const MISFIT_PROBABILITY = 1e-4;

/**
 * Work function, maximum kinetic energy and ionization energy from one or more regions of one measurement.
 *
 * `W = h nu - (E_Fermi - E_cutoff)`: with a Fermi edge the energy scale, bias and analyzer work function cancel. Without
 * one (semiconductors, organics) W needs the position of the Fermi level on the axis; the ionization energy
 * `h nu - (E_VBM - E_cutoff)` does not.
 *
 * @param regions Regions of one file or of several files of the same sample and settings.
 * @param options What the user states.
 * @returns The answer; a poor one is a verdict, not an error.
 * @throws {InputError} If no region, photon energy or axis can be settled.
 */
export function measureWorkFunction(
  regions: readonly EdgeRegion[],
  options: MeasureOptions,
): WorkFunctionResult {
  const chosen = chooseRegions(regions, options).map((region) => ontoKineticAxis(region, options));
  const { photonEnergyEv, photonFrom } = chosen[0];
  const line = options.knownLine(photonEnergyEv);
  const satellites = line?.satellites ?? [];
  const facts = commonFacts(chosen, options);
  const reasons: string[] = [];
  const warnings: Notice[] = [];
  const warn = (code: string, message: string, place = ""): void =>
    void warnings.push({ code, message, place });

  // Cutoff: in the region with the most significant low edge.
  const cutoffs = chosen.flatMap((region) => {
    const candidate = cutoffCandidate(edgeCandidates(region.energiesEv, region.counts));
    return candidate ? [{ region, candidate }] : [];
  }).sort((a, b) => b.candidate.significance - a.candidate.significance);
  const cutoffPlace = cutoffs[0];
  const tangent = facts.acceptanceHalfAngleDeg === null
    ? null
    : Math.tan((facts.acceptanceHalfAngleDeg * Math.PI) / 180) ** 2;
  const rampKnown = tangent !== null && facts.asRecorded && !chosen[0].fromBinding;
  const cutoff = cutoffPlace
    ? fitCutoff(cutoffPlace.region.energiesEv, cutoffPlace.region.counts, cutoffPlace.candidate, {
      rampPerEv: rampKnown ? tangent : null,
    })
    : null;

  // Upper edge: falls of the main line; slow and faint ones only where no sharp one is found.
  const fallsAt = (sideEv: number): Fall[] =>
    chosen.flatMap((region) => {
      const all = edgeCandidates(region.energiesEv, region.counts, sideEv).filter((edge) =>
        edge.significance < 0
      );
      return all.filter((candidate) => !isGhost(candidate, all, region, satellites)).map((candidate) => ({
        region,
        candidate,
      }));
    });
  const sharpFalls = fallsAt(SHARP_EV);
  const falls = sharpFalls.length > 0 ? sharpFalls : fallsAt(SLOW_EV);
  const onset = falls.length > 0 ? Math.max(...falls.map((fall) => fall.candidate.energyEv)) : null;
  const references = cutoff === null ? [] : energyReferences(
    {
      photonEnergyEv,
      fromBinding: chosen[0].fromBinding,
      fermiLevelEv: options.fermiLevelEv === undefined
        ? null
        : chosen[0].fromBinding
        ? photonEnergyEv - options.fermiLevelEv
        : options.fermiLevelEv,
      biasV: facts.biasV,
      asRecorded: facts.asRecorded,
      analyzerWorkFunctionEv: facts.analyzerWorkFunctionEv,
    },
    cutoff.positionEv.value,
    onset,
  );
  const startSigmaEv = Math.min(0.15, cutoff?.sigmaEv.value ?? 0.05);
  const thermalEnergyEv = BOLTZMANN_EV_PER_K * facts.temperatureK;
  const fermi = findFermiEdge(falls, references, { thermalEnergyEv, satellites, startSigmaEv });
  const reference = fermi?.reference ?? (references.length === 1 ? references[0] : null);
  const highest = falls.filter((fall) => onset !== null && fall.candidate.energyEv > onset - 0.3)
    .sort((a, b) => levelBelow(b) - levelBelow(a))[0];
  const valence = fermi === null && highest !== undefined
    ? fitValenceEdge(highest.region.energiesEv, highest.region.counts, highest.candidate, satellites)
    : null;
  const upper: FittedEdge | null = fermi?.edge ?? valence;
  const upperRegion = fermi?.region ?? highest?.region;

  // Verdict.
  let failed = false;
  const fail = (reason: string): void => {
    failed = true;
    reasons.push(reason);
  };
  if (cutoff === null) {
    fail(
      "no secondary cutoff was found: no rise of the counts with enough channels around it; widen the window",
    );
  } else judge("secondary cutoff", cutoff, fail, reasons);
  if (upper === null) {
    fail(
      "neither a Fermi edge nor a valence-band edge was found: extend the window to higher kinetic energy",
    );
  } else judge(fermi ? "Fermi edge" : "valence-band edge", upper, fail, reasons);
  if (cutoff && cutoffPlace && cutoff.converged) {
    const { energiesEv, counts } = cutoffPlace.region;
    const position = cutoff.positionEv.value;
    const below = meanCounts(energiesEv, counts, position - 0.5, position - 4 * cutoff.sigmaEv.value);
    const above = meanCounts(energiesEv, counts, position + 2 * cutoff.sigmaEv.value, position + 0.5);
    if (position - energiesEv[0] < 4 * cutoff.sigmaEv.value) {
      fail("the window starts on the cutoff itself; start at least 0.3 eV lower");
    } else if (!(below < 0.4 * above)) {
      fail(
        "the lowest rise of the counts is not a cutoff: the counts below it are not small; start lower in energy",
      );
    }
    if (cutoff.lateRise > LATE_RISE_SHARE) {
      reasons.push(
        `the counts rise by ${(100 * cutoff.lateRise).toFixed(0)} % over the 0.3 eV above the cutoff: the ` +
          "barrier opens slowly or the surface has several work functions; the cutoff may lie lower",
      );
    }
    if (facts.asRecorded && !chosen[0].fromBinding && position < 0.5) {
      reasons.push("the cutoff lies at the analyzer's own limit; apply a larger negative bias");
    }
  }
  if (fermi === null && upper !== null && !failed) {
    const last = upperRegion?.energiesEv.at(-1) ?? -Infinity;
    if (reference !== null && last < reference.fermiLevelEv) {
      reasons.push(
        `the data end ${
          (reference.fermiLevelEv - last).toFixed(2)
        } eV below the Fermi level, so a Fermi edge could ` +
          "not be seen and what is taken for a valence-band maximum may be none; measure further up",
      );
    }
    if (references.length > 1) {
      fail("no Fermi edge was found and the axis can be read in several ways; give --fermi-level or --bias");
    } else if (reference === null || !reference.usable) {
      fail(
        "no Fermi edge was found and the position of the Fermi level on the axis is not known; give --fermi-level",
      );
    }
  }

  // Answer.
  const shape = cutoff === null ? 0 : Math.hypot(
    unexplainedWidthEv(cutoff, fermi?.edge ?? null) / 2,
    rampKnown ? RAMP_SHARE * tangent * Math.abs(cutoff.positionEv.value) : 0,
    cutoff.lateRise > LATE_RISE_SHARE ? LATE_RISE_EV : 0,
  );
  const photonUncertainty = line === null
    ? 0
    : Math.hypot(LINE_UNCERTAINTY_EV, line.energyEv - photonEnergyEv);
  if (line === null) {
    warn(
      "photon-energy-uncertainty",
      `${photonEnergyEv} eV is no line of the lamp table: its uncertainty is not included`,
    );
  }
  const budget = budgetTerms({
    cutoff,
    upper,
    valence,
    statesUncertaintyEv: fermi?.edge.statesUncertaintyEv ?? 0,
    shape,
    photonUncertainty,
    photonNote: line
      ? `${line.name} is ${line.energyEv.toFixed(5)} eV, used ${photonEnergyEv.toFixed(5)} eV`
      : "not known, not included",
  });
  const estimate = (quantity: BudgetTerm["enters"][number], value: number): Estimate => ({
    value,
    standardUncertainty: Math.hypot(
      ...budget.filter((term) => term.enters.includes(quantity)).map((term) => term.standardUncertaintyEv),
    ),
  });
  const result = (() => {
    if (failed || cutoff === null || upper === null) return null;
    const edgeDifference = upper.positionEv.value - cutoff.positionEv.value;
    const fermiLevelEv = fermi ? upper.positionEv.value : reference?.fermiLevelEv ?? NaN;
    const maxKinetic = fermiLevelEv - cutoff.positionEv.value;
    return {
      workFunction: estimate("workFunctionEv", photonEnergyEv - maxKinetic),
      maxKinetic: estimate("maxKineticEnergyEv", maxKinetic),
      ionization: estimate("ionizationEnergyEv", photonEnergyEv - edgeDifference),
      valenceMaximum: fermi ? null : estimate("valenceBandMaximumEv", fermiLevelEv - upper.positionEv.value),
    };
  })();
  const workFunction = result?.workFunction.value;
  if (workFunction !== undefined && !(workFunction >= 1 && workFunction <= 10)) {
    fail(
      `the work function would be ${
        workFunction.toFixed(3)
      } eV, outside 1..10 eV: check photon energy, bias and axis`,
    );
  }
  if (fermi === null && valence !== null) {
    warn(
      "no-fermi-edge",
      "no Fermi edge in the data: the leading edge is taken for a valence-band maximum (straight line, linear scale)",
      upperRegion?.label,
    );
    if (reference !== null && options.fermiLevelEv === undefined) {
      warn("fermi-level-from-axis", `the Fermi level is read off the axis, not measured (${reference.how})`);
    }
  }
  if (satellites.length > 0) {
    warn(
      "lamp-satellites",
      `${line?.name} has weaker lines ${
        satellites.map((s) => `${s.shiftEv.toFixed(2)} eV`).join(" and ")
      } above: ` +
        "their copies of the spectrum are part of the fit of the upper edge where the window reaches far enough",
    );
  }
  if (chosen.some((region) => region.counts.some((count) => count !== Math.round(count)))) {
    warn(
      "not-whole-counts",
      "the counts are not whole numbers: they are taken for Poisson counts, so if they were scaled or smoothed the " +
        "uncertainties are wrong by that factor",
    );
  }
  warn("scale-not-included", "the gain of the energy scale is not known and not part of the uncertainty");
  const answer = failed ? null : result;
  return {
    workFunctionEv: answer?.workFunction ?? null,
    cutoffEv: cutoff?.converged ? estimate("cutoffEv", cutoff.positionEv.value) : null,
    fermiEdgeEv: fermi ? estimate("fermiEdgeEv", fermi.edge.positionEv.value) : null,
    valenceBandMaximumEv: answer?.valenceMaximum ?? null,
    ionizationEnergyEv: answer?.ionization ?? null,
    maxKineticEnergyEv: answer?.maxKinetic ?? null,
    verdict: failed ? "failed" : reasons.length > 0 ? "doubtful" : "good",
    reasons,
    warnings,
    inputs: {
      regions: chosen.filter((region) => region === cutoffPlace?.region || region === upperRegion).map((
        region,
      ) => ({
        file: region.file,
        region: region.label,
        rangeEv: region.readRangeEv,
        use: [
          region === cutoffPlace?.region ? "secondary cutoff" : "",
          region === upperRegion ? (fermi ? "Fermi edge" : "valence-band edge") : "",
        ].filter((use) => use !== "").join(" and "),
      })),
      axis: { kind: chosen[0].fromBinding ? "binding" : "kinetic", from: chosen[0].axisFrom },
      photonEnergyEv: { value: photonEnergyEv, from: line ? `${photonFrom} (${line.name})` : photonFrom },
      biasV: { value: facts.biasV, from: facts.biasFrom },
      analyzerWorkFunctionEv: { value: facts.analyzerWorkFunctionEv, from: facts.analyzerFrom },
      temperatureK: { value: facts.temperatureK, from: facts.temperatureFrom },
      acceptanceHalfAngleDeg: { value: facts.acceptanceHalfAngleDeg, from: facts.acceptanceFrom },
      fermiLevelEv: fermi
        ? { value: fermi.edge.positionEv.value, from: "the fitted Fermi edge" }
        : { value: reference?.usable ? reference.fermiLevelEv : null, from: reference?.how ?? "not known" },
    },
    budget: answer === null ? [] : budget,
    cutoffFit: cutoff,
    upperFit: upper,
  };
}

type KineticRegion = EdgeRegion & {
  readonly photonEnergyEv: number;
  readonly photonFrom: string;
  readonly axisFrom: string;
  readonly fromBinding: boolean;
  readonly readRangeEv: readonly [number, number];
};

type Fall = { readonly region: KineticRegion; readonly candidate: EdgeCandidate };

/** Regions of one photon energy: the named ones, or those of the lowest photon energy in the ultraviolet. */
function chooseRegions(
  regions: readonly EdgeRegion[],
  options: MeasureOptions,
): (EdgeRegion & { photonEnergyEv: number; photonFrom: string })[] {
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
    return [{ ...region, photonEnergyEv, photonFrom }];
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
  const chosen = lit.filter((region) => Math.abs(region.photonEnergyEv - lowest) < 0.01);
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
  return chosen;
}

function ontoKineticAxis(
  region: EdgeRegion & { photonEnergyEv: number; photonFrom: string },
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
  const readRangeEv = [region.energiesEv[0], region.energiesEv[n - 1]] as const;
  const axisFrom = options.axis !== undefined ? "given by the user" : "file";
  if (kind === "kinetic") return { ...region, axisFrom, fromBinding: false, readRangeEv };
  return {
    ...region,
    axisFrom,
    fromBinding: true,
    readRangeEv,
    energiesEv: region.energiesEv.map((_, i) => region.photonEnergyEv - region.energiesEv[n - 1 - i]),
    counts: region.counts.slice().reverse(),
  };
}

/** Facts that all chosen regions share, each with its origin. */
function commonFacts(regions: readonly KineticRegion[], options: MeasureOptions): {
  biasV: number | null;
  biasFrom: string;
  asRecorded: boolean;
  analyzerWorkFunctionEv: number | null;
  analyzerFrom: string;
  temperatureK: number;
  temperatureFrom: string;
  acceptanceHalfAngleDeg: number | null;
  acceptanceFrom: string;
} {
  const first = regions[0];
  const origin = (given: number | undefined, read: number | null, missing: string): string =>
    given !== undefined ? "given by the user" : read !== null ? "file" : missing;
  const temperature = regions.find((region) => region.temperatureK !== null)?.temperatureK ?? null;
  const acceptance =
    regions.find((region) => region.acceptanceHalfAngleDeg !== null)?.acceptanceHalfAngleDeg ?? null;
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
  };
}

/** Mean counts over the half electronvolt below a fall. */
function levelBelow({ region, candidate }: Fall): number {
  return meanCounts(region.energiesEv, region.counts, candidate.energyEv - 0.5, candidate.energyEv - 0.1);
}

/** `true` when a fall is a satellite's copy of a much stronger one. */
function isGhost(
  candidate: EdgeCandidate,
  falls: readonly EdgeCandidate[],
  region: KineticRegion,
  satellites: readonly Satellite[],
): boolean {
  const drop = (edge: EdgeCandidate): number =>
    meanCounts(region.energiesEv, region.counts, edge.energyEv - 0.4, edge.energyEv - 0.1) -
    meanCounts(region.energiesEv, region.counts, edge.energyEv + 0.1, edge.energyEv + 0.4);
  return falls.some((other) =>
    satellites.some((satellite) =>
      Math.abs(candidate.energyEv - other.energyEv - satellite.shiftEv) < GHOST_DISTANCE_EV
    ) && drop(candidate) < GHOST_SHARE * drop(other)
  );
}

/** The first reading of the axis at which a Fermi edge really is. */
function findFermiEdge(
  falls: readonly Fall[],
  references: readonly EnergyReference[],
  options: { thermalEnergyEv: number; satellites: readonly Satellite[]; startSigmaEv: number },
): { edge: FittedFermiEdge; region: KineticRegion; reference: EnergyReference | null } | null {
  const tried: readonly (EnergyReference | null)[] = references.length > 0 ? references : [null];
  for (const reference of tried) {
    const near = falls.filter((fall) =>
      reference === null || Math.abs(fall.candidate.energyEv - reference.fermiLevelEv) < reference.toleranceEv
    ).sort((a, b) => b.candidate.energyEv - a.candidate.energyEv);
    for (const { region, candidate } of near) {
      const edge = fitFermiEdge(region.energiesEv, region.counts, candidate, options);
      if (edge !== null && isFermiEdge(edge, region, options)) return { edge, region, reference };
    }
  }
  return null;
}

/** A Fermi edge is converged, significant, narrow, and the end of the spectrum. */
function isFermiEdge(
  edge: FittedFermiEdge,
  region: KineticRegion,
  options: { readonly startSigmaEv: number },
): boolean {
  const position = edge.positionEv.value;
  const below = meanCounts(region.energiesEv, region.counts, position - 0.4, position - 0.2);
  const above = meanCounts(region.energiesEv, region.counts, position + 0.2, position + 0.5);
  return edge.converged && edge.stepCounts > 5 * edge.stepStandardError && above < 0.4 * below &&
    edge.sigmaEv.value < Math.max(0.12, 2.5 * options.startSigmaEv);
}

function judge(name: string, edge: FittedEdge, fail: (reason: string) => void, reasons: string[]): void {
  if (!edge.converged) return fail(`the fit of the ${name} did not converge: ${edge.reason}`);
  if (edge.tests.reducedChiSquare > MISFIT_REDUCED && edge.tests.chiSquareProbability < MISFIT_PROBABILITY) {
    reasons.push(
      `the model does not describe the ${name}: chi-square is ${
        edge.tests.reducedChiSquare.toFixed(1)
      } per degree of freedom; its uncertainty is enlarged, look at the residuals`,
    );
  }
  if (edge.channelsOnEdge < 3) {
    reasons.push(
      `only ${
        edge.channelsOnEdge.toFixed(1)
      } channels lie on the ${name} (10 to 90 %); measure with a smaller step`,
    );
  }
}

/**
 * Width of the cutoff that the resolution, as seen at the Fermi edge, does not explain: patches, acceptance, fields.
 * Where nothing else is known half of it is the standard uncertainty of where on the slope the work function lies.
 */
function unexplainedWidthEv(cutoff: FittedEdge, fermi: FittedEdge | null): number {
  const own = cutoff.sigmaEv.value ** 2;
  if (fermi === null) return cutoff.sigmaEv.value;
  const noise = 2 * Math.hypot(
    cutoff.sigmaEv.value * cutoff.sigmaEv.standardUncertainty,
    fermi.sigmaEv.value * fermi.sigmaEv.standardUncertainty,
  );
  return Math.sqrt(Math.max(0, own - fermi.sigmaEv.value ** 2 - noise));
}

function budgetTerms(parts: {
  cutoff: FittedEdge | null;
  upper: FittedEdge | null;
  valence: FittedValenceEdge | null;
  statesUncertaintyEv: number;
  shape: number;
  photonUncertainty: number;
  photonNote: string;
}): BudgetTerm[] {
  const metal = parts.valence === null;
  const both = ["workFunctionEv", "maxKineticEnergyEv", "ionizationEnergyEv"] as const;
  const terms: BudgetTerm[] = [
    {
      name: "cutoff, counting and misfit",
      standardUncertaintyEv: parts.cutoff?.positionEv.standardUncertainty ?? NaN,
      enters: [...both, "cutoffEv"],
      note: "covariance of the fit, times the Birge ratio where chi-square is large",
    },
    {
      name: "cutoff, shape",
      standardUncertaintyEv: parts.shape,
      enters: [...both, "cutoffEv"],
      note:
        "half the width of the cutoff that the known resolution does not explain, 2 % of the acceptance ramp, " +
        "0.02 eV where the counts go on rising above the edge",
    },
    {
      name: metal ? "Fermi edge, counting and misfit" : "valence edge, counting and misfit",
      standardUncertaintyEv: parts.upper?.positionEv.standardUncertainty ?? NaN,
      enters: metal ? [...both, "fermiEdgeEv"] : ["ionizationEnergyEv", "valenceBandMaximumEv"],
      note: "covariance of the fit, times the Birge ratio where chi-square is large",
    },
    {
      name: "photon energy",
      standardUncertaintyEv: parts.photonUncertainty,
      enters: metal ? ["workFunctionEv", "ionizationEnergyEv"] : ["ionizationEnergyEv", "maxKineticEnergyEv"],
      note: parts.photonNote,
    },
    {
      name: "bias supply",
      standardUncertaintyEv: 0,
      enters: [],
      note: "moves both edges alike and cancels",
    },
  ];
  if (metal) {
    terms.push({
      name: "Fermi edge, form of the states",
      standardUncertaintyEv: parts.statesUncertaintyEv,
      enters: [...both, "fermiEdgeEv"],
      note: "linear against quadratic density of states, beyond what counting explains",
    });
  }
  if (parts.valence) {
    terms.push({
      name: "valence edge, choice of the line",
      standardUncertaintyEv: parts.valence.lineUncertaintyEv,
      enters: ["ionizationEnergyEv", "valenceBandMaximumEv"],
      note: "line fitted to 80 % and to 60 % of the steepest slope, rectangular distribution",
    }, {
      name: "Fermi level on the axis",
      standardUncertaintyEv: AXIS_UNCERTAINTY_EV,
      enters: ["workFunctionEv", "maxKineticEnergyEv", "valenceBandMaximumEv"],
      note: "not measured here; assumed, typical between two calibrations",
    });
  }
  return terms;
}
