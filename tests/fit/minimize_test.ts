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

Deno.test("minimize() keeps a fixed parameter and gives it neither variance nor freedom", () => {
  const fit = minimize(
    line({ parameters: [{ name: "a", start: 0 }, { name: "b", start: 1.5, fixed: true }] }),
  );
  assert.ok(fit.converged, fit.reason);
  assert.equal(fit.values[1], 1.5);
  assert.equal(fit.degreesOfFreedom, 4);
  assert.deepEqual(fit.atBound, []);
  assert.deepEqual(Array.from(fit.covariance.slice(1)), [0, 0, 0]);
  assert.equal(fit.standardErrors[1], 0);
  // The variance of a weighted mean is one over the sum of the weights (exact).
  const weight = line().sigma.reduce((sum, value) => sum + 1 / value ** 2, 0);
  assertClose(fit.standardErrors[0], Math.sqrt(1 / weight), { relative: 1e-8 }, "error of a");
});

Deno.test("minimize() of fixed parameters only gives their chi-square", () => {
  const fit = minimize(
    line({ parameters: [{ name: "a", start: 1, fixed: true }, { name: "b", start: 2, fixed: true }] }),
  );
  // Residuals 0.1, -0.1, 0.2, 0.1, -0.2 over the sigmas.
  assertClose(fit.chiSquare, 1 + 0.25 + 4 + 1 / 9 + 1, { relative: 1e-12 }, "chi-square");
  assert.ok(fit.converged, fit.reason);
});

Deno.test("minimize() determines parameters again when one that depends on them is fixed", () => {
  const fit = minimize(line({
    parameters: [{ name: "a", start: 0 }, { name: "b", start: 1 }, { name: "c", start: 1, fixed: true }],
    model: (p, out) => out.forEach((_, x) => out[x] = p[0] + (p[1] + p[2]) * x),
  }));
  assert.ok(fit.converged, fit.reason);
  assertClose(fit.values[1] + 1, minimize(line()).values[1], { relative: 1e-8 }, "slope");
});

Deno.test("minimize() does not depend on the units of a parameter", () => {
  const small = minimize(line({
    parameters: [{ name: "a", start: 0 }, { name: "b", start: 1e-9 }],
    model: (p, out) => out.forEach((_, x) => out[x] = p[0] + 1e9 * p[1] * x),
  }));
  const fit = minimize(line());
  assert.ok(small.converged, small.reason);
  assertClose(small.values[1] * 1e9, fit.values[1], { relative: 1e-8 }, "slope");
  assertClose(small.standardErrors[1] * 1e9, fit.standardErrors[1], { relative: 1e-8 }, "error of the slope");
});

Deno.test("minimize() rejects steps to where the model is not finite", () => {
  let notFinite = 0;
  const fit = minimize({
    // The straight continuation from here ends below zero.
    parameters: [{ name: "k", start: 10 }],
    model: (p, out) => {
      out.forEach((_, i) => out[i] = Math.sqrt(p[0] * (i + 1) - 0.4));
      if (out.some(Number.isNaN)) notFinite++;
    },
    data: Float64Array.from([0.6, 1.6, 2.6], Math.sqrt),
    sigma: new Float64Array(3).fill(0.01),
  });
  assert.ok(notFinite > 0);
  assert.ok(fit.converged, fit.reason);
  assertClose(fit.values[0], 1, { relative: 1e-8 }, "k");
});

Deno.test("minimize() takes one-sided derivatives beside a value that is not finite", () => {
  const fit = minimize(line({
    parameters: [{ name: "a", start: 0, fixed: true }, { name: "b", start: 1 }],
    model: (p, out) => out.forEach((_, x) => out[x] = p[1] > 1 ? NaN : p[1] * x),
    data: Float64Array.of(0, 1, 2, 3, 4),
  }));
  assert.ok(fit.converged, fit.reason);
  const information = line().sigma.reduce((sum, value, x) => sum + (x / value) ** 2, 0);
  assertClose(fit.standardErrors[1], Math.sqrt(1 / information), { relative: 1e-8 }, "error of b");
});

Deno.test("minimize() does not call it converged when it cannot step down from a slope", () => {
  // The model jumps away just below the start, so no step against the derivative helps.
  const fit = minimize(line({
    parameters: [{ name: "a", start: 0, fixed: true }, { name: "b", start: 3.0001 }],
    model: (p, out) => out.forEach((_, x) => out[x] = (p[1] > 3.00005 ? p[1] : p[1] + 50) * x),
  }));
  assert.equal(fit.converged, false);
  assert.equal(fit.reason, "no step lowers chi-square");
});

Deno.test("minimize() does not call it converged when the minimum is infinitely far", () => {
  const fit = minimize(line({
    parameters: [{ name: "rate", start: 1 }],
    model: (p, out) => void out.fill(2 + 1 / (1 + p[0] ** 2)),
    data: new Float64Array(5),
  }));
  assert.equal(fit.converged, false);
  assert.equal(fit.reason, "the data do not determine rate");
});

Deno.test("minimize() evaluates the model once for each set of parameters, inside the bounds", () => {
  const seen: string[] = [];
  const { model } = line();
  const fit = minimize(line({
    parameters: [{ name: "a", start: 0, lower: -1 }, { name: "b", start: 1, lower: 0, upper: 1.5 }],
    model: (p, out) => {
      seen.push(p.join());
      assert.ok(p[0] >= -1 && p[1] >= 0 && p[1] <= 1.5);
      model(p, out);
    },
  }));
  assert.equal(seen.length, fit.evaluations);
  assert.equal(new Set(seen).size, seen.length);
});

Deno.test("correlation() refuses names without a variance", () => {
  const fit = minimize(line({ parameters: [{ name: "a", start: 0 }, { name: "b", start: 1, fixed: true }] }));
  assert.equal(correlation(fit, "a", "a"), 1);
  assert.throws(() => correlation(fit, "a", "b"), {
    name: "RangeError",
    message: "Cannot correlate as b must have a variance > 0: current value is 0",
  });
  assert.throws(() => correlation(fit, "a", "c"), {
    name: "RangeError",
    message: 'Cannot correlate as the name must be one of a, b: current value is "c"',
  });
});

Deno.test.each([
  [
    "too few data",
    { data: Float64Array.of(1), sigma: Float64Array.of(1) },
    /at least 2 data: current value is 1/,
  ],
  [
    "fewer data than free parameters",
    { parameters: ["a", "b", "c", "d", "e", "f"].map((name) => ({ name, start: 1 })) },
    /at least 6 data: current value is 5/,
  ],
  [
    "a name used twice",
    { parameters: [{ name: "a", start: 1 }, { name: "a", start: 2 }] },
    /names must be unique: current value is "a"/,
  ],
  ["a scale of zero", { parameters: [{ name: "a", start: 1, scale: 0 }] }, /scale of a must be > 0/],
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
    { model: (_: Float64Array, out: Float64Array) => void out.fill(NaN, 3) },
    /model value 3 must be finite at the start: current value is NaN/,
  ],
])("minimize() refuses %s", (_, changes, message) => {
  assert.throws(() => minimize(line(changes as Partial<FitProblem>)), { name: "RangeError", message });
});
