import assert from "node:assert/strict";
import { runSweep, type SweepOptions, type SweepResult } from "../../src/run/mod.ts";
import { parseScenario, type ResolvedScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { parseSweep } from "../../src/sweep/mod.ts";
import { QUICK_GOLD, sweepText } from "../support/sweep_text.ts";

const resolve = (set: readonly string[]) => resolveScenario(parseScenario(QUICK_GOLD, "gold.json", set));

async function results(changes: Record<string, unknown>, options: SweepOptions = {}): Promise<SweepResult[]> {
  const all: SweepResult[] = [];
  for await (const result of runSweep(parseSweep(sweepText(changes), "sweep.json"), resolve, options)) {
    all.push(result);
  }
  return all.toSorted((a, b) => a.index - b.index);
}

/** Six points, two of which share a tally each. */
const SIX = {
  axes: [
    { kind: "list", path: "biasV", values: [-9, -8, -7] },
    { kind: "list", path: "light.photonFluxPerS", values: [1e9, 2e9] },
  ],
  record: { values: ["peakCounts"], spectra: true },
};

Deno.test("runSweep() gives the same bits on any number of workers", async () => {
  const one = await results(SIX);
  assert.deepEqual(one.map(({ index }) => index), [0, 1, 2, 3, 4, 5]);
  assert.deepEqual(await results(SIX, { workers: 2 }), one);
  assert.deepEqual(await results(SIX, { workers: 7 }), one);
  assert.equal(new Set(one.map(({ record }) => record.values.peakCounts)).size, 6);
});

Deno.test("runSweep() runs a range of points, and leaves finished ones out", async () => {
  const all = await results(SIX);
  const finished = all[3].record.id;
  const rest = await results(SIX, { from: 2, to: 5, isFinished: (id) => id === finished });
  assert.deepEqual(rest, [all[2], all[4]]);
});

Deno.test("runSweep() goes on after a failing point and gives its reason", async () => {
  const axes = [{ kind: "list", path: "sample.temperatureK", values: [300, -1, 200] }];
  const all = await results({ axes }, { workers: 2 });
  assert.deepEqual(all.map(({ record }) => record.status), ["done", "failed", "done"]);
  assert.match(all[1].record.reason, /temperatureK must be >= 0 K/);
  assert.deepEqual(all[1].record.values, {});
});

Deno.test("runSweep() turns a defect at one point into a failure of that point", async () => {
  const sweep = parseSweep(sweepText(SIX), "sweep.json");
  const broken = (set: readonly string[]) => {
    const resolved = resolve(set);
    // No scenario file can say this; the worker thread throws.
    return set[0] === "biasV=-8" ? { ...resolved, lines: null } as unknown as ResolvedScenario : resolved;
  };
  const statuses: string[] = [];
  for await (const { record } of runSweep(sweep, broken, { workers: 2 })) {
    statuses.push(record.status);
    assert.equal(record.reason !== "", record.status === "failed");
  }
  assert.deepEqual(statuses.toSorted(), ["done", "done", "done", "done", "failed", "failed"]);
});

Deno.test("runSweep() finishes the points in flight and ends when aborted", async () => {
  const stop = new AbortController();
  const seen: SweepResult[] = [];
  for await (
    const result of runSweep(parseSweep(sweepText(SIX), "sweep.json"), resolve, { signal: stop.signal })
  ) {
    seen.push(result);
    stop.abort();
  }
  // One worker: the point after the first was in flight when the first was given.
  assert.deepEqual(seen.map(({ record }) => record.status), ["done", "done"]);
});

Deno.test("runSweep() stops its threads when the loop is left in the middle of a long point", async () => {
  const axes = [{ kind: "list", path: "simulation.histories", values: [8192, 4e9] }];
  const sweep = parseSweep(sweepText({ axes }), "sweep.json");
  const from = performance.now();
  for await (const { index } of runSweep(sweep, resolve, { workers: 2 })) {
    assert.equal(index, 0);
    break;
  }
  // The long point takes a quarter of an hour.
  assert.ok(performance.now() - from < 60_000);
});
