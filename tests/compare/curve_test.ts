import { curveAt, curveSlopeAt, foldGaussian } from "../../src/compare/curve.ts";
import { assertClose } from "../support/assert_close.ts";

/** Values of a function on 0, 0.1, ... 4. */
function curve(f: (x: number) => number) {
  return { startEv: 0, stepEv: 0.1, values: Float64Array.from({ length: 41 }, (_, i) => f(i / 10)) };
}

Deno.test("curveAt() and curveSlopeAt() give a parabola exactly between its energies", () => {
  // The central differences that the cubic takes its slopes from are exact for a parabola.
  const parabola = curve((x) => 3 - 2 * x + 5 * x * x);
  for (const x of [0.1, 0.123, 1.7777, 3.81]) {
    assertClose(curveAt(parabola, x), 3 - 2 * x + 5 * x * x, { absolute: 1e-12 });
    assertClose(curveSlopeAt(parabola, x), -2 + 10 * x, { absolute: 1e-11 });
  }
});

Deno.test("curveAt() goes on with the end values outside", () => {
  const line = curve((x) => x);
  assertClose(curveAt(line, -3), 0, {});
  assertClose(curveAt(line, 9), 4, {});
  assertClose(curveSlopeAt(line, 9), 0, {});
});

Deno.test("foldGaussian() makes of a Gaussian one with the sum of the variances", () => {
  const gaussian = (x: number, sigma: number) =>
    Math.exp(-0.5 * (x / sigma) ** 2) / (sigma * Math.sqrt(2 * Math.PI));
  const values = Float64Array.from({ length: 401 }, (_, i) => gaussian(i - 200, 6));
  const out = new Float64Array(401);
  foldGaussian(values, 8, out);
  for (const i of [200, 205, 215, 230]) {
    // Cut off at five standard deviations, 6e-7 of the area.
    assertClose(out[i], gaussian(i - 200, 10), { absolute: 1e-6 * gaussian(0, 10) + 1e-7 });
  }
});
