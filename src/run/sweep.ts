import { Worker } from "node:worker_threads";
import { VERSION } from "../base/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import {
  type PlannedPoint,
  planPoint,
  type PointJob,
  type PointRecord,
  type ResolvePoint,
  type Sweep,
  sweepPoints,
} from "../sweep/mod.ts";
import { moduleBeside } from "./module_url.ts";
import type { PointSpectrum } from "./point.ts";
import type { FromPointWorker } from "./point_worker.ts";

/** Points planned ahead for each worker, among which it looks for one that shares its tables. */
const LOOK_AHEAD = 32;

/** How a sweep is run. */
export interface SweepOptions {
  /** Worker threads, a whole number >= 1; each runs one point at a time. Default: 1. */
  readonly workers?: number;
  /** When aborted, points in flight are finished and the iteration ends. */
  readonly signal?: AbortSignal;
  /** First point. Default: 0. */
  readonly from?: number;
  /** Point after the last one. Default: all. */
  readonly to?: number;
  /** `true` for points that are finished already, by their identity; they are left out. Default: none. */
  readonly isFinished?: (id: string) => boolean;
}

/** A finished point of a sweep. */
export interface SweepResult {
  /** Number of the point, from 0. */
  readonly index: number;
  /** What came out, or why nothing did. */
  readonly record: PointRecord;
  /** Its scenario; null when its settings give none. */
  readonly resolved: ResolvedScenario | null;
  /** Its spectrum, where the sweep keeps spectra. */
  readonly spectrum: PointSpectrum | null;
}

/**
 * Runs the points of a sweep on worker threads and gives each as it is finished, in no promised order.
 *
 * Every result depends on its point alone, to the last bit, not on workers or on the order. Points that differ only in
 * what the histories do not see (see {@link engineKey}) share one tally; put such axes last. A point that fails is a
 * result with a reason, and the others go on. Leaving the loop early stops the points in flight.
 *
 * @param sweep The sweep.
 * @param resolve Makes the scenario of a point.
 * @param options Workers, stop signal, range of points, what is finished already.
 * @returns Finished points.
 * @example The fitted work function at two biases
 * ```ts
 * import { parseScenario, parseSweep, resolveScenario, runSweep } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const text = await Deno.readTextFile(new URL("../../scenarios/clean_gold_he1.json", import.meta.url));
 * const sweep = parseSweep(`{
 *   "title": "bias", "scenario": "clean_gold_he1.json", "record": { "values": ["fit.workFunctionEv"] },
 *   "axes": [
 *     { "kind": "list", "path": "simulation.histories", "values": [400000] },
 *     { "kind": "zip", "axes": [
 *       { "kind": "list", "path": "biasV", "values": [-9, -5] },
 *       { "kind": "list", "path": "acquisition.startEv", "values": [8.8, 4.8] }
 *     ] }
 *   ]
 * }`, "bias.json");
 * const resolve = (set: readonly string[]) => resolveScenario(parseScenario(text, "gold", set));
 * for await (const { record } of runSweep(sweep, resolve, { workers: 2, signal: AbortSignal.timeout(60_000) })) {
 *   assert.ok(Math.abs(Number(record.values["fit.workFunctionEv"]) - 5.1) < 0.05, record.reason);
 * }
 * ```
 */
export async function* runSweep(
  sweep: Sweep,
  resolve: ResolvePoint,
  options: SweepOptions = {},
): AsyncGenerator<SweepResult, void, undefined> {
  const points = sweepPoints(sweep);
  const { workers = 1, signal, from = 0, to = points.count, isFinished = () => false } = options;
  const stop = new Int32Array(new SharedArrayBuffer(4));
  const pool = Array.from({ length: Math.min(workers, to - from) }, () => new PointWorker(stop));
  const idle = [...pool];
  const running = new Map<PointWorker, Promise<{ worker: PointWorker; result: SweepResult }>>();
  const ahead: ReadyPoint[] = [];
  let next = from;
  let finished: SweepResult | null = null;
  try {
    while (true) {
      while (next < to && ahead.length < LOOK_AHEAD * workers && !signal?.aborted) {
        const index = next++;
        const point = await planPoint(sweep, index, points.at(index), resolve);
        if (isFinished(point.id)) continue;
        if (point.job === null) yield failure(point, point.reason);
        else ahead.push({ ...point, job: point.job });
      }
      while (idle.length > 0 && ahead.length > 0 && !signal?.aborted) {
        const worker = idle.pop()!;
        const [point] = ahead.splice(choose(ahead, worker, pool), 1);
        running.set(worker, worker.run(point).then((result) => ({ worker, result })));
      }
      // Only now, so that the workers are busy while the caller works on the result.
      if (finished !== null) yield finished;
      if (running.size === 0) return;
      const { worker, result } = await Promise.race(running.values());
      running.delete(worker);
      idle.push(worker);
      finished = result;
    }
  } finally {
    Atomics.store(stop, 0, 1);
    await Promise.all(pool.map((worker) => worker.end()));
  }
}

type ReadyPoint = PlannedPoint & { readonly job: PointJob };

/** A point whose tables the worker has, else one whose tables nobody has, else the first. */
function choose(ahead: readonly ReadyPoint[], worker: PointWorker, pool: readonly PointWorker[]): number {
  const own = ahead.findIndex(({ job }) => job.engineKey === worker.engineKey);
  if (own >= 0) return own;
  const taken = new Set(pool.map(({ engineKey }) => engineKey));
  return Math.max(0, ahead.findIndex(({ job }) => !taken.has(job.engineKey)));
}

/** A thread that runs one point at a time; a thread that dies fails its point and is replaced. */
class PointWorker {
  readonly #stop: Int32Array;
  #thread: Worker;
  /** Tables that the thread holds. */
  engineKey = "";

  constructor(stop: Int32Array) {
    this.#stop = stop;
    this.#thread = this.#start();
  }

  #start(): Worker {
    return new Worker(moduleBeside(import.meta.url, "point_worker"), { workerData: this.#stop });
  }

  async run(point: ReadyPoint): Promise<SweepResult> {
    this.engineKey = point.job.engineKey;
    const answer = await new Promise<FromPointWorker>((resolve) => {
      const thread = this.#thread;
      const settle = (message: FromPointWorker): void => {
        thread.removeAllListeners("message").removeAllListeners("error");
        resolve(message);
      };
      thread.on("message", settle);
      thread.on("error", (error: unknown) => {
        this.engineKey = "";
        this.#thread = this.#start();
        settle({
          kind: "failed",
          message: `the worker thread died: ${error instanceof Error ? error.message : error}`,
        });
      });
      thread.postMessage(point.job);
    });
    if (answer.kind === "failed") return failure(point, answer.message);
    if (answer.result === null) return failure(point, "stopped");
    const { values, spectrum } = answer.result;
    return {
      index: point.index,
      resolved: point.job.resolved,
      record: recordOf(point, "done", "", values),
      spectrum,
    };
  }

  async end(): Promise<void> {
    await this.#thread.terminate();
  }
}

function failure(point: PlannedPoint, reason: string): SweepResult {
  return {
    index: point.index,
    resolved: point.job?.resolved ?? null,
    record: recordOf(point, "failed", reason, {}),
    spectrum: null,
  };
}

function recordOf(
  { id, settings, job }: PlannedPoint,
  status: PointRecord["status"],
  reason: string,
  values: PointRecord["values"],
): PointRecord {
  return {
    id,
    version: VERSION,
    settings,
    status,
    reason,
    scenarioHash: job?.scenarioHash ?? null,
    seed: job?.resolved.seed ?? null,
    replicate: job?.replicate ?? null,
    values,
  };
}
