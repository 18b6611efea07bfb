/**
 * `deno task bench`: speed of the histories, on one worker and on all, and of what is built on them.
 *
 * The figure of merit is 1/(variance x time). Forced detection and the analogue tally come from the same histories and so
 * the same time: the ratio of their variances is that of their merits.
 *
 * @module
 */
import { execFileSync } from "node:child_process";
import { readdir } from "node:fs/promises";
import process from "node:process";
import { fileURLToPath } from "node:url";
import { engineData, expectedSpectrum } from "../model/mod.ts";
import type { EngineData } from "../transport/mod.ts";
import { batchesFor, HistoryPool, runHistories, runSweep } from "../run/mod.ts";
import { parseScenario, resolveScenario } from "../scenario/mod.ts";
import { parseSweep } from "../sweep/mod.ts";
import { HISTORIES_PER_BATCH } from "../transport/mod.ts";
import { fitBench } from "./bench_fit.ts";
import { readBytes } from "./files.ts";
import { type LoadedScenario, loadScenario, simulate } from "./simulate.ts";

const SPEED_HISTORIES = 2_000_000;
const MERIT_HISTORIES = 1_000_000;
const REPEATS = 5;
const PRECISION = 0.005;
const SWEEP_POINTS = 1000;
const FIRST_POINTS = 10;
/** Batches that a worker of the pool takes at a time. */
const TASK_BATCHES = 8;
/** One for each kernel. */
const KERNELS = ["clean_gold_he1.json", "gold_under_aluminum_al_kalpha.json"];

const FOLDER = fileURLToPath(new URL("../../scenarios/", import.meta.url));
const workers = Math.max(1, navigator.hardwareConcurrency);

function print(what: string, value: string): void {
  process.stdout.write(`  ${what.padEnd(46)} ${value}\n`);
}

function heading(text: string): void {
  process.stdout.write(`${text}\n`);
}

function load(name: string): Promise<LoadedScenario> {
  return loadScenario(`${FOLDER}${name}`, []);
}

async function seconds(task: () => unknown): Promise<number> {
  const from = performance.now();
  await task();
  return (performance.now() - from) / 1000;
}

async function medianSeconds(task: () => unknown): Promise<number> {
  const times: number[] = [];
  for (let i = 0; i < REPEATS; i++) times.push(await seconds(task));
  return median(times);
}

function median(values: readonly number[]): number {
  return values.toSorted((a, b) => a - b)[values.length >> 1];
}

const milliseconds = (time: number): string => `${(1000 * time).toFixed(time < 0.01 ? 1 : 0)} ms`;

async function startUp(engine: EngineData): Promise<void> {
  heading(`Start-up, medians of ${REPEATS}`);
  const program = fileURLToPath(new URL("main.ts", import.meta.url));
  const help = await medianSeconds(() =>
    execFileSync("deno", ["run", "--quiet", "--allow-read", program, "--help"], { stdio: "ignore" })
  );
  print("command line, --help", milliseconds(help));
  const batches = TASK_BATCHES * workers;
  const first = await medianSeconds(async () => {
    await using pool = new HistoryPool(engine, 1, workers);
    await new Promise<void>((resolve, reject) =>
      pool.runTo(batches, { onProgress: () => resolve() }).catch(reject)
    );
  });
  print(`pool of ${workers} workers, until the first batch is there`, milliseconds(first));
}

async function speed({ resolved }: LoadedScenario): Promise<void> {
  heading(`${resolved.title}: ${SPEED_HISTORIES.toExponential(0)} histories, medians of ${REPEATS}`);
  let engine = engineData(resolved);
  print("tables built in", milliseconds(await seconds(() => engine = engineData(resolved))));
  const batches = batchesFor(SPEED_HISTORIES);
  const run = (count: number) => () => runHistories(engine, resolved.seed, batches, { workers: count });
  const rate = (time: number): string =>
    `${(batches * HISTORIES_PER_BATCH / time / 1e6).toFixed(2)} million histories/s`;
  const one: number[] = [];
  const all: number[] = [];
  // In turn, so that both see the same machine.
  for (let i = 0; i < REPEATS; i++) {
    one.push(await seconds(run(1)));
    all.push(await seconds(run(workers)));
  }
  print("one worker", rate(median(one)));
  print(`${workers} workers`, `${rate(median(all))}, ${(median(one) / median(all)).toFixed(2)} times one`);
  print("resident memory", `${(process.memoryUsage().rss / 1e6).toFixed(0)} MB`);
  if (engine.kind === "loss") return;
  const tally = await run(workers)();
  const events = tally.groups.reduce((sum, group) => sum + group.events.reduce((a, b) => a + b, 0), 0);
  print("inelastic events per history", (events / tally.histories).toFixed(2));
}

async function meritOf({ resolved }: LoadedScenario, name: string): Promise<void> {
  const engine = engineData(resolved);
  const tally = await runHistories(engine, resolved.seed, batchesFor(MERIT_HISTORIES), { workers });
  const spectrum = expectedSpectrum(resolved, engine, tally);
  const { counts, standardErrors, analogueStandardErrors } = spectrum;
  const highest = counts.reduce((a, b) => Math.max(a, b), 0);
  // Only channels above 1 % of the highest where the analogue tally counted anything.
  const ratios = Array.from(standardErrors).flatMap((error, c) =>
    counts[c] > 0.01 * highest && error > 0 && analogueStandardErrors[c] > 0
      ? [(analogueStandardErrors[c] / error) ** 2]
      : []
  );
  print(name, ratios.length === 0 ? "nothing to compare" : `${median(ratios).toFixed(0)} times`);
}

async function sweepSpeed(name: string): Promise<void> {
  const text = new TextDecoder().decode(await readBytes(`${FOLDER}${name}`));
  const resolve = (overrides: readonly string[]) => resolveScenario(parseScenario(text, name, overrides));
  const run = (points: number) => async (): Promise<void> => {
    const sweep = parseSweep(
      JSON.stringify({
        title: "Photon flux",
        scenario: name,
        axes: [
          { kind: "list", path: "simulation.histories", values: [200_000] },
          { kind: "range", path: "light.photonFluxPerS", from: 1e8, to: 1e10, count: points },
        ],
        record: { values: ["peakCounts"] },
      }),
      "bench",
    );
    for await (const { record } of runSweep(sweep, resolve, { workers })) {
      if (record.status !== "done") throw new Error(`A point failed: ${record.reason}`);
    }
  };
  const first = await seconds(run(FIRST_POINTS));
  const all = await seconds(run(SWEEP_POINTS));
  heading(`Sweep of ${SWEEP_POINTS} points that share one tally, ${workers} workers, no fits`);
  print("all", `${(SWEEP_POINTS / all).toFixed(0)} points/s, ${all.toFixed(1)} s`);
  const each = (all - first) / (SWEEP_POINTS - FIRST_POINTS);
  print(`a point more, beyond the first ${FIRST_POINTS}`, milliseconds(each));
}

const gold = await load(KERNELS[0]);
await startUp(engineData(gold.resolved));
for (const name of KERNELS) await speed(await load(name));

heading(
  `Figure of merit over the analogue tally, median of channels, ${
    MERIT_HISTORIES.toExponential(0)
  } histories`,
);
const names = (await readdir(FOLDER)).filter((name) => name.endsWith(".json") && !name.includes(".schema."));
for (const name of names.sort()) await meritOf(await load(name), name);

heading(`${gold.resolved.title}: ${100 * PRECISION} % in the worst channel`);
let precise: Awaited<ReturnType<typeof simulate>> | undefined;
const untilSeconds = await seconds(async () => precise = await simulate(gold, { workers, until: PRECISION }));
print(
  `${workers} workers`,
  `${untilSeconds.toFixed(1)} s, ${precise!.result.histories.toExponential(2)} histories`,
);

await sweepSpeed(KERNELS[0]);

heading("Fits");
for (const [what, value] of fitBench(gold.resolved, precise!.expected)) print(what, value);

process.exit(0);
