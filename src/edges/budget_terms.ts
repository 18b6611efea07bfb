import { FWHM_PER_SIGMA } from "../math/mod.ts";
import type { BudgetTerm } from "./budget.ts";
import type { FittedCutoff } from "./cutoff.ts";
import type { FittedFermiEdge } from "./fermi.ts";
import type { FittedEdge } from "./fitted_edge.ts";
import type { ScaleGain } from "./regions.ts";
import type { FittedValenceEdge } from "./valence.ts";

/** Wavelengths of lamp lines are known better than this; pressure and self-absorption shift less, eV (chosen). */
const LINE_UNCERTAINTY_EV = 0.001;
/** A Fermi level read off a supplier's axis and not measured here, eV (chosen; typical between calibrations). */
const AXIS_UNCERTAINTY_EV = 0.03;
/** Standard uncertainty of the acceptance ramp as a share of its width: flat emitter, flat entrance, sharp cone (chosen). */
const RAMP_SHARE = 0.02;
/** Our own simulation of a sharp quantum barrier moves the fitted cutoff by 18 to 20 meV, eV. */
const LATE_RISE_EV = 0.02;

/** What the budget is made of. */
export interface BudgetParts {
  readonly cutoff: FittedCutoff | null;
  readonly fermi: FittedFermiEdge | null;
  readonly valence: FittedValenceEdge | null;
  /** `true` when the counts go on rising above the cutoff. */
  readonly isLateRise: boolean;
  /** `true` when the acceptance ramp is part of the model. */
  readonly hasRamp: boolean;
  readonly resolutionFwhmEv: number | null;
  /** The known line that the photon energy means, or null. */
  readonly line: { readonly name: string; readonly energyEv: number } | null;
  readonly photonEnergyEv: number;
  /** `true` when the user gave the Fermi level on a kinetic axis, so that W takes the photon energy's uncertainty. */
  readonly isFermiLevelGiven: boolean;
  readonly gain: ScaleGain | null;
  /** Distances that the gain stretches, eV. */
  readonly maxKinetic: number;
  readonly edgeDifference: number;
  readonly valenceMaximum: number;
}

/** Position of the cutoff: up makes W and the ionization energy larger, and KE_max smaller. */
const OF_CUTOFF = { workFunctionEv: 1, maxKineticEnergyEv: -1, ionizationEnergyEv: 1, cutoffEv: 1 } as const;
const OF_FERMI_EDGE = {
  workFunctionEv: -1,
  maxKineticEnergyEv: 1,
  ionizationEnergyEv: -1,
  fermiEdgeEv: 1,
} as const;

/**
 * The uncertainty budget: independent terms, each with its sensitivity for every result (JCGM 100:2008, ch. 5).
 *
 * What enters both edges alike, such as the bias supply and the offset of the scale, cancels and is listed with zero.
 *
 * @param parts What was fitted and is known.
 * @returns The terms.
 */
export function budgetTerms(parts: BudgetParts): BudgetTerm[] {
  const { cutoff, fermi, valence, line, gain } = parts;
  const isMetal = valence === null;
  const terms: BudgetTerm[] = [
    ...counting("cutoff", cutoff, OF_CUTOFF),
    {
      name: "cutoff, width not explained by resolution",
      standardUncertaintyEv: cutoff === null
        ? 0
        : shapeUncertaintyEv(cutoff, fermi, parts.resolutionFwhmEv, parts.hasRamp),
      sensitivities: OF_CUTOFF,
      degreesOfFreedom: Infinity,
      evaluation: "B",
      note: `${parts.hasRamp ? "half the" : "the largest"} width beyond ${
        fermi !== null
          ? "that of the Fermi edge"
          : parts.resolutionFwhmEv !== null
          ? "the stated resolution"
          : "none, as the resolution is not known"
      }: patches, fields${parts.hasRamp ? "" : ", and the acceptance cone, which is not known"}`,
    },
  ];
  if (parts.hasRamp && cutoff !== null) {
    terms.push({
      name: "cutoff, acceptance",
      standardUncertaintyEv: RAMP_SHARE * cutoff.rampEv,
      sensitivities: OF_CUTOFF,
      degreesOfFreedom: Infinity,
      evaluation: "B",
      note: "2 % of the ramp that the acceptance cone makes under bias",
    });
  }
  if (parts.isLateRise) {
    terms.push({
      name: "cutoff, slow barrier",
      standardUncertaintyEv: LATE_RISE_EV,
      sensitivities: OF_CUTOFF,
      degreesOfFreedom: Infinity,
      evaluation: "B",
      note: "the counts go on rising above the edge",
    });
  }
  if (valence === null) {
    terms.push(...counting("Fermi edge", fermi, OF_FERMI_EDGE), {
      name: "Fermi edge, form of the states",
      standardUncertaintyEv: fermi?.statesUncertaintyEv ?? 0,
      sensitivities: OF_FERMI_EDGE,
      degreesOfFreedom: Infinity,
      evaluation: "B",
      note: "linear against quadratic density of states, beyond what counting explains",
    });
  } else terms.push(...valenceTerms(valence));
  const isAxisOnly = !isMetal && !parts.isFermiLevelGiven;
  terms.push({
    name: "photon energy",
    standardUncertaintyEv: line === null
      ? 0
      : Math.hypot(LINE_UNCERTAINTY_EV, line.energyEv - parts.photonEnergyEv),
    // A Fermi level read off the axis moves with the photon energy, which then leaves W and enters KE_max.
    sensitivities: isAxisOnly
      ? { ionizationEnergyEv: 1, maxKineticEnergyEv: 1 }
      : { workFunctionEv: 1, ionizationEnergyEv: 1 },
    degreesOfFreedom: Infinity,
    evaluation: "B",
    note: line === null
      ? "not known, not included"
      : `${line.name} is ${line.energyEv.toFixed(5)} eV, used ${parts.photonEnergyEv.toFixed(5)} eV`,
  }, {
    name: "energy scale, gain",
    standardUncertaintyEv: gain === null
      ? 0
      : Math.abs(parts.maxKinetic) * (gain.standardUncertainty / gain.value),
    sensitivities: {
      workFunctionEv: -1,
      maxKineticEnergyEv: 1,
      ionizationEnergyEv: -parts.edgeDifference / parts.maxKinetic,
      ...(isMetal ? {} : { valenceBandMaximumEv: parts.valenceMaximum / parts.maxKinetic }),
    },
    degreesOfFreedom: gain?.degreesOfFreedom ?? Infinity,
    evaluation: gain !== null && Number.isFinite(gain.degreesOfFreedom) ? "A" : "B",
    note: gain === null
      ? "not known, not included; give --calibration"
      : `reference lines give ${gain.value.toFixed(6)} +- ${gain.standardUncertainty.toFixed(6)}`,
  }, {
    name: "bias supply and offset of the scale",
    standardUncertaintyEv: 0,
    sensitivities: {},
    degreesOfFreedom: Infinity,
    evaluation: "B",
    note: "the same in both edges (correlation 1): cancels",
  });
  return terms;
}

/** Counting uncertainty of a position; enlarged for misfit it has the degrees of freedom of the fit. */
function counting(
  name: string,
  edge: FittedEdge | null,
  sensitivities: BudgetTerm["sensitivities"],
): BudgetTerm[] {
  if (edge === null) return [];
  const isEnlarged = edge.tests.reducedChiSquare > 1;
  return [{
    name: `${name}, counting and misfit`,
    standardUncertaintyEv: edge.positionEv.standardUncertainty,
    sensitivities,
    degreesOfFreedom: isEnlarged ? edge.tests.degreesOfFreedom : Infinity,
    evaluation: "A",
    note: "covariance of the fit, times the Birge ratio where chi-square is large",
  }];
}

function valenceTerms(valence: FittedValenceEdge): BudgetTerm[] {
  const linear = { ionizationEnergyEv: -1, valenceBandMaximumEv: -1 };
  return [...counting("valence edge", valence, linear), {
    name: "valence edge, choice of the line",
    standardUncertaintyEv: valence.lineUncertaintyEv,
    sensitivities: linear,
    degreesOfFreedom: Infinity,
    evaluation: "B",
    note: "line fitted to 80 % and to 60 % of the steepest slope, rectangular distribution",
  }, {
    name: "valence edge, logarithmic scale",
    standardUncertaintyEv: valence.logarithmicEv?.standardUncertainty ?? 0,
    sensitivities: { valenceBandMaximumLogarithmicEv: -1 },
    degreesOfFreedom: Infinity,
    evaluation: "A",
    note: "counting in the steepest line and in the background",
  }, {
    name: "Fermi level on the axis",
    standardUncertaintyEv: AXIS_UNCERTAINTY_EV,
    sensitivities: {
      workFunctionEv: -1,
      maxKineticEnergyEv: 1,
      valenceBandMaximumEv: 1,
      valenceBandMaximumLogarithmicEv: 1,
    },
    degreesOfFreedom: Infinity,
    evaluation: "B",
    note: "not measured here; assumed, typical between two calibrations",
  }];
}

/**
 * Uncertainty of where on the slope the work function lies, from the width of the cutoff that the resolution, as seen at
 * the Fermi edge or else as stated, does not explain: patches, fields.
 *
 * With a known acceptance ramp half that width. Without one the width may be a ramp's: a ramp of width r has the standard
 * deviation r/sqrt(12) and moves the cutoff up by r/2, sqrt(3) times that; for a shift anywhere between 0 and there the
 * root mean square is the width itself (JCGM 100, 4.3.7), taken at its largest within twice its uncertainty.
 */
function shapeUncertaintyEv(
  cutoff: FittedEdge,
  fermi: FittedEdge | null,
  resolutionFwhmEv: number | null,
  hasRamp: boolean,
): number {
  const { value, standardUncertainty } = cutoff.sigmaEv;
  const stated = { value: (resolutionFwhmEv ?? 0) / FWHM_PER_SIGMA, standardUncertainty: 0 };
  const seen = fermi?.sigmaEv ?? stated;
  // A stated resolution that the Fermi edge confirms is known better than what the edge alone tells.
  const isConfirmed = stated.value > 0 && Math.abs(stated.value - seen.value) <= 2 * seen.standardUncertainty;
  const known = isConfirmed ? stated : seen;
  const excess = value * value - known.value ** 2;
  const noise = known.value === 0
    ? 0
    : 2 * Math.hypot(value * standardUncertainty, known.value * known.standardUncertainty);
  return hasRamp ? Math.sqrt(Math.max(0, excess - noise)) / 2 : Math.sqrt(Math.max(0, excess) + noise);
}
