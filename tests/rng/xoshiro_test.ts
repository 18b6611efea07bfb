import assert from "node:assert/strict";
import { Xoshiro128pp } from "../../src/rng/mod.ts";
import { assertMean } from "../support/assert_mean.ts";
import { FALSE_ALARM, histogramProbability } from "../support/chi_square.ts";

Deno.test("Xoshiro128pp gives the published sequence from state 1, 2, 3, 4", () => {
  // Made with the authors' reference program, as in the tests of the Rust crate rand_xoshiro.
  const generator = new Xoshiro128pp(Uint32Array.of(1, 2, 3, 4));
  const published = [
    641,
    1573767,
    3222811527,
    3517856514,
    836907274,
    4247214768,
    3867114732,
    1355841295,
    495546011,
    621204420,
  ];
  assert.deepEqual(published.map(() => generator.nextUint32()), published);
});

Deno.test("Xoshiro128pp copies its state and refuses one of zeros or of the wrong length", () => {
  const state = Uint32Array.of(1, 2, 3, 4);
  const generator = new Xoshiro128pp(state);
  state.fill(9);
  assert.equal(generator.nextUint32(), 641);
  for (const bad of [Uint32Array.of(0, 0, 0, 0), Uint32Array.of(1, 2, 3), Uint32Array.of(1, 2, 3, 4, 5)]) {
    assert.throws(() => new Xoshiro128pp(bad), RangeError);
  }
});

Deno.test("nextUniform() is inside (0, 1) for the smallest and the largest word", () => {
  // From the definition, output = rotl(s0 + s3, 7) + s0: words 0 and 2^32 - 1.
  const smallest = new Xoshiro128pp(Uint32Array.of(0, 1, 1, 0));
  const largest = new Xoshiro128pp(Uint32Array.of(0xffffffff, 1, 1, 1));
  assert.equal(smallest.nextUniform(), 0.5 * 2 ** -32);
  assert.equal(largest.nextUniform(), 1 - 0.5 * 2 ** -32);
});

Deno.test("nextUniform() has mean 1/2 and variance 1/12, and pairs fill the square evenly", () => {
  // False alarms: 1 in 150 000 for each of the two means, FALSE_ALARM for the chi-square.
  const generator = new Xoshiro128pp(Uint32Array.of(1, 2, 3, 4));
  const pairs = 200_000;
  const side = 16;
  const cells = new Float64Array(side * side);
  let sum = 0;
  let squares = 0;
  for (let i = 0; i < pairs; i++) {
    const a = generator.nextUniform();
    const b = generator.nextUniform();
    sum += a + b;
    squares += (a - 0.5) ** 2 + (b - 0.5) ** 2;
    cells[Math.floor(a * side) * side + Math.floor(b * side)]++;
  }
  const n = 2 * pairs;
  // Variances of a uniform number and of its squared distance from 1/2: 1/12 and 1/180, exactly.
  const meanError = Math.sqrt(1 / 12 / n);
  const squareError = Math.sqrt(1 / 180 / n);
  assertMean(sum / n, meanError, 0.5, "mean");
  assertMean(squares / n, squareError, 1 / 12, "variance");
  assert.throws(() => assertMean(sum / n, meanError, 0.505, "mean"));
  assert.throws(() => assertMean(squares / n, squareError, 1.03 / 12, "variance"));
  const even = new Float64Array(cells.length).fill(pairs / cells.length);
  const tilted = even.map((cell, i) => cell * (1 + 0.1 * ((i % side) / (side - 1) - 0.5)));
  assert.ok(histogramProbability(cells, even) > FALSE_ALARM);
  assert.ok(histogramProbability(cells, tilted) < FALSE_ALARM);
});
