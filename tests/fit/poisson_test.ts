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
