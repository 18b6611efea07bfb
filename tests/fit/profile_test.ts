import assert from "node:assert/strict";
import { minimizePoisson, profileInterval } from "../../src/fit/mod.ts";
import { assertClose } from "../support/assert_close.ts";

const constant = (data: number[], bounds: { lower?: number; upper?: number } = {}) => ({
  parameters: [{ name: "mean", start: 4, ...bounds }],
  model: (p: Float64Array, out: Float64Array) => void out.fill(p[0]),
  data: Float64Array.from(data),
});

/** Root of the deviance of a Poisson mean of n counts, 2 (m - n - n ln(m/n)) = rise, by bisection. */
function exactEnd(n: number, rise: number, inner: number, outer: number): number {
  for (let i = 0; i < 60; i++) {
    const middle = 0.5 * (inner + outer);
    if (2 * (middle - n - n * Math.log(middle / n)) < rise) inner = middle;
    else outer = middle;
  }
  return inner;
}

for (const rise of [1, 3.84]) {
  Deno.test(`profileInterval() of a Poisson mean has the exact ends for a rise of ${rise}`, () => {
    const problem = constant([7]);
    problem.data = Float64Array.of(7, 7); // two channels of mean m: 14 counts of mean 2 m
    const { lower, upper } = profileInterval(problem, minimizePoisson(problem), "mean", rise);
    assertClose(2 * lower!, exactEnd(14, rise, 14, 1e-3), { absolute: 0.03 });
    assertClose(2 * upper!, exactEnd(14, rise, 14, 60), { absolute: 0.03 });
    assert.ok(upper! - 7 > 7 - lower!, "asymmetric");
  });
}

Deno.test("profileInterval() of a Gaussian peak minimizes over the other parameters", () => {
  // Height and position of a peak on a background; a straight line y = a + b x as the closed case is in the line test.
  const xs = Float64Array.from({ length: 41 }, (_, i) => (i - 20) / 5);
  const problem = {
    parameters: [{ name: "position", start: 0.1 }, { name: "height", start: 90 }, { name: "base", start: 8 }],
    model: (p: Float64Array, out: Float64Array) =>
      xs.forEach((x, i) => out[i] = p[1] * Math.exp(-0.5 * (x - p[0]) ** 2) + p[2]),
    data: xs.map((x) => Math.round(100 * Math.exp(-0.5 * x * x) + 10)),
  };
  const fit = minimizePoisson(problem);
  const { lower, upper } = profileInterval(problem, fit, "position");
  // Many counts: the interval is the standard error to second order.
  assertClose(upper! - fit.values[0], fit.standardErrors[0], { relative: 0.02 });
  assertClose(fit.values[0] - lower!, fit.standardErrors[0], { relative: 0.02 });
});

Deno.test("profileInterval() has no end where a bound comes first", () => {
  const problem = constant([4, 4], { upper: 4.5 });
  const { lower, upper } = profileInterval(problem, minimizePoisson(problem), "mean");
  assert.equal(upper, null);
  assert.ok(lower! < 4);
});

Deno.test("minimizePoisson() reaches the same minimum with derivatives, and with expected counts, as without", () => {
  const xs = Float64Array.from({ length: 30 }, (_, i) => i / 10);
  const problem = {
    parameters: [{ name: "scale", start: 50 }, { name: "decay", start: 1.5, lower: 0.1 }],
    model: (p: Float64Array, out: Float64Array) => xs.forEach((x, i) => out[i] = p[0] * Math.exp(-x / p[1])),
    data: xs.map((x) => Math.round(80 * Math.exp(-x))),
  };
  const plain = minimizePoisson(problem);
  const derivative = (index: number, p: Float64Array, out: Float64Array): boolean => {
    if (index !== 0) return false;
    xs.forEach((x, i) => out[i] = Math.exp(-x / p[1]));
    return true;
  };
  const other = minimizePoisson({ ...problem, derivative, expected: plain.fitted });
  for (const j of [0, 1]) {
    assertClose(other.values[j], plain.values[j], { absolute: 2e-3 * plain.standardErrors[j] });
  }
  assert.ok(other.evaluations < plain.evaluations);
});
