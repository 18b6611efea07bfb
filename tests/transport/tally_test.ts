import assert from "node:assert/strict";
import { type BatchTally, HISTORIES_PER_BATCH, TallyAccumulator } from "../../src/transport/mod.ts";

/** Numbers whose floating-point sum depends on the order of adding. */
function batchTally(batch: number): BatchTally {
  return {
    forced: Float64Array.of(1 / (batch + 3), 1e16 * Math.sin(batch)),
    analogue: Float64Array.of(batch, 0),
    events: Float64Array.of(1, batch / 7),
  };
}

function added(order: readonly number[]): TallyAccumulator {
  const sums = new TallyAccumulator(2);
  order.forEach((batch) => sums.add(batch, batchTally(batch)));
  return sums;
}

Deno.test("TallyAccumulator gives the same bits in whatever order batches arrive", () => {
  const order = Array.from({ length: 200 }, (_, batch) => batch);
  const shuffled = order.toSorted((a, b) => (a * 7919) % 211 - (b * 7919) % 211);
  assert.notDeepEqual(shuffled, order);
  assert.deepEqual(added(shuffled).result(), added(order).result());
  assert.deepEqual(added(order.toReversed()).result(), added(order).result());
});

Deno.test("TallyAccumulator holds back what comes after a gap", () => {
  const sums = added([0, 1, 3, 4, 6]);
  assert.equal(sums.batches, 2);
  assert.deepEqual(sums.result(), added([0, 1]).result());
  sums.add(2, batchTally(2));
  assert.equal(sums.batches, 5);
  assert.deepEqual(sums.result(), added([0, 1, 2, 3, 4]).result());
});

Deno.test("TallyAccumulator counts histories and deals batches into groups of equal size", () => {
  assert.deepEqual(added([]).result(), { batches: 0, histories: 0, groups: [] });
  const { batches, histories, groups } = added(Array.from({ length: 130 }, (_, batch) => batch)).result();
  assert.equal(batches, 130);
  assert.equal(histories, 130 * HISTORIES_PER_BATCH);
  assert.equal(groups.reduce((sum, group) => sum + group.histories, 0), histories);
  const sizes = groups.map((group) => group.histories / HISTORIES_PER_BATCH);
  assert.ok(Math.max(...sizes) - Math.min(...sizes) <= 1);
  // Sum of 0..129 by Gauss's formula: no batch is lost or added twice.
  assert.equal(groups.reduce((sum, group) => sum + group.analogue[0], 0), 129 * 130 / 2);
});
