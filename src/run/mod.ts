/**
 * Room `run`: spreads histories over worker threads. The sums are the same to the last bit on any number of workers.
 *
 * @module
 */
export { batchesFor, runHistories, type RunOptions, runSeries } from "./histories.ts";
