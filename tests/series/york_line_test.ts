import assert from "node:assert/strict";
import { weightedMean, yorkLine } from "../../src/series/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { normalDraws, pullsAreNormal } from "../support/normal.ts";

/**
 * K. Pearson's points of 1901 with the weights of D. York, Can. J. Phys. 44, 1079 (1966): the standard worked example of
 * lines with errors in both coordinates.
 */
const PEARSON_YORK = {
  x: [0, 0.9, 1.8, 2.6, 3.3, 4.4, 5.2, 6.1, 6.5, 7.4],
  y: [5.9, 5.4, 4.4, 4.6, 3.5, 3.7, 2.8, 2.8, 2.4, 1.5],
  xUncertainties: [1000, 1000, 500, 800, 200, 80, 60, 20, 1.8, 1].map((weight) => weight ** -0.5),
  yUncertainties: [1, 1.8, 4, 8, 20, 20, 70, 70, 100, 500].map((weight) => weight ** -0.5),
};

Deno.test("yorkLine() gives the published answer to Pearson's data with York's weights", () => {
  // D. York et al., Am. J. Phys. 72, 367 (2004), Table II (from memory): 5.47991022, -0.480533407, 0.294970735,
  // 0.0579850090, chi-square 11.8663532.
  const line = yorkLine(PEARSON_YORK);
  assertClose(line.intercept.value, 5.47991022, { relative: 2e-9 }, "intercept");
  assertClose(line.slope.value, -0.480533407, { relative: 2e-9 }, "slope");
  assertClose(line.intercept.standardUncertainty, 0.294970735, { relative: 2e-6 }, "u(intercept)");
  assertClose(line.slope.standardUncertainty, 0.0579850090, { relative: 2e-6 }, "u(slope)");
  assertClose(line.chiSquare, 11.8663532, { relative: 1e-8 }, "chi-square");
  assert.equal(line.degreesOfFreedom, 8);
});

Deno.test("yorkLine() is stationary in the chi-square of both coordinates", () => {
  // Brute force: the sum of squared distances, minimized over the adjusted abscissas in closed form, does not fall in any
  // direction from the answer.
  const { x, y, xUncertainties, yUncertainties } = PEARSON_YORK;
  const chiSquare = (a: number, b: number): number =>
    x.reduce((sum, value, i) => {
      const variance = yUncertainties[i] ** 2 + b * b * xUncertainties[i] ** 2;
      return sum + (y[i] - a - b * value) ** 2 / variance;
    }, 0);
  const { intercept, slope } = yorkLine(PEARSON_YORK);
  const least = chiSquare(intercept.value, slope.value);
  for (let angle = 0; angle < 6.2; angle += 0.1) {
    const a = intercept.value + 1e-3 * Math.cos(angle);
    const b = slope.value + 2e-4 * Math.sin(angle);
    assert.ok(chiSquare(a, b) > least, `angle ${angle}`);
  }
});

Deno.test("yorkLine() without errors in x is the weighted line, without errors in y its inverse", () => {
  // Closed form of weighted least squares (P. Bevington, Data Reduction and Error Analysis, ch. 6, from memory).
  const x = [0, 1, 2, 3, 4];
  const y = [1.1, 2.9, 5.2, 7.1, 8.8];
  const sigma = [0.1, 0.2, 0.1, 0.3, 0.2];
  const closed = (u: readonly number[], v: readonly number[]) => {
    const sum = (term: (i: number) => number) =>
      u.reduce((total, _, i) => total + term(i) / sigma[i] ** 2, 0);
    const [s, su, sv] = [sum(() => 1), sum((i) => u[i]), sum((i) => v[i])];
    const [suu, suv] = [sum((i) => u[i] * u[i]), sum((i) => u[i] * v[i])];
    const delta = s * suu - su * su;
    return {
      a: (suu * sv - su * suv) / delta,
      b: (s * suv - su * sv) / delta,
      ua: suu / delta,
      ub: s / delta,
    };
  };
  const none = x.map(() => 0);
  const direct = yorkLine({ x, y, xUncertainties: none, yUncertainties: sigma });
  const expected = closed(x, y);
  assertClose(direct.intercept.value, expected.a, { relative: 1e-12 }, "intercept");
  assertClose(direct.slope.value, expected.b, { relative: 1e-12 }, "slope");
  assertClose(direct.intercept.standardUncertainty, Math.sqrt(expected.ua), { relative: 1e-12 });
  assertClose(direct.slope.standardUncertainty, Math.sqrt(expected.ub), { relative: 1e-12 });
  const inverse = yorkLine({ x, y, xUncertainties: sigma, yUncertainties: none });
  const swapped = closed(y, x);
  assertClose(inverse.slope.value, 1 / swapped.b, { relative: 1e-10 }, "slope of the inverse line");
  assertClose(inverse.intercept.value, -swapped.a / swapped.b, { relative: 1e-10 }, "its intercept");
});

Deno.test("yorkLine() covers the truth as often as it promises, and not with uncertainties halved", () => {
  // 1500 replicates; false alarm: see pullsAreNormal().
  const normal = normalDraws(11);
  const truth = { intercept: 2, slope: -0.7 };
  const pulls: number[] = [];
  for (let replicate = 0; replicate < 1500; replicate++) {
    const nodes = [0, 1, 2, 3, 4, 5, 6, 7];
    const line = yorkLine({
      x: nodes.map((x) => x + 0.05 * normal()),
      y: nodes.map((x) => truth.intercept + truth.slope * x + 0.05 * normal()),
      xUncertainties: nodes.map(() => 0.05),
      yUncertainties: nodes.map(() => 0.05),
    });
    pulls.push((line.slope.value - truth.slope) / line.slope.standardUncertainty);
  }
  assert.ok(pullsAreNormal(pulls));
  assert.ok(!pullsAreNormal(pulls.map((pull) => 2 * pull)));
  assert.ok(!pullsAreNormal(pulls.map((pull) => pull + 0.3)));
});

Deno.test("yorkLine() draws a level line", () => {
  const line = yorkLine({
    x: [0, 1, 2],
    y: [1, 1, 1],
    xUncertainties: [0.1, 0.1, 0.1],
    yUncertainties: [0.1, 0.1, 0.1],
  });
  assert.equal(line.slope.value, 0);
  assertClose(line.intercept.value, 1, { relative: 1e-14 });
});

Deno.test("yorkLine() refuses points that are none", () => {
  const good = { x: [0, 1, 2], y: [0, 1, 2], xUncertainties: [0, 0, 0], yUncertainties: [1, 1, 1] };
  const cases: [Partial<typeof good>, RegExp][] = [
    [{ x: [0, 1] }, /at least 3 points: current value is 2/],
    [{ y: [0, 1] }, /y must have 3 values: current value is 2/],
    [{ y: [0, NaN, 1] }, /y\[1\] must be finite: current value is NaN/],
    [{ yUncertainties: [1, -1, 1] }, /yUncertainties\[1\] must be finite and >= 0: current value is -1/],
    [{ yUncertainties: [1, 0, 1] }, /point 1 must have an uncertainty > 0/],
    [{ x: [3, 3, 3] }, /abscissas must differ: current value is 3/],
  ];
  for (const [change, message] of cases) {
    assert.throws(() => yorkLine({ ...good, ...change }), { name: "RangeError", message });
  }
});

Deno.test("weightedMean() weights by inverse variance", () => {
  // Weights 1 and 4 (exact).
  const { mean, chiSquare, degreesOfFreedom } = weightedMean([
    { value: 0, standardUncertainty: 1 },
    { value: 5, standardUncertainty: 0.5 },
  ]);
  assert.equal(mean.value, 4);
  assertClose(mean.standardUncertainty, Math.sqrt(1 / 5), { relative: 1e-14 });
  assert.equal(chiSquare, 16 + 4);
  assert.equal(degreesOfFreedom, 1);
});
