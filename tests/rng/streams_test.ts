import assert from "node:assert/strict";
import { splitMix64, type StreamPurpose, streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import { assertMean } from "../support/assert_mean.ts";
import { FALSE_ALARM, histogramProbability } from "../support/chi_square.ts";

const GOLDEN_GAMMA = 0x9e3779b97f4a7c15n;
const PURPOSES: readonly StreamPurpose[] = ["transport", "counting", "replicate"];

// First outputs of the authors' reference program for two seeds; the second are those of Rosetta Code (both from memory,
// high confidence).
Deno.test.each([
  [0n, [0xe220a8397b1dcdafn, 0x6e789e6aa1b965f4n, 0x06c45d188009454fn]],
  [1234567n, [6457827717110365317n, 3203168211198807973n, 9817491932198370423n]],
])("splitMix64() gives the published sequence from seed %s", (seed, published) => {
  const outputs = published.map((_, i) => splitMix64(BigInt.asUintN(64, seed + BigInt(i) * GOLDEN_GAMMA)));
  assert.deepEqual(outputs, published);
});

Deno.test("streamState() differs for every seed, purpose and index, exchanged ones included", () => {
  const numbers = [...Array(20).keys(), 2 ** 32, 2 ** 32 + 1, 2 ** 53 - 1];
  const states = new Set(
    numbers.flatMap((seed) =>
      PURPOSES.flatMap((purpose) => numbers.map((index) => streamState(seed, purpose, index).join()))
    ),
  );
  assert.equal(states.size, numbers.length ** 2 * PURPOSES.length);
});

Deno.test("streamState() gives the same state for the same three numbers", () => {
  assert.deepEqual(streamState(7, "counting", 3), streamState(7, "counting", 3));
});

Deno.test.each([
  [-1, 0, "seed", "-1"],
  [1.5, 0, "seed", "1.5"],
  [2 ** 53, 0, "seed", "9007199254740992"],
  [0, NaN, "index", "NaN"],
  [0, -3, "index", "-3"],
])("streamState() refuses seed %s with index %s", (seed, index, name, value) => {
  assert.throws(() => streamState(seed, "transport", index), {
    name: "RangeError",
    message:
      `Cannot derive a stream as ${name} must be a whole number 0..2^53 - 1: current value is ${value}`,
  });
});

/** How evenly the first numbers of 20 000 streams with neighboring indices fall into 64 cells. */
function firstNumbers(stateOf: (index: number) => Uint32Array): number {
  const streams = 20_000;
  const cells = new Float64Array(64);
  for (let index = 0; index < streams; index++) {
    cells[Math.floor(new Xoshiro128pp(stateOf(index)).nextUniform() * 64)]++;
  }
  return histogramProbability(cells, new Float64Array(64).fill(streams / 64));
}

Deno.test("streams of neighboring indices start evenly, as counting numbers for states would not", () => {
  // False alarms: FALSE_ALARM.
  assert.ok(firstNumbers((index) => streamState(1, "transport", index)) > FALSE_ALARM);
  assert.ok(firstNumbers((index) => Uint32Array.of(1, 1, index, 0)) < FALSE_ALARM);
});

Deno.test("streams of neighboring seeds, purposes and indices are uncorrelated, a stream with itself is not", () => {
  // False alarms: 1 in 150 000 for each of the three pairs.
  const n = 100_000;
  const correlation = (a: Uint32Array, b: Uint32Array): number => {
    const [first, second] = [new Xoshiro128pp(a), new Xoshiro128pp(b)];
    let sum = 0;
    for (let i = 0; i < n; i++) sum += (first.nextUniform() - 0.5) * (second.nextUniform() - 0.5);
    return (12 * sum) / n;
  };
  const error = 1 / Math.sqrt(n); // of 12 times the product of independent uniform numbers, exactly
  const base = streamState(1, "transport", 0);
  for (
    const other of [
      streamState(2, "transport", 0),
      streamState(1, "counting", 0),
      streamState(1, "transport", 1),
    ]
  ) {
    assertMean(correlation(base, other), error, 0, "correlation");
  }
  assert.throws(() => assertMean(correlation(base, base), error, 0, "correlation"));
});
