/**
 * `deno task bench`: photons per second of the pair kernel on the gold scenario, on one worker and on all, and the
 * figure of merit, 1/(variance x time), of forced detection over the analogue tally of the same histories.
 *
 * @module
 */
import process from "node:process";
import { fileURLToPath } from "node:url";
import { engineData } from "../model/mod.ts";
import { batchesFor, runHistories } from "../run/mod.ts";
import { HISTORIES_PER_BATCH, type Tally } from "../transport/mod.ts";
import { loadScenario } from "./simulate.ts";

const SCENARIO = fileURLToPath(new URL("../../scenarios/clean_gold_he1.json", import.meta.url));
const HISTORIES = 8_000_000;
const REPEATS = 5;

const { resolved } = await loadScenario(SCENARIO, []);
const setUpFrom = performance.now();
const engine = engineData(resolved);
const setUpMs = performance.now() - setUpFrom;
const batches = batchesFor(HISTORIES);

async function timed(workers: number): Promise<{ tally: Tally; seconds: number }> {
  const from = performance.now();
  const tally = await runHistories(engine, resolved.seed, batches, { workers });
  return { tally, seconds: (performance.now() - from) / 1000 };
}

function median(values: number[]): number {
  return values.sort((a, b) => a - b)[values.length >> 1];
}

const processors = navigator.hardwareConcurrency;
await timed(1);
const one: number[] = [];
const all: number[] = [];
let tally: Tally | undefined;
for (let i = 0; i < REPEATS; i++) {
  const alone = await timed(1);
  one.push(alone.seconds);
  all.push((await timed(processors)).seconds);
  tally = alone.tally;
}
if (tally === undefined) throw new Error("Nothing was timed");

const events = tally.groups.reduce((sum, group) => sum + group.events.reduce((a, b) => a + b, 0), 0);
const rate = (seconds: number): string => (batches * HISTORIES_PER_BATCH / seconds / 1e6).toFixed(2);
const merits = meritRatios(tally);
process.stdout.write([
  `Gold, He I, ${(batches * HISTORIES_PER_BATCH).toExponential(2)} photons, ${REPEATS} repeats, medians`,
  `  tables built in                 ${setUpMs.toFixed(0)} ms`,
  `  one worker                      ${rate(median(one))} million photons/s`,
  `  ${processors} workers                       ${rate(median(all))} million photons/s, ${
    (median(one) / median(all)).toFixed(2)
  } times one`,
  `  inelastic events per photon     ${(events / tally.histories).toFixed(2)}`,
  `  figure of merit over analogue   ${merits.median.toFixed(0)} times (median over energy bins), least ${
    merits.least.toFixed(0)
  }`,
  "",
].join("\n"));
process.exit(0);

/**
 * Variance of the analogue tally over that of forced detection, bin by bin, for the same histories and so the same time.
 * An analogue bin holds independent electrons, so its variance is its expectation (Poisson); the expectation is taken
 * from forced detection, which is known better. Bins below 1 % of the highest are left out.
 */
function meritRatios(run: Tally): { median: number; least: number } {
  const groups = run.groups.length;
  const mean = engine.direct.map((direct, k) =>
    direct + run.groups.reduce((sum, group) => sum + group.forced[k] / group.histories, 0) / groups
  );
  const highest = mean.reduce((a, b) => Math.max(a, b), 0);
  const ratios: number[] = [];
  mean.forEach((expected, k) => {
    const scattered = expected - engine.direct[k];
    const squares = run.groups.reduce(
      (sum, group) => sum + (group.forced[k] / group.histories - scattered) ** 2,
      0,
    );
    const variance = squares / (groups - 1) / groups;
    if (expected > 0.01 * highest && variance > 0) ratios.push(expected / run.histories / variance);
  });
  return { median: median(ratios), least: Math.min(...ratios) };
}
