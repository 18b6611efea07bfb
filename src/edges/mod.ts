/**
 * Room `edges`: from counts to a work function. Finds and fits the secondary cutoff and the Fermi edge or valence-band
 * maximum, and joins them with an uncertainty budget and a verdict. Pure: the command line and files are elsewhere.
 *
 * @module
 */
export { type CutoffOptions, fitCutoff, type FittedCutoff, type FittedEdge } from "./cutoff.ts";
export { type FermiOptions, fitFermiEdge, type FittedFermiEdge } from "./fermi.ts";
export { type FittedValenceEdge, fitValenceEdge } from "./valence.ts";
export { cutoffCandidate, type EdgeCandidate, edgeCandidates } from "./locate.ts";
export { type Satellite } from "./satellites.ts";
export { type AxisKnowledge, type EnergyReference, energyReferences } from "./energy_reference.ts";
export {
  type BudgetTerm,
  type EdgeRegion,
  type FitInputs,
  type MeasureOptions,
  measureWorkFunction,
  type RegionUse,
  type Verdict,
  type WorkFunctionResult,
} from "./work_function.ts";
