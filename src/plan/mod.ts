/**
 * Room `plan`: before the beam time, how to spend it. From an expected spectrum follow the standard uncertainty of the
 * work function that a fit will have, the split of time between the two edges, windows and sweeps for a target, what
 * stands in the way, and a proof by simulated replicates. Pure: simulation, command line and files are elsewhere.
 *
 * @module
 */
export { type PlanFacts, planFacts, type Rates, ratesFrom } from "./facts.ts";
export {
  type EdgePrediction,
  type PredictedNumbers,
  type Prediction,
  predictRun,
  type RunWindow,
} from "./predict.ts";
export { leastTimeS, optimalShares, uncertaintyAfter } from "./split.ts";
export {
  comparePlans,
  type PlannedWindow,
  planRun,
  type PlanTarget,
  type RunPlan,
  type RunStatus,
  type TimeLimit,
} from "./run_plan.ts";
export { attenuated, type LightPlan, planWithinRate } from "./rate_limit.ts";
export { replicateRun, type Replicates } from "./replicates.ts";
