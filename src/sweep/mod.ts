/**
 * Room `sweep`: many scenarios from one. A sweep file becomes points, each with an identity; records of finished points
 * become one table. Plans and reads; runs nothing.
 *
 * @module
 */
export type {
  JsonValue,
  ListAxis,
  RangeAxis,
  RecordSettings,
  SampleAxis,
  SampledRange,
  Sweep,
  SweepAxis,
  ZipAxis,
} from "./types.ts";
export {
  FITTED_QUANTITIES,
  RECORDED_NAMES,
  type RecordedName,
  SIMULATED_VALUES,
  uncertaintyName,
} from "./recorded.ts";
export { checkSweepPaths, parseSweep, sweepJsonSchema } from "./parse.ts";
export { type Settings, type SweepPoints, sweepPoints } from "./axes.ts";
export { sobolPoints } from "./sobol.ts";
export { latinHypercubePoints } from "./latin_hypercube.ts";
export {
  engineKey,
  partRange,
  type PlannedPoint,
  planPoint,
  type PointJob,
  type ResolvePoint,
} from "./plan.ts";
export { crc32 } from "./crc32.ts";
export { type PointRecord, type PointValues, readRecordLine, writeRecordLine } from "./record.ts";
export { csvLine, type TableColumn, tableColumns } from "./table.ts";
