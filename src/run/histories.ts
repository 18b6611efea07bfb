import { Worker } from "node:worker_threads";
import { type EngineData, engineFrom } from "../model/mod.ts";
import {
  type BatchTally,
  emptyBatchTally,
  HISTORIES_PER_BATCH,
  type Tally,
  TallyAccumulator,
} from "../transport/mod.ts";
import type { FromWorker, ToWorker } from "./worker.ts";

/** Batches handed to a worker at a time: some milliseconds of work, so that stopping and progress feel immediate. */
const BATCHES_PER_TASK = 8;

/** How a run is spread and watched. */
export interface RunOptions {
  /** Worker threads, a whole number >= 1. */
  readonly workers: number;
  /** Stops the run when aborted; what is done is returned. */
  readonly signal?: AbortSignal;
  /** Called as batches are finished. */
  readonly onProgress?: (doneBatches: number, allBatches: number) => void;
}

/**
 * Whole batches for a wanted number of histories.
 *
 * @param histories Histories, > 0.
 * @returns Batches, at least two, since one alone has no scatter.
 */
export function batchesFor(histories: number): number {
  return Math.max(2, Math.ceil(histories / HISTORIES_PER_BATCH));
}

/**
 * Runs batches 0..batches - 1 one after the other in this thread.
 *
 * @param data Engine.
 * @param seed Seed.
 * @param batches Number of batches.
 * @returns The tally, identical to that of {@link runHistories}.
 */
export function runSeries(data: EngineData, seed: number, batches: number): Tally {
  const run = engineFrom(data);
  const count = data.tallySize;
  const sums = new TallyAccumulator(count);
  for (let batch = 0; batch < batches; batch++) {
    const tally = emptyBatchTally(count);
    run?.(seed, batch, tally);
    sums.add(batch, tally);
  }
  return sums.result();
}

/**
 * Runs batches 0..batches - 1 on worker threads.
 *
 * @param data Engine; a copy goes to each worker.
 * @param seed Seed.
 * @param batches Number of batches.
 * @param options Workers, stop signal, progress.
 * @returns The tally of all batches, or after an abort of the unbroken series of batches done so far.
 * @throws {Error} What a worker threw.
 */
export async function runHistories(
  data: EngineData,
  seed: number,
  batches: number,
  options: RunOptions,
): Promise<Tally> {
  const sums = new TallyAccumulator(data.tallySize);
  if (isIdle(data)) return runSeries(data, seed, batches);
  const stop = new Int32Array(new SharedArrayBuffer(4));
  const requestStop = (): void => {
    Atomics.store(stop, 0, 1);
  };
  options.signal?.addEventListener("abort", requestStop);
  if (options.signal?.aborted) requestStop();
  let next = 0;
  const tasks = Math.ceil(batches / BATCHES_PER_TASK);
  const workers = Array.from({ length: Math.min(options.workers, tasks) }, () => new Worker(workerUrl()));
  try {
    await Promise.all(workers.map((worker) =>
      new Promise<void>((finish, fail) => {
        const send = (message: ToWorker): void => worker.postMessage(message);
        const nextTask = (): void => {
          if (next >= batches || Atomics.load(stop, 0) === 1) return finish();
          const from = next;
          next = Math.min(batches, next + BATCHES_PER_TASK);
          send({ kind: "run", from, to: next });
        };
        worker.on("error", fail);
        worker.on("message", (message: FromWorker) => {
          if (message.kind === "failed") return fail(new Error(message.message));
          if (message.kind === "idle") return nextTask();
          sums.add(message.batch, message.tally as BatchTally);
          options.onProgress?.(sums.batches, batches);
        });
        send({ kind: "setup", data, seed, stop });
      })
    ));
  } finally {
    requestStop();
    options.signal?.removeEventListener("abort", requestStop);
    await Promise.all(workers.map((worker) => worker.terminate()));
  }
  return sums.result();
}

/** Nothing to run: no photon lifts an electron above the Fermi level. */
function isIdle(data: EngineData): boolean {
  return data.kind === "pair" && data.source === null;
}

/** The worker beside this file, under the extension this file itself has (`.ts` here, `.js` once packed for npm). */
function workerUrl(): URL {
  return new URL(import.meta.url.endsWith(".ts") ? "./worker.ts" : "./worker.js", import.meta.url);
}
