import assert from "node:assert/strict";
import { sobolPoints } from "../../src/sweep/mod.ts";

/** Row of a list of points. */
function row(points: Float64Array, index: number, dimensions: number): number[] {
  return [...points.subarray(index * dimensions, (index + 1) * dimensions)];
}

// Computed with SciPy 1.17.1, qmc.Sobol(10, scramble=False), which reads the published table new-joe-kuo-6.21201.
const PUBLISHED: Readonly<Record<number, readonly number[]>> = {
  1: Array(10).fill(0.5),
  2: [0.75, 0.25, 0.25, 0.25, 0.75, 0.75, 0.25, 0.75, 0.75, 0.75],
  3: [0.25, 0.75, 0.75, 0.75, 0.25, 0.25, 0.75, 0.25, 0.25, 0.25],
  4: [0.375, 0.375, 0.625, 0.875, 0.375, 0.125, 0.375, 0.875, 0.875, 0.625],
  15: [0.0625, 0.9375, 0.5625, 0.3125, 0.6875, 0.1875, 0.8125, 0.3125, 0.3125, 0.6875],
  517: [
    ...[0.8779296875, 0.6259765625, 0.8291015625, 0.6162109375, 0.5830078125],
    ...[0.1904296875, 0.4892578125, 0.5341796875, 0.0029296875, 0.7900390625],
  ],
  1000: [
    ...[0.2197265625, 0.0966796875, 0.5185546875, 0.6767578125, 0.2802734375],
    ...[0.9072265625, 0.0458984375, 0.8994140625, 0.5009765625, 0.0693359375],
  ],
};

Deno.test("sobolPoints() gives the published points in ten dimensions", () => {
  const points = sobolPoints(1001, 10);
  assert.deepEqual(row(points, 0, 10), Array(10).fill(0));
  for (const [index, point] of Object.entries(PUBLISHED)) {
    assert.deepEqual(row(points, Number(index), 10), point);
  }
});

/** `true` when each of `count` equal slices holds one coordinate. */
function isBalanced(coordinates: readonly number[]): boolean {
  return new Set(coordinates.map((x) => Math.floor(x * coordinates.length))).size === coordinates.length;
}

Deno.test("sobolPoints() puts one of its first 2^k points into each slice of every dimension", () => {
  // Property of a (t, k, 1)-net; it is lost when the origin is left out (A. B. Owen, arXiv:2008.08051).
  const points = sobolPoints(257, 10);
  for (let d = 0; d < 10; d++) {
    const coordinates = Array.from({ length: 257 }, (_, i) => points[i * 10 + d]);
    assert.ok(isBalanced(coordinates.slice(0, 256)), `dimension ${d + 1}`);
    assert.ok(!isBalanced(coordinates.slice(1)), `dimension ${d + 1} without the origin`);
  }
});

Deno.test("sobolPoints() fills every pair of the first five dimensions evenly when there are 1024 points", () => {
  // 8 x 8 boxes of 16 points each: these direction numbers were chosen for good pairs (Joe and Kuo 2008). A dimension
  // paired with itself fills the diagonal alone.
  const points = sobolPoints(1024, 5);
  const fullest = (a: number, b: number): number => {
    const boxes = new Uint32Array(64);
    for (let i = 0; i < 1024; i++) {
      boxes[8 * Math.floor(8 * points[5 * i + a]) + Math.floor(8 * points[5 * i + b])]++;
    }
    return Math.max(...boxes);
  };
  for (let a = 0; a < 5; a++) {
    for (let b = 0; b < a; b++) assert.equal(fullest(a, b), 16, `dimensions ${a + 1} and ${b + 1}`);
    assert.equal(fullest(a, a), 128);
  }
});

Deno.test("sobolPoints() refuses more dimensions than it has direction numbers", () => {
  assert.throws(() => sobolPoints(2, 11), {
    name: "RangeError",
    message: "Cannot sample as dimensions must be in 1..10: current value is 11",
  });
});
