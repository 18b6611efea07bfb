import assert from "node:assert/strict";
import { minimize, minimizePoisson } from "../../src/fit/mod.ts";
import { samplePoisson, streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { assertMean } from "../support/assert_mean.ts";

Deno.test("minimizePoisson() of a constant is the mean of the counts, zeros included (exact maximum likelihood)", () => {
  const data = Float64Array.of(0, 2, 0, 1, 3, 0, 0, 4);
  const fit = minimizePoisson({
    parameters: [{ name: "m", start: 2 }],
    model: (p, out) => void out.fill(p[0]),
    data,
  });
  assert.ok(fit.converged, fit.reason);
  assertClose(fit.values[0], 10 / 8, { relative: 1e-6 }, "mean");
  // Fisher information of a Poisson mean m in n channels is n/m (any text on statistics).
  assertClose(fit.standardErrors[0], Math.sqrt(10 / 64), { relative: 1e-3 }, "error");
});

Deno.test("minimizePoisson() of a scale is the sum of counts over the sum of the shape (exact maximum likelihood)", () => {
  const shape = [0.2, 0.7, 3, 9, 4, 1];
  const data = Float64Array.of(1, 0, 8, 21, 7, 3);
  const fit = minimizePoisson({
    parameters: [{ name: "scale", start: 1 }],
    model: (p, out) => shape.forEach((value, i) => out[i] = p[0] * value),
    data,
  });
  assertClose(fit.values[0], 40 / 17.9, { relative: 1e-6 }, "scale");
});

Deno.test("minimizePoisson() is unbiased at one count per channel where weights from the counts are not", () => {
  const generator = new Xoshiro128pp(streamState(11, "replicate", 0));
  const likelihood: number[] = [];
  const weighted: number[] = [];
  for (let replicate = 0; replicate < 400; replicate++) {
    const data = Float64Array.from({ length: 40 }, () => samplePoisson(1, generator));
    const parameters = [{ name: "m", start: 1.5 }];
    const model = (p: Float64Array, out: Float64Array): void => void out.fill(p[0]);
    likelihood.push(minimizePoisson({ parameters, model, data }).values[0]);
    const sigma = data.map((count) => Math.sqrt(Math.max(1, count)));
    weighted.push(minimize({ parameters, model, data, sigma }).values[0]);
  }
  const mean = (values: number[]): number => values.reduce((a, b) => a + b, 0) / values.length;
  // The mean of 40 x 400 Poisson counts of expectation 1 has standard error 1/sqrt(16000), exactly.
  const error = 1 / Math.sqrt(16000);
  assertMean(mean(likelihood), error, 1, "maximum likelihood");
  assert.throws(() => assertMean(mean(weighted), error, 1, "weights from counts"));
});

/** A peak on a background of a tenth of a count, with invented counts. */
const PEAK_COUNTS = Float64Array.of(0, 0, 1, 0, 0, 2, 5, 9, 6, 3, 0, 0, 0, 1, 0, 0);
const PEAK_PARAMETERS = [
  { name: "height", start: 6 },
  { name: "position", start: 6.5 },
  { name: "width", start: 1.5 },
  { name: "base", start: 0.1 },
];
const peak = (p: Float64Array, out: Float64Array): void =>
  out.forEach((_, i) => out[i] = p[0] * Math.exp(-(((i - p[1]) / p[2]) ** 2)) + p[3]);

Deno.test("minimizePoisson() solves the score equations of a peak on few counts", () => {
  const score = (values: Float64Array): number[] => {
    const [height, position, width, base] = values;
    const sums = [0, 0, 0, 0];
    PEAK_COUNTS.forEach((count, i) => {
      const u = (i - position) / width;
      const shape = Math.exp(-u * u);
      const slopes = [shape, height * shape * 2 * u / width, height * shape * 2 * u * u / width, 1];
      slopes.forEach((slope, j) => sums[j] += (count / (height * shape + base) - 1) * slope);
    });
    return sums;
  };
  const problem = { parameters: PEAK_PARAMETERS, model: peak, data: PEAK_COUNTS };
  const fit = minimizePoisson(problem);
  assert.ok(fit.converged, fit.reason);
  assert.ok(
    fit.values[3] > 0.05,
    "the background is above the least variance, where the equations are exact",
  );
  // A score times the standard error is the distance to the root in standard errors, of one parameter alone.
  score(fit.values).forEach((sum, j) =>
    assertClose(sum * fit.standardErrors[j], 0, { absolute: 5e-3 }, `score ${j}`)
  );
  const neyman = minimize({ ...problem, sigma: PEAK_COUNTS.map((count) => Math.sqrt(Math.max(1, count))) });
  assert.ok(score(neyman.values).some((sum, j) => Math.abs(sum * fit.standardErrors[j]) > 0.1));
});

Deno.test("minimizePoisson() is at the minimum of its deviance, above and below the least variance", () => {
  const line = (p: Float64Array, out: Float64Array): void => out.forEach((_, i) => out[i] = p[0] * i / 40);
  const data = Float64Array.of(0, 0, 0, 1, 0, 0, 0, 0, 0, 0);
  const parameters = [{ name: "slope", start: 1 }];
  const fit = minimizePoisson({ parameters, model: line, data });
  assert.ok(fit.converged, fit.reason);
  assert.ok(fit.fitted[1] < 0.05 && fit.fitted[9] > 0.05);
  const devianceAt = (slope: number): number =>
    minimizePoisson({ parameters: [{ name: "slope", start: slope, fixed: true }], model: line, data })
      .deviance;
  // The standard error is where the deviance has risen by about 1, so a tenth of it shows the minimum clearly.
  for (const change of [-0.1, 0.1]) {
    assert.ok(devianceAt(fit.values[0] + change * fit.standardErrors[0]) > fit.deviance);
  }
});

Deno.test("minimizePoisson() of an empty spectrum is zero with the error of the least variance", () => {
  const fit = minimizePoisson({
    parameters: [{ name: "m", start: 1 }],
    model: (p, out) => void out.fill(p[0]),
    data: new Float64Array(20),
  });
  assert.ok(fit.converged, fit.reason);
  assertClose(fit.values[0], 0, { absolute: 1e-6 }, "mean");
  assertClose(fit.standardErrors[0], Math.sqrt(0.05 / 20), { relative: 1e-6 }, "error");
  // Twice the integral of (0 - m)/0.05 from 0.05 to 0, added to the 2 x 0.05 at 0.05, is 0.05 in each channel.
  assertClose(fit.deviance, 20 * 0.05, { relative: 1e-6 }, "deviance");
});

Deno.test("minimizePoisson() passes on that the data do not determine a parameter", () => {
  const fit = minimizePoisson({
    parameters: [{ name: "a", start: 1 }, { name: "b", start: 1 }],
    model: (p, out) => void out.fill(p[0] + p[1]),
    data: Float64Array.of(3, 5, 4),
  });
  assert.equal(fit.converged, false);
  assert.match(fit.reason, /do not determine [ab]/);
});

Deno.test("minimizePoisson() gives the closed-form deviance", () => {
  // 2 sum [m - n + n ln(n/m)]: S. Baker, R. Cousins, Nucl. Instrum. Meth. 221, 437 (1984); here m = 2.
  const fit = minimizePoisson({
    parameters: [{ name: "m", start: 1 }],
    model: (p, out) => void out.fill(p[0]),
    data: Float64Array.of(1, 3),
  });
  assertClose(fit.deviance, 2 * (Math.log(1 / 2) + 3 * Math.log(3 / 2)), { relative: 1e-6 }, "deviance");
});

Deno.test("minimizePoisson() refuses negative counts", () => {
  const problem = {
    parameters: [{ name: "m", start: 1 }],
    model: (p: Float64Array, out: Float64Array) => void out.fill(p[0]),
    data: Float64Array.of(1, -1),
  };
  assert.throws(() => minimizePoisson(problem), {
    name: "RangeError",
    message: "Cannot fit as counts must be >= 0: current value is -1",
  });
});
