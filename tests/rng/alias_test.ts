import assert from "node:assert/strict";
import fc from "fast-check";
import { sampleAlias, streamState, writeAliasRow, Xoshiro128pp } from "../../src/rng/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { FALSE_ALARM, histogramProbability } from "../support/chi_square.ts";

/** Probabilities that a row stands for, read from its words as the format is described. */
function probabilities(table: Uint32Array, offset: number, count: number): Float64Array {
  const shares = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    const own = (table[offset + i] >>> 16) / 65536;
    shares[i] += own / count;
    shares[table[offset + i] & 0xffff] += (1 - own) / count;
  }
  return shares;
}

Deno.test("writeAliasRow() keeps every probability and gives impossible outcomes none", () => {
  fc.assert(
    fc.property(
      fc.array(fc.oneof(fc.constant(0), fc.double({ min: 1e-6, max: 1e6, noNaN: true })), {
        minLength: 1,
        maxLength: 60,
      }),
      (weights) => {
        const total = weights.reduce((a, b) => a + b, 0);
        fc.pre(total > 0);
        const table = new Uint32Array(weights.length + 3);
        writeAliasRow(weights, table, 2);
        const shares = probabilities(table, 2, weights.length);
        weights.forEach((weight, i) => {
          // Each of the n words is rounded by at most 2^-17 of the mean probability 1/n.
          assertClose(shares[i], weight / total, { absolute: 2 ** -17 }, `outcome ${i}`);
          if (weight === 0) assert.equal(shares[i], 0);
        });
        assert.ok(
          table[0] === 0 && table[1] === 0 && table[weights.length + 2] === 0,
          "words outside the row",
        );
      },
    ),
    { seed: 1, numRuns: 200 },
  );
});

Deno.test("writeAliasRow() refuses no weights, a zero sum, NaN and too many outcomes", () => {
  for (const weights of [[], [0, 0], [1, NaN], [Infinity], new Float64Array(65536).fill(1)]) {
    assert.throws(() => writeAliasRow(weights, new Uint32Array(65536), 0), RangeError);
  }
});

// Two short rows, one with impossible outcomes, a falling one of 64 and a single outcome.
const ROWS = [[1, 2, 3, 4], [0, 5, 1, 0, 0.001, 0], Array.from({ length: 64 }, (_, i) => Math.exp(-i / 9)), [
  3,
]];

Deno.test("sampleAlias() draws with the given probabilities", () => {
  // False alarms: FALSE_ALARM for each of the three rows with more than one outcome.
  const table = new Uint32Array(200);
  const draws = 200_000;
  let offset = 0;
  ROWS.forEach((weights, r) => {
    writeAliasRow(weights, table, offset);
    const generator = new Xoshiro128pp(streamState(5, "transport", r));
    const counts = new Float64Array(weights.length);
    for (let i = 0; i < draws; i++) counts[sampleAlias(table, offset, weights.length, generator)]++;
    offset += weights.length;
    if (weights.length === 1) return assert.equal(counts[0], draws);
    const due = (changed: readonly number[]): number[] => {
      const total = changed.reduce((a, b) => a + b);
      return changed.map((weight) => (draws * weight) / total);
    };
    weights.forEach((weight, i) => weight > 0 || assert.equal(counts[i], 0));
    assert.ok(histogramProbability(counts, due(weights)) > FALSE_ALARM, `row ${r}`);
    const wrong = weights.map((weight, i) => (i % 2 === 1 ? 1.05 * weight : weight));
    assert.ok(
      histogramProbability(counts, due(wrong)) < FALSE_ALARM,
      `row ${r}, every second weight 5 % more`,
    );
  });
});
