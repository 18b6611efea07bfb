/**
 * Worker thread: receives an engine once, then runs the batches it is told to and posts each tally back.
 *
 * @module
 */
import { parentPort } from "node:worker_threads";
import {
  type BatchTally,
  emptyBatchTally,
  type EngineData,
  engineFrom,
  type Histories,
} from "../transport/mod.ts";
import { buffersOf } from "./tally_memory.ts";

/** What a worker is told. */
export type ToWorker =
  | { readonly kind: "setup"; readonly data: EngineData; readonly seed: number; readonly stop: Int32Array }
  | {
    readonly kind: "run";
    readonly from: number;
    readonly to: number;
    /** Tallies of earlier tasks that are added up, to be used again. */
    readonly spent: readonly BatchTally[];
  };

/** What a worker answers. */
export type FromWorker =
  | { readonly kind: "done"; readonly from: number; readonly tallies: readonly BatchTally[] }
  | { readonly kind: "failed"; readonly message: string };

let run: Histories | null = null;
let tallySize = 0;
let seed = 0;
let stop: Int32Array | undefined;

function post(message: FromWorker, transfer: ArrayBuffer[] = []): void {
  parentPort?.postMessage(message, transfer);
}

parentPort?.on("message", (message: ToWorker) => {
  try {
    if (message.kind === "setup") {
      run = engineFrom(message.data);
      tallySize = message.data.tallySize;
      seed = message.seed;
      stop = message.stop;
      return;
    }
    if (!run || !stop) throw new Error("The worker has no engine to run");
    const free = [...message.spent];
    const tallies: BatchTally[] = [];
    for (let batch = message.from; batch < message.to && Atomics.load(stop, 0) === 0; batch++) {
      const tally = free.pop() ?? emptyBatchTally(tallySize);
      for (const sums of Object.values(tally)) sums.fill(0);
      run(seed, batch, tally);
      tallies.push(tally);
    }
    post({ kind: "done", from: message.from, tallies }, buffersOf(tallies));
  } catch (error) {
    post({ kind: "failed", message: error instanceof Error ? error.message : String(error) });
  }
});
