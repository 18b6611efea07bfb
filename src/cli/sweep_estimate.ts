import { batchesFor, PointRunner } from "../run/mod.ts";
import {
  csvLine,
  planPoint,
  type PointJob,
  sweepPoints,
  tableColumns,
  writeRecordLine,
} from "../sweep/mod.ts";
import { HISTORIES_PER_BATCH } from "../transport/mod.ts";
import { VERSION } from "../base/mod.ts";
import { spectrumFileText } from "./simulate.ts";
import type { SweepSource } from "./sweep_folder.ts";

/** What a sweep will take. */
export interface SweepEstimate {
  /** Points. */
  readonly points: number;
  /** Points whose settings give no scenario. */
  readonly failing: number;
  /** Tallies: points that differ only in the instrument share one. */
  readonly tallies: number;
  /** Photons to follow. */
  readonly histories: number;
  /** Seconds of one processor. */
  readonly processorS: number;
  /** Bytes in the folder. */
  readonly bytes: number;
}

/** Points that are looked at; more are taken in proportion. */
const MOST_PLANNED = 20_000;
/** Batches of the point that is timed. */
const TIMED_BATCHES = 128;

/**
 * Estimates time and disk from one point, run for a moment on this machine.
 *
 * @param source The sweep.
 * @param now Clock in milliseconds.
 * @returns The estimate, good to some tens of percent; without time when no point can be run.
 */
export async function estimateSweep({ sweep, load }: SweepSource, now: () => number): Promise<SweepEstimate> {
  const points = sweepPoints(sweep);
  const resolve = async (overrides: readonly string[]) => (await load(overrides)).resolved;
  const planned = Math.min(points.count, MOST_PLANNED);
  const engines = new Set<string>();
  const tallies = new Set<string>();
  let failing = 0;
  let batches = 0;
  let first: PointJob | undefined;
  for (let index = 0; index < planned; index++) {
    const { job } = await planPoint(sweep, index, points.at(index), resolve);
    if (job === null) {
      failing++;
      continue;
    }
    first ??= job;
    const wanted = batchesFor(job.resolved.histories);
    const tally = `${job.engineKey} ${job.resolved.seed} ${wanted}`;
    if (!tallies.has(tally)) batches += wanted;
    tallies.add(tally);
    engines.add(job.engineKey);
  }
  const scale = points.count / planned;
  const cost = first === undefined ? { engineS: 0, batchS: 0, pointS: 0, bytes: 200 } : timePoint(first, now);
  const row = csvLine(tableColumns(sweep).map(({ cell }) => cell(0, points.at(0), null))).length;
  return {
    points: points.count,
    failing: Math.round(scale * failing),
    tallies: Math.round(scale * tallies.size),
    histories: Math.round(scale * batches) * HISTORIES_PER_BATCH,
    processorS: scale *
      (engines.size * cost.engineS + batches * cost.batchS + (planned - failing) * cost.pointS),
    bytes: points.count * (cost.bytes + row),
  };

  function timePoint(job: PointJob, clock: () => number) {
    const runner = new PointRunner();
    const timed = (count: number) => {
      const resolved = { ...job.resolved, histories: count * HISTORIES_PER_BATCH };
      const from = clock();
      const result = runner.run({ ...job, resolved });
      return { seconds: (clock() - from) / 1000, result };
    };
    const cold = timed(TIMED_BATCHES); // tables, batches, evaluation
    const warm = timed(2 * TIMED_BATCHES); // twice the batches, evaluation
    const last = Array.from({ length: 5 }, () => timed(2 * TIMED_BATCHES)) // evaluation, faster when warm
      .reduce((best, one) => (one.seconds < best.seconds ? one : best));
    const batchS = Math.max(0, warm.seconds - last.seconds) / (2 * TIMED_BATCHES);
    const { values, spectrum } = last.result!;
    const record = {
      ...{ id: job.id, version: VERSION, settings: points.at(0), status: "done", reason: "" } as const,
      ...{ scenarioHash: job.scenarioHash, seed: job.resolved.seed, replicate: job.replicate, values },
    };
    return {
      engineS: Math.max(0, cold.seconds - last.seconds - TIMED_BATCHES * batchS),
      batchS,
      pointS: last.seconds,
      bytes: writeRecordLine(record).length +
        (spectrum === null ? 0 : spectrumFileText(job.resolved, job.scenarioHash, spectrum).length),
    };
  }
}

/**
 * An estimate as text.
 *
 * @param title Of the sweep.
 * @param estimate The estimate.
 * @param workers Worker threads.
 * @returns Lines.
 */
export function estimateText(title: string, estimate: SweepEstimate, workers: number): string {
  const { points, failing, tallies, histories, processorS, bytes } = estimate;
  return [
    `${title}: ${points} points${failing > 0 ? `, ${failing} of them will fail` : ""}`,
    `  ${tallies} tallies, ${histories.toExponential(2)} photons to follow`,
    `  about ${duration(processorS / workers)} on ${workers} ${
      workers === 1 ? "worker" : "workers"
    } like this one`,
    `  about ${size(bytes)} on disk`,
    "Nothing was run or written",
    "",
  ].join("\n");
}

function duration(seconds: number): string {
  if (seconds < 120) return `${seconds.toPrecision(2)} s`;
  return seconds < 7200 ? `${(seconds / 60).toFixed(0)} min` : `${(seconds / 3600).toFixed(1)} h`;
}

function size(bytes: number): string {
  return bytes < 1e6
    ? `${(bytes / 1e3).toFixed(1)} kB`
    : bytes < 1e9
    ? `${(bytes / 1e6).toFixed(1)} MB`
    : `${(bytes / 1e9).toFixed(1)} GB`;
}
