/**
 * `deno task bench`: histories per second of each kernel, on one worker and on all, and the figure of merit,
 * 1/(variance x time), of forced detection over the analogue tally of the same histories.
 *
 * @module
 */
import process from "node:process";
import { fileURLToPath } from "node:url";
import { engineData, expectedSpectrum } from "../model/mod.ts";
import { batchesFor, runHistories } from "../run/mod.ts";
import { HISTORIES_PER_BATCH, type Tally } from "../transport/mod.ts";
import { fitBench } from "./bench_fit.ts";
import { loadScenario } from "./simulate.ts";

const HISTORIES = 8_000_000;
const REPEATS = 5;
const SCENARIOS = ["clean_gold_he1", "gold_under_aluminum_al_kalpha"];

function median(values: number[]): number {
  return values.sort((a, b) => a - b)[values.length >> 1];
}

for (const name of SCENARIOS) {
  const { resolved } = await loadScenario(
    fileURLToPath(new URL(`../../scenarios/${name}.json`, import.meta.url)),
    [],
  );
  const setUpFrom = performance.now();
  const engine = engineData(resolved);
  const setUpMs = performance.now() - setUpFrom;
  const batches = batchesFor(HISTORIES);
  const timed = async (workers: number): Promise<{ tally: Tally; seconds: number }> => {
    const from = performance.now();
    const tally = await runHistories(engine, resolved.seed, batches, { workers });
    return { tally, seconds: (performance.now() - from) / 1000 };
  };
  const processors = navigator.hardwareConcurrency;
  let { tally } = await timed(1); // warms up
  const one: number[] = [];
  const all: number[] = [];
  for (let i = 0; i < REPEATS; i++) {
    one.push((await timed(1)).seconds);
    const together = await timed(processors);
    all.push(together.seconds);
    tally = together.tally;
  }
  const histories = batches * HISTORIES_PER_BATCH;
  const rate = (seconds: number): string => (histories / seconds / 1e6).toFixed(2);
  const events = tally.groups.reduce((sum, group) => sum + group.events.reduce((a, b) => a + b, 0), 0);
  // Both tallies come from the same histories and so the same time: the ratio of variances is that of merits.
  const spectrum = expectedSpectrum(resolved, engine, tally);
  const { counts, standardErrors, analogueStandardErrors } = spectrum;
  const highest = counts.reduce((a, b) => Math.max(a, b), 0);
  const merits = Array.from(standardErrors).flatMap((error, c) =>
    counts[c] > 0.01 * highest && error > 0 ? [(analogueStandardErrors[c] / error) ** 2] : []
  );
  process.stdout.write([
    `${resolved.title}: ${histories.toExponential(2)} histories, ${REPEATS} repeats, medians`,
    `  tables built in                 ${setUpMs.toFixed(0)} ms`,
    `  one worker                      ${rate(median(one))} million histories/s`,
    `  ${processors} workers                       ${rate(median(all))} million histories/s, ${
      (median(one) / median(all)).toFixed(2)
    } times one`,
    ...(engine.kind === "pair"
      ? [`  inelastic events per history    ${(events / tally.histories).toFixed(2)}`]
      : []),
    `  figure of merit over analogue   ${median(merits).toFixed(0)} times (median over channels), least ${
      merits.reduce((a, b) => Math.min(a, b), Infinity).toFixed(0)
    }`,
    "",
  ].join("\n"));
  if (engine.kind === "pair") process.stdout.write(fitBench(resolved, spectrum));
}
process.exit(0);
