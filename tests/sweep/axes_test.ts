import assert from "node:assert/strict";
import fc from "fast-check";
import { parseSweep, sweepPoints } from "../../src/sweep/mod.ts";
import { sweepText } from "../support/sweep_text.ts";

function pointsOf(axes: readonly unknown[]) {
  return sweepPoints(parseSweep(sweepText({ axes }), "sweep.json"));
}

function all(axes: readonly unknown[]): unknown[] {
  const points = pointsOf(axes);
  return Array.from({ length: points.count }, (_, i) => points.at(i));
}

Deno.test("sweepPoints() combines all axes, the last one changing fastest", () => {
  assert.deepEqual(
    all([
      { kind: "list", path: "biasV", values: [-9, -5] },
      { kind: "list", path: "sample.barrier", values: ["classical", "quantum"] },
    ]),
    [
      { biasV: -9, "sample.barrier": "classical" },
      { biasV: -9, "sample.barrier": "quantum" },
      { biasV: -5, "sample.barrier": "classical" },
      { biasV: -5, "sample.barrier": "quantum" },
    ],
  );
});

Deno.test("sweepPoints() steps by equal distances or equal ratios, both ends included, without binary rounding", () => {
  const values = (axis: object) =>
    all([{ kind: "range", path: "biasV", ...axis }]).map((p) => Object.values(p as object)[0]);
  assert.deepEqual(values({ from: 0, to: 0.3, count: 4 }), [0, 0.1, 0.2, 0.3]);
  assert.deepEqual(values({ from: -3, to: -12, count: 4 }), [-3, -6, -9, -12]);
  assert.deepEqual(values({ from: 1, to: 1e4, count: 5, scale: "log" }), [1, 10, 100, 1000, 10000]);
});

Deno.test("sweepPoints() advances zipped axes together", () => {
  assert.deepEqual(
    all([{
      kind: "zip",
      axes: [
        { kind: "range", path: "biasV", from: -5, to: -9, count: 3 },
        { kind: "list", path: "acquisition.startEv", values: [4.5, 6.5, 8.5] },
      ],
    }]),
    [
      { biasV: -5, "acquisition.startEv": 4.5 },
      { biasV: -7, "acquisition.startEv": 6.5 },
      { biasV: -9, "acquisition.startEv": 8.5 },
    ],
  );
});

Deno.test("sweepPoints() maps a sample onto its ranges, linear and logarithmic", () => {
  // The first Sobol points in two dimensions: (0, 0), (1/2, 1/2), (3/4, 1/4), (1/4, 3/4).
  assert.deepEqual(
    all([{
      kind: "sample",
      method: "sobol",
      count: 4,
      axes: [
        { path: "biasV", from: -8, to: -4 },
        { path: "light.photonFluxPerS", from: 1e8, to: 1e12, scale: "log" },
      ],
    }]),
    [
      { biasV: -8, "light.photonFluxPerS": 1e8 },
      { biasV: -6, "light.photonFluxPerS": 1e10 },
      { biasV: -5, "light.photonFluxPerS": 1e9 },
      { biasV: -7, "light.photonFluxPerS": 1e11 },
    ],
  );
});

Deno.test("sweepPoints() gives every combination once, whatever the lengths of the axes", () => {
  const lengths = fc.array(fc.integer({ min: 1, max: 5 }), { minLength: 1, maxLength: 4 });
  fc.assert(
    fc.property(lengths, (counts) => {
      const points = all(counts.map((count, i) => ({
        kind: "list",
        path: `path${i}`,
        values: Array.from({ length: count }, (_, v) => v),
      })));
      assert.equal(points.length, counts.reduce((a, b) => a * b, 1));
      assert.equal(new Set(points.map((point) => JSON.stringify(point))).size, points.length);
    }),
    { seed: 5, numRuns: 50 },
  );
});
