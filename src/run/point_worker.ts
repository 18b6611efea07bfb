/**
 * Worker thread: runs the points it is told to, one after the other.
 *
 * @module
 */
import { parentPort, workerData } from "node:worker_threads";
import type { PointJob } from "../sweep/mod.ts";
import { type PointResult, PointRunner } from "./point.ts";

/** What a worker answers: a result, null when stopped, or what went wrong. */
export type FromPointWorker =
  | { readonly kind: "result"; readonly result: PointResult | null }
  | { readonly kind: "failed"; readonly message: string };

const stop = workerData as Int32Array;
const runner = new PointRunner();

parentPort?.on("message", (job: PointJob) => {
  let answer: FromPointWorker;
  try {
    answer = { kind: "result", result: runner.run(job, () => Atomics.load(stop, 0) !== 0) };
  } catch (error) {
    answer = { kind: "failed", message: error instanceof Error ? error.message : String(error) };
  }
  parentPort?.postMessage(answer);
});
