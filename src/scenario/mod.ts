/**
 * Room `scenario`: the only reader of what a user describes. Text becomes a checked {@link Scenario}, then a
 * {@link ResolvedScenario} in which every name is a number and nothing is left to look up.
 *
 * @module
 */
export type {
  AcquisitionSettings,
  AnalyzerSettings,
  GeometrySettings,
  LightSettings,
  SampleSettings,
  Scenario,
  SimulationSettings,
} from "./types.ts";
export { parseScenario, scenarioJsonSchema } from "./parse.ts";
export { applyOverrides } from "./overrides.ts";
export {
  type ResolvedLine,
  type ResolvedScenario,
  resolveScenario,
  type UserTable,
  type UserTables,
} from "./resolve.ts";
export { scenarioHash } from "./hash.ts";
