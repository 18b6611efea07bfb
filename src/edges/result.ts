import type { Estimate, Notice } from "../base/mod.ts";
import type { BudgetTerm, ExpandedUncertainty, Quantity } from "./budget.ts";
import type { CutoffConventions } from "./conventions.ts";
import type { FittedEdge } from "./fitted_edge.ts";
import type { Patches } from "./patches.ts";

/** How far an answer is to be trusted. */
export type Verdict = "good" | "doubtful" | "failed";

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
  /** Energy resolution, full width at half maximum, and its origin. */
  readonly resolutionFwhmEv: { readonly value: number | null; readonly from: string };
  /** Gain of the energy scale and its origin. */
  readonly scaleGain: { readonly value: number; readonly from: string };
  /** Position of the Fermi level on the axis and its origin; null when not known. */
  readonly fermiLevelEv: { readonly value: number | null; readonly from: string };
}

/** The answer of a fit. Values are null where they do not exist or cannot be trusted. */
export interface WorkFunctionResult {
  /** Work function, eV; that of the lowest patch where several were found. */
  readonly workFunctionEv: Estimate | null;
  /** Secondary cutoff on the kinetic axis, eV (a binding-energy file is turned into `h nu - E_B`). */
  readonly cutoffEv: Estimate | null;
  /** Fermi edge on the same axis, eV; null without one. */
  readonly fermiEdgeEv: Estimate | null;
  /** Valence-band maximum below the Fermi level by the straight line on a linear scale, eV; null for a metal. */
  readonly valenceBandMaximumEv: Estimate | null;
  /** The same by the straight line on a logarithmic scale, eV; null for a metal, or without a straight part. */
  readonly valenceBandMaximumLogarithmicEv: Estimate | null;
  /** Ionization energy, eV; the work function for a metal. */
  readonly ionizationEnergyEv: Estimate | null;
  /** Maximum kinetic energy outside the sample `h nu - W`, eV. */
  readonly maxKineticEnergyEv: Estimate | null;
  /** How far to trust it. */
  readonly verdict: Verdict;
  /** Why the verdict is not good, and what to try. */
  readonly reasons: readonly string[];
  /** What else should be known. */
  readonly warnings: readonly Notice[];
  /** What was read and assumed. */
  readonly inputs: FitInputs;
  /** Cutoff by the common conventions side by side; null without a fitted cutoff. */
  readonly conventions: CutoffConventions | null;
  /** Two cutoffs, where the counts ask for two; else null. */
  readonly patches: Patches | null;
  /** Uncertainty budget. */
  readonly budget: readonly BudgetTerm[];
  /** Expanded uncertainties (k = 2) with effective degrees of freedom, by quantity. */
  readonly expanded: Readonly<Partial<Record<Quantity, ExpandedUncertainty>>>;
  /** Correlation of work function and maximum kinetic energy, and of work function and ionization energy; or null. */
  readonly correlations: {
    readonly workFunctionAndMaxKineticEnergy: number;
    readonly workFunctionAndIonizationEnergy: number;
  } | null;
  /** Work function by parametric bootstrap: mean and standard deviation over the replicates, eV; null when not asked. */
  readonly bootstrapWorkFunctionEv: Estimate | null;
  /** The fitted cutoff, with its curve. */
  readonly cutoffFit: FittedEdge | null;
  /** The fitted Fermi edge or valence edge, with its curve. */
  readonly upperFit: FittedEdge | null;
}
