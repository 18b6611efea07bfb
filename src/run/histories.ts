import { Worker } from "node:worker_threads";
import {
  type BatchTally,
  emptyBatchTally,
  type EngineData,
  engineFrom,
  HISTORIES_PER_BATCH,
  type Tally,
  TallyAccumulator,
} from "../transport/mod.ts";
import { moduleBeside } from "./module_url.ts";
import { buffersOf } from "./tally_memory.ts";
import type { FromWorker, ToWorker } from "./worker.ts";

/** Batches handed to a worker at a time: some milliseconds of work, so that stopping and progress feel immediate. */
const BATCHES_PER_TASK = 8;

/** Tasks that a worker holds: the one it runs and one more. */
const TASKS_AHEAD = 2;

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
 * @param stopped Asked before each batch; `true` ends the run early. Default: never.
 * @returns The tally, identical to that of {@link runHistories}.
 */
export function runSeries(data: EngineData, seed: number, batches: number, stopped?: () => boolean): Tally {
  const run = engineFrom(data);
  const count = data.tallySize;
  const sums = new TallyAccumulator(count);
  for (let batch = 0; batch < batches && !stopped?.(); batch++) {
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
  await using pool = new HistoryPool(data, seed, options.workers);
  return await pool.runTo(batches, options);
}

/** Worker threads that hold an engine and go on from one number of batches to the next. */
export class HistoryPool {
  readonly #data: EngineData;
  readonly #seed: number;
  readonly #mostWorkers: number;
  readonly #sums: TallyAccumulator;
  readonly #stop = new Int32Array(new SharedArrayBuffer(4));
  readonly #workers: Worker[] = [];

  /**
   * Prepares the sums; threads start when there is work for them.
   *
   * @param data Engine; a copy goes to each worker.
   * @param seed Seed.
   * @param workers Most threads, a whole number >= 1.
   * @param start Sums of earlier batches of the same engine and seed. Default: none.
   */
  constructor(data: EngineData, seed: number, workers: number, start?: Tally) {
    this.#data = data;
    this.#seed = seed;
    this.#mostWorkers = workers;
    this.#sums = new TallyAccumulator(data.tallySize, start);
  }

  /**
   * Goes on until there are so many batches.
   *
   * @param batches Batches from number 0 on, earlier ones included.
   * @param options Stop signal, progress. After an abort the pool can only be disposed of.
   * @returns The tally of batches 0..batches - 1, or after an abort of the unbroken series done so far.
   * @throws {Error} What a worker threw.
   */
  async runTo(batches: number, options: Omit<RunOptions, "workers"> = {}): Promise<Tally> {
    const sums = this.#sums;
    let next = sums.batches;
    if (isIdle(this.#data)) {
      for (; next < batches; next++) sums.add(next, emptyBatchTally(this.#data.tallySize));
    }
    this.#startThreads(Math.ceil((batches - next) / BATCHES_PER_TASK));
    const requestStop = (): void => void Atomics.store(this.#stop, 0, 1);
    options.signal?.addEventListener("abort", requestStop);
    if (options.signal?.aborted) requestStop();
    try {
      await Promise.all(this.#workers.map((worker) =>
        new Promise<void>((finish, fail) => {
          let waiting = 0;
          const nextTask = (spent: readonly BatchTally[]): void => {
            if (next < batches && Atomics.load(this.#stop, 0) === 0) {
              const from = next;
              next = Math.min(batches, next + BATCHES_PER_TASK);
              waiting++;
              tell(worker, { kind: "run", from, to: next, spent }, buffersOf(spent));
            } else if (waiting === 0) finish();
          };
          worker.removeAllListeners("error").removeAllListeners("message");
          worker.on("error", fail);
          worker.on("message", (message: FromWorker) => {
            if (message.kind === "failed") return fail(new Error(message.message));
            waiting--;
            message.tallies.forEach((tally, i) => sums.add(message.from + i, tally));
            options.onProgress?.(sums.batches, batches);
            // Memory that is added up goes back; a batch that waits for earlier ones keeps its own.
            nextTask(message.tallies.filter((_, i) => message.from + i < sums.batches));
          });
          // One task ahead, so that a thread never waits for this one.
          for (let ahead = 0; ahead < TASKS_AHEAD; ahead++) nextTask([]);
        })
      ));
    } finally {
      options.signal?.removeEventListener("abort", requestStop);
    }
    return sums.result();
  }

  #startThreads(tasks: number): void {
    while (this.#workers.length < Math.min(this.#mostWorkers, tasks)) {
      const worker = new Worker(moduleBeside(import.meta.url, "worker"));
      this.#workers.push(worker);
      tell(worker, { kind: "setup", data: this.#data, seed: this.#seed, stop: this.#stop });
    }
  }

  /** Ends the threads. */
  async [Symbol.asyncDispose](): Promise<void> {
    Atomics.store(this.#stop, 0, 1);
    await Promise.all(this.#workers.map((worker) => worker.terminate()));
  }
}

/**
 * Nothing to run: no photon lifts an electron above the Fermi level.
 *
 * @param data Engine.
 * @returns `true` when the tally stays empty.
 */
export function isIdle(data: EngineData): boolean {
  return data.kind === "pair" && data.source === null;
}

function tell(worker: Worker, message: ToWorker, transfer: ArrayBuffer[] = []): void {
  worker.postMessage(message, transfer);
}
