/**
 * Room `scenario`: the only reader of what a user describes. Text becomes a checked {@link Scenario}, then a
 * {@link ResolvedScenario} in which every name is a number and nothing is left to look up.
 *
 * @module
 */
export type {
  AcquisitionSettings,
  AnalyzerSettings,
  BandBendingSettings,
  ChargingSettings,
  GeometrySettings,
  LayerSettings,
  LightCommon,
  LightSettings,
  PatchSettings,
  SampleSettings,
  Scenario,
  SimulationSettings,
  SurfaceSettings,
} from "./types.ts";
export { parseScenario, scenarioJsonSchema } from "./parse.ts";
export { applyOverrides } from "./overrides.ts";
export {
  type ResolvedLayer,
  type ResolvedLine,
  type ResolvedScenario,
  type ResolvedSurfacePart,
  resolveScenario,
  type UserTable,
  type UserTables,
} from "./resolve.ts";
export type { ResolvedFast, ResolvedFastLayer, ResolvedLevel } from "./fast.ts";
export { scenarioHash } from "./hash.ts";
