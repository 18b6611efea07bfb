import assert from "node:assert/strict";
import process from "node:process";
import { engineData } from "../../src/model/mod.ts";
import { engineFrom } from "../../src/transport/mod.ts";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { emptyBatchTally, type Histories, HISTORIES_PER_BATCH } from "../../src/transport/mod.ts";

/** Batches in which the loop is compiled, and batches that are measured. */
const WARM = 30;
const MEASURED = 15;

/** Growth of the heap in bytes per history, the median of batches: collections of garbage fall out. */
function bytesPerHistory(run: Histories, tallySize: number): number {
  const tally = emptyBatchTally(tallySize);
  const growths: number[] = [];
  for (let batch = 0; batch < WARM + MEASURED; batch++) {
    const before = process.memoryUsage().heapUsed;
    run(1, batch, tally);
    growths.push(process.memoryUsage().heapUsed - before);
  }
  const sorted = growths.slice(WARM).sort((a, b) => a - b);
  return sorted[MEASURED >> 1] / HISTORIES_PER_BATCH;
}

// Nothing is made on purpose; numbers that pass between functions which were not joined cost 16 bytes each. Measured when
// written: 21 and 134 bytes per history. An array or object for each event would be ten times as much as the first.
const KERNELS = [
  { name: "clean_gold_he1", most: 64 },
  { name: "gold_under_aluminum_al_kalpha", most: 200 },
];
Deno.test.each(KERNELS)("histories of $name make no garbage but a few numbers", async ({ name, most }) => {
  const path = new URL(`../../scenarios/${name}.json`, import.meta.url);
  const resolved = resolveScenario(parseScenario(await Deno.readTextFile(path), name, []));
  const engine = engineData(resolved);
  const run = engineFrom(engine)!;
  const bytes = bytesPerHistory(run, engine.tallySize);
  assert.ok(bytes < most, `${bytes} bytes per history`);

  let kept: unknown;
  const wasteful: Histories = (seed, batch, tally) => {
    run(seed, batch, tally);
    for (let history = 0; history < HISTORIES_PER_BATCH; history++) kept = new Array(24);
  };
  const more = bytesPerHistory(wasteful, engine.tallySize);
  assert.ok(kept !== undefined && more > most, `an array of 24 for each history: ${more} bytes`);
});
