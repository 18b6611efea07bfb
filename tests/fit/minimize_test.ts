import assert from "node:assert/strict";
import { correlation, type FitProblem, minimize } from "../../src/fit/mod.ts";
import { assertClose } from "../support/assert_close.ts";

/** A weighted straight line y = a + b x through invented points. */
function line(changes: Partial<FitProblem> = {}): FitProblem {
  const x = [0, 1, 2, 3, 4];
  return {
    parameters: [{ name: "a", start: 0 }, { name: "b", start: 1 }],
    model: (p, out) => x.forEach((value, i) => out[i] = p[0] + p[1] * value),
    data: Float64Array.of(1.1, 2.9, 5.2, 7.1, 8.8),
    sigma: Float64Array.of(0.1, 0.2, 0.1, 0.3, 0.2),
    ...changes,
  };
}

Deno.test("minimize() gives the closed-form line and covariance of weighted least squares", () => {
  // Closed form: P. Bevington, Data Reduction and Error Analysis, ch. 6 (cited from memory).
  const { data, sigma } = line();
  let s = 0, sx = 0, sy = 0, sxx = 0, sxy = 0;
  data.forEach((y, x) => {
    const weight = 1 / sigma[x] ** 2;
    s += weight;
    sx += weight * x;
    sy += weight * y;
    sxx += weight * x * x;
    sxy += weight * x * y;
  });
  const delta = s * sxx - sx * sx;
  const fit = minimize(line());
  assert.ok(fit.converged, fit.reason);
  assertClose(fit.values[0], (sxx * sy - sx * sxy) / delta, { relative: 1e-8 }, "a");
  assertClose(fit.values[1], (s * sxy - sx * sy) / delta, { relative: 1e-8 }, "b");
  assertClose(fit.covariance[0], sxx / delta, { relative: 1e-8 }, "variance of a");
  assertClose(fit.covariance[1], -sx / delta, { relative: 1e-8 }, "covariance");
  assertClose(fit.standardErrors[1], Math.sqrt(s / delta), { relative: 1e-8 }, "error of b");
  assertClose(correlation(fit, "a", "b"), -sx / Math.sqrt(s * sxx), { relative: 1e-8 }, "correlation");
  assert.equal(fit.degreesOfFreedom, 3);
});

Deno.test("minimize() stays inside bounds and names the parameter at one", () => {
  const fit = minimize(line({ parameters: [{ name: "a", start: 0 }, { name: "b", start: 1, upper: 1.5 }] }));
  assert.deepEqual(fit.atBound, ["b"]);
  assert.equal(fit.values[1], 1.5);
  assert.equal(fit.standardErrors[1], Infinity);
  // With b held, a is the weighted mean of y - 1.5 x (exact).
  const { data, sigma } = line();
  const weights = sigma.map((value) => 1 / value ** 2);
  const mean = data.reduce((sum, y, x) => sum + weights[x] * (y - 1.5 * x), 0) /
    weights.reduce((a, b) => a + b, 0);
  assertClose(fit.values[0], mean, { relative: 1e-8 }, "a");
});

Deno.test("minimize() leaves a bound at which it starts when the minimum is inside", () => {
  const fit = minimize(
    line({ parameters: [{ name: "a", start: 0, lower: 0 }, { name: "b", start: 0, lower: 0 }] }),
  );
  assert.ok(fit.converged, fit.reason);
  assert.deepEqual(fit.atBound, []);
});

Deno.test("minimize() says which parameter the data do not determine", () => {
  const fit = minimize(line({
    parameters: [{ name: "a", start: 0 }, { name: "b", start: 1 }, { name: "c", start: 1 }],
    model: (p, out) => out.forEach((_, x) => out[x] = p[0] + (p[1] + p[2]) * x),
  }));
  assert.equal(fit.converged, false);
  assert.match(fit.reason, /do not determine [bc]/);
  assert.ok(fit.standardErrors.every((error) => error === Infinity));
});

Deno.test("minimize() survives a model that is not finite away from the start", () => {
  const fit = minimize({
    parameters: [{ name: "k", start: 0.5 }],
    model: (p, out) => out.forEach((_, i) => out[i] = Math.sqrt(p[0] * (i + 1) - 0.4)),
    data: Float64Array.from([0.45, 1.45, 2.45], (value) => Math.sqrt(value - 0.4)),
    sigma: new Float64Array(3).fill(0.01),
  });
  assert.ok(fit.values.every(Number.isFinite));
  assert.ok(Number.isFinite(fit.chiSquare));
});

Deno.test.each([
  [
    "too few data",
    { data: Float64Array.of(1), sigma: Float64Array.of(1) },
    /at least 2 data: current value is 1/,
  ],
  ["a zero sigma", { sigma: Float64Array.of(1, 0, 1, 1, 1) }, /each > 0: current value is 0/],
  ["missing sigmas", { sigma: Float64Array.of(1) }, /there must be 5 sigmas/],
  ["NaN data", { data: Float64Array.of(1, NaN, 3, 4, 5) }, /datum 1 must be finite: current value is NaN/],
  [
    "a start outside bounds",
    { parameters: [{ name: "a", start: 0, lower: 1 }] },
    /start of a must be in 1\.\.Infinity/,
  ],
  [
    "a NaN model",
    { model: (_: Float64Array, out: Float64Array) => void out.fill(NaN) },
    /model must be finite/,
  ],
])("minimize() refuses %s", (_, changes, message) => {
  assert.throws(() => minimize(line(changes as Partial<FitProblem>)), { name: "RangeError", message });
});
