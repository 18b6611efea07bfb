import assert from "node:assert/strict";
import { engineData } from "../../src/model/mod.ts";
import { HistoryPool, runSeries } from "../../src/run/mod.ts";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { QUICK_GOLD } from "../support/sweep_text.ts";

const ENGINE = engineData(resolveScenario(parseScenario(QUICK_GOLD, "gold.json")));

Deno.test("HistoryPool gives the same bits in steps, continued, and in one run", async () => {
  const whole = runSeries(ENGINE, 5, 150);
  await using pool = new HistoryPool(ENGINE, 5, 2);
  await pool.runTo(3);
  const part = structuredClone(await pool.runTo(70));
  assert.deepEqual(part, runSeries(ENGINE, 5, 70));
  assert.deepEqual(await pool.runTo(150), whole);
  await using later = new HistoryPool(ENGINE, 5, 1, part);
  assert.deepEqual(await later.runTo(150), whole);
  assert.notDeepEqual(await new HistoryPool(ENGINE, 6, 1, part).runTo(70), whole);
});

Deno.test("HistoryPool leaves the sums it starts from unchanged", async () => {
  const start = runSeries(ENGINE, 5, 2);
  const before = structuredClone(start);
  await using pool = new HistoryPool(ENGINE, 5, 1, start);
  await pool.runTo(66);
  assert.deepEqual(start, before);
});
