/**
 * Room `edges`: from counts to a work function. Finds and fits the secondary cutoff and the Fermi edge or valence-band
 * maximum, and joins them with an uncertainty budget and a verdict. Pure: the command line and files are elsewhere.
 *
 * @module
 */
export { type BudgetTerm, type ExpandedUncertainty, expandedUncertainty, type Quantity } from "./budget.ts";
export { calibrateScale, type ReferenceLine, type ScaleCalibration } from "./calibration.ts";
export { type CutoffConvention, type CutoffConventions } from "./conventions.ts";
export { type CutoffOptions, fitCutoff, type FittedCutoff } from "./cutoff.ts";
export { type AcceptanceRamp } from "./cutoff_model.ts";
export { type BadChannels, badChannels, deadTimeCorrected } from "./data_checks.ts";
export { type AxisKnowledge, type EnergyReference, energyReferences } from "./energy_reference.ts";
export { explainFit } from "./explain.ts";
export { type FermiOptions, fitFermiEdge, type FittedFermiEdge } from "./fermi.ts";
export { type EdgeBootstrap, type FittedEdge, type IntervalOptions } from "./fitted_edge.ts";
export { cutoffCandidate, type EdgeCandidate, edgeCandidates } from "./locate.ts";
export { type Patches } from "./patches.ts";
export { type EdgeRegion, type MeasureOptions, type ScaleGain } from "./regions.ts";
export { type FitInputs, type RegionUse, type Verdict, type WorkFunctionResult } from "./result.ts";
export { type Satellite } from "./satellites.ts";
export { type FittedValenceEdge, fitValenceEdge } from "./valence.ts";
export { measureWorkFunction } from "./work_function.ts";
