/**
 * Room `run`: spreads histories over worker threads, and the points of a sweep. The results are the same to the last bit on
 * any number of workers.
 *
 * @module
 */
export { batchesFor, HistoryPool, isIdle, runHistories, type RunOptions, runSeries } from "./histories.ts";
export { type SpectrumSummary, summarize, worstRelativeStandardError } from "./summary.ts";
export { type PointResult, PointRunner, type PointSpectrum, round9, simulatedRegion } from "./point.ts";
export { runSweep, type SweepOptions, type SweepResult } from "./sweep.ts";
