import assert from "node:assert/strict";
import { Buffer } from "node:buffer";
import { pairEngineData } from "../../src/model/mod.ts";
import { batchesFor, runHistories, runSeries } from "../../src/run/mod.ts";
import { HISTORIES_PER_BATCH, type Tally } from "../../src/transport/mod.ts";
import { flatMetal } from "../support/flat_metal.ts";

/** Warm metal with elastic events and a quantum barrier: every branch of the history loop is taken. */
const ENGINE = pairEngineData(
  flatMetal({ temperatureK: 300, transportMeanFreePathNm: 3, barrier: "quantum", energyStepEv: 0.05 }),
);
/** Eight tasks, so that seven workers all have something to do and finish at different times. */
const BATCHES = 64;

/** Bit for bit; a plain answer, since a report of the differences would be as long as the tallies. */
function sameBytes(one: Tally, other: Tally): boolean {
  const bytes = (tally: Tally): Buffer =>
    Buffer.concat(
      tally.groups.flatMap(({ forced, analogue, events }) =>
        [forced, analogue, events].map((array) =>
          Buffer.from(array.buffer, array.byteOffset, array.byteLength)
        )
      ),
    );
  return bytes(one).equals(bytes(other));
}

Deno.test("runHistories() gives the same bytes with 1, 2 and 7 workers as one thread", async () => {
  const series = runSeries(ENGINE, 1, BATCHES);
  assert.ok(
    series.groups.every((group) => group.forced.some((value) => value > 0)),
    "there is something to compare",
  );
  for (const workers of [1, 2, 7]) {
    const tally = await runHistories(ENGINE, 1, BATCHES, { workers }); // deno-lint-ignore no-await-in-loop
    assert.equal(tally.batches, BATCHES);
    assert.equal(tally.histories, BATCHES * HISTORIES_PER_BATCH);
    assert.ok(sameBytes(tally, series), `${workers} workers`);
  }
});

Deno.test("runSeries() gives other bytes for another seed, and every batch differs", () => {
  const sums = runSeries(ENGINE, 1, 64).groups.concat(runSeries(ENGINE, 2, 64).groups)
    .map((group) => group.forced.reduce((sum, value) => sum + value, 0));
  assert.ok(!sameBytes(runSeries(ENGINE, 1, 2), runSeries(ENGINE, 2, 2)));
  assert.equal(new Set(sums).size, 128, "one batch in each group, all of them different");
});

Deno.test("runSeries() of more batches begins with the same ones", () => {
  const [short, long] = [runSeries(ENGINE, 1, 10), runSeries(ENGINE, 1, 12)];
  assert.ok(sameBytes(short, { ...long, groups: long.groups.slice(0, 10) }));
  assert.ok(!sameBytes(short, long));
});

Deno.test("runHistories() keeps the unbroken series of whole batches when interrupted", async () => {
  const stop = new AbortController();
  let reported = 0;
  const tally = await runHistories(ENGINE, 1, 100_000, {
    workers: 2,
    signal: stop.signal,
    onProgress: (done, all) => {
      assert.ok(done >= reported && all === 100_000);
      reported = done;
      if (done >= 20) stop.abort();
    },
  });
  assert.ok(tally.batches >= 20 && tally.batches < 1000, `${tally.batches} batches`);
  assert.equal(tally.histories, tally.batches * HISTORIES_PER_BATCH);
  assert.ok(sameBytes(tally, runSeries(ENGINE, 1, tally.batches)));
});

Deno.test("runHistories() interrupted before it begins does nothing", async () => {
  const tally = await runHistories(ENGINE, 1, 100, { workers: 2, signal: AbortSignal.abort() });
  assert.deepEqual(tally, { batches: 0, histories: 0, groups: [] });
});

Deno.test("runHistories() reports progress up to the last batch", async () => {
  const progress: number[] = [];
  await runHistories(ENGINE, 1, 20, { workers: 2, onProgress: (done) => progress.push(done) });
  // Tasks of 8, 8 and 4 batches; one that comes in early waits for those before it.
  assert.equal(progress.length, 3);
  assert.equal(progress.at(-1), 20);
  assert.deepEqual(progress, progress.toSorted((a, b) => a - b));
});

Deno.test("runHistories() passes on what a worker threw", async () => {
  await assert.rejects(runHistories(ENGINE, -1, 20, { workers: 2 }), {
    message: "Cannot derive a stream as seed must be a whole number 0..2^53 - 1: current value is -1",
  });
});

Deno.test("runHistories() of light that excites nothing counts the histories and finds nothing", async () => {
  // States only below -12 eV: light of 10 eV finds no final state above the Fermi level.
  const states = { kind: "table", energiesEv: [-200, -12], values: [1, 1] } as const;
  const engine = pairEngineData(flatMetal({ states }));
  const tally = await runHistories(engine, 1, 3, { workers: 2 });
  assert.equal(tally.histories, 3 * HISTORIES_PER_BATCH);
  assert.ok(tally.groups.every((group) => group.forced.every((value) => value === 0)));
});

Deno.test("batchesFor() rounds up to whole batches, at least two", () => {
  assert.deepEqual([1, 4096, 8192, 8193, 20_000_000].map(batchesFor), [2, 2, 2, 3, 4883]);
});
