import assert from "node:assert/strict";
import fc from "fast-check";
import {
  type Complex,
  complexAdd,
  complexDivide,
  complexLog,
  complexMultiply,
  complexSqrt,
} from "../../src/math/mod.ts";
import { assertClose } from "../support/assert_close.ts";

const number = fc.double({ min: -1e3, max: 1e3, noNaN: true }).map((x) => (Math.abs(x) < 1e-6 ? 1e-6 : x));
const complex = fc.record({ re: number, im: number });

function assertComplex(actual: Complex, expected: Complex): void {
  const size = Math.hypot(expected.re, expected.im);
  assertClose(actual.re, expected.re, { absolute: 1e-12 * size });
  assertClose(actual.im, expected.im, { absolute: 1e-12 * size });
}

Deno.test("complex functions obey the laws of arithmetic", () => {
  fc.assert(
    fc.property(complex, complex, (a, b) => {
      assertComplex(complexMultiply(complexDivide(a, b), b), a);
      assertComplex(
        complexMultiply(complexAdd(a, b), a),
        complexAdd(complexMultiply(a, a), complexMultiply(b, a)),
      );
      const root = complexSqrt(a);
      assertComplex(complexMultiply(root, root), a);
      assert.ok(root.re >= 0 && root.im * a.im >= 0);
      const log = complexLog(a);
      assertComplex({ re: Math.exp(log.re) * Math.cos(log.im), im: Math.exp(log.re) * Math.sin(log.im) }, a);
    }),
    { seed: 1, numRuns: 200 },
  );
});

Deno.test("complexSqrt() and complexLog() take the principal branch", () => {
  assert.deepEqual(complexSqrt({ re: 0, im: 0 }), { re: 0, im: 0 });
  assert.deepEqual(complexSqrt({ re: 9, im: 0 }), { re: 3, im: 0 });
  assert.deepEqual(complexSqrt({ re: -9, im: 0 }), { re: 0, im: 3 });
  assertComplex(complexSqrt({ re: 3, im: -4 }), { re: 2, im: -1 });
  // Without cancellation: (1 + 1e-9 i) squared.
  assertClose(complexSqrt({ re: 1 - 1e-18, im: 2e-9 }).im, 1e-9, { relative: 1e-14 });
  assertClose(complexLog({ re: -1, im: 0 }).im, Math.PI, { absolute: 0 });
  assertClose(complexLog({ re: -1, im: -1e-300 }).im, -Math.PI, { absolute: 0 });
});
