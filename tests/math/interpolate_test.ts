import assert from "node:assert/strict";
import fc from "fast-check";
import { interpolateLinear } from "../../src/math/mod.ts";
import { assertClose } from "../support/assert_close.ts";

const XS = [-2, -1, 0.5, 4];
const YS = [3, 5, -1, 6];

Deno.test("interpolateLinear() passes through the nodes and halves between them", () => {
  XS.forEach((x, i) => assert.equal(interpolateLinear(XS, YS, x), YS[i]));
  assert.equal(interpolateLinear(XS, YS, -1.5), 4);
  assert.equal(interpolateLinear(XS, YS, -0.25), 2);
  assert.equal(interpolateLinear(XS, YS, 2.25), 2.5);
});

Deno.test("interpolateLinear() keeps the end values outside the nodes and takes a single node", () => {
  assert.equal(interpolateLinear(XS, YS, -100), 3);
  assert.equal(interpolateLinear(XS, YS, 100), 6);
  assert.equal(interpolateLinear([1], [7], 0), 7);
  assert.equal(interpolateLinear([1], [7], 2), 7);
});

Deno.test("interpolateLinear() gives a straight line back whatever the nodes", () => {
  fc.assert(
    fc.property(
      fc.uniqueArray(fc.integer({ min: -1000, max: 1000 }), { minLength: 2, maxLength: 40 }),
      fc.double({ min: 0, max: 1, noNaN: true }),
      fc.integer({ min: -9, max: 9 }),
      (unsorted, share, slope) => {
        const xs = unsorted.toSorted((a, b) => a - b);
        const x = xs[0] + share * (xs[xs.length - 1] - xs[0]);
        assertClose(interpolateLinear(xs, xs.map((node) => slope * node + 3), x), slope * x + 3, {
          absolute: 1e-9,
        });
      },
    ),
    { seed: 1, numRuns: 200 },
  );
});
