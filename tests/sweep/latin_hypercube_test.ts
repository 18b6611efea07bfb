import assert from "node:assert/strict";
import { latinHypercubePoints } from "../../src/sweep/mod.ts";

const COUNT = 1000;
const DIMENSIONS = 4;

function column(points: Float64Array, d: number): number[] {
  return Array.from({ length: COUNT }, (_, i) => points[i * DIMENSIONS + d]);
}

Deno.test("latinHypercubePoints() puts one point into each slice of every dimension", () => {
  // The definition: McKay, Beckman, Conover, Technometrics 21, 239 (1979).
  const points = latinHypercubePoints(COUNT, DIMENSIONS, 7);
  for (let d = 0; d < DIMENSIONS; d++) {
    const slices = column(points, d).map((x) => Math.floor(x * COUNT)).toSorted((a, b) => a - b);
    assert.deepEqual(slices, Array.from({ length: COUNT }, (_, i) => i));
  }
});

/** Correlation times the square root of the number of points: standard normal for independent columns. */
function z(a: readonly number[], b: readonly number[]): number {
  return (12 * a.reduce((sum, x, i) => sum + (x - 0.5) * (b[i] - 0.5), 0)) / Math.sqrt(COUNT);
}

Deno.test("latinHypercubePoints() shuffles the dimensions independently", () => {
  // 6 pairs at a limit of 4.5: one false alarm in 25 000. The seed is fixed.
  const points = latinHypercubePoints(COUNT, DIMENSIONS, 7);
  const columns = Array.from({ length: DIMENSIONS }, (_, d) => column(points, d));
  for (let d = 1; d < DIMENSIONS; d++) {
    for (let e = 0; e < d; e++) assert.ok(Math.abs(z(columns[d], columns[e])) < 4.5, `${d} and ${e}`);
  }
  const shared = columns[0].map((x, i) => (i % 4 === 0 ? x : columns[1][i]));
  assert.ok(
    Math.abs(z(columns[0], shared)) > 4.5,
    "a column a quarter of which is the other must be refused",
  );
});

Deno.test("latinHypercubePoints() depends on the seed alone", () => {
  assert.deepEqual(latinHypercubePoints(50, 3, 1), latinHypercubePoints(50, 3, 1));
  assert.notDeepEqual(latinHypercubePoints(50, 3, 1), latinHypercubePoints(50, 3, 2));
});
