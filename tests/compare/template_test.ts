import assert from "node:assert/strict";
import { type Template, templateFamily } from "../../src/compare/mod.ts";
import { lagrangeWeights } from "../../src/compare/template.ts";
import { assertClose } from "../support/assert_close.ts";
import { BASE, draw } from "./templates.ts";

Deno.test("lagrangeWeights() interpolates a cubic through four nodes exactly, and its slope", () => {
  const nodes = [-1, 0.5, 2, 3];
  const cubic = (x: number) => 2 - x + 3 * x * x - 0.5 * x ** 3;
  const [weights, slopes] = [new Float64Array(4), new Float64Array(4)];
  for (const x of [-0.7, 0.5, 1.1, 2.9]) {
    lagrangeWeights(nodes, x, weights, slopes);
    assertClose(weights.reduce((sum, w, k) => sum + w * cubic(nodes[k]), 0), cubic(x), { absolute: 1e-12 });
    assertClose(slopes.reduce((sum, s, k) => sum + s * cubic(nodes[k]), 0), -1 + 6 * x - 1.5 * x * x, {
      absolute: 1e-11,
    });
  }
});

Deno.test("templateFamily() refuses nodes of one value", () => {
  const parameter = { name: "x", unit: "", baseValue: 1, lower: 0, upper: 2 };
  assert.throws(
    () => templateFamily(parameter, BASE, [{ value: 1, template: BASE, reference: null }]),
    /Cannot interpolate in x as there must be nodes of different values/,
  );
});

/** A pair simulated with noise: 16 groups each, independent of one another. */
function noisy(expected: Float64Array, seed: number, noise: number): Template {
  const groups = Array.from(
    { length: 16 },
    (_, g) => draw(expected.map((mean) => mean / noise), g, seed).map((count) => noise * count),
  );
  const counts = expected.map((_, i) => groups.reduce((sum, group) => sum + group[i], 0) / 16);
  return { ...BASE, counts, groups, direct: new Float64Array(counts.length), darkCounts: 0 };
}

const NOISELESS: Template = {
  ...BASE,
  counts: BASE.counts.map((mean) => mean - BASE.darkCounts),
  direct: new Float64Array(BASE.counts.length),
  darkCounts: 0,
};

/** The change that a noisy pair gives, and how far it is from the truth, in units of chi-square of the counts. */
function changeOfPair(ratio: (x: number) => number, seed: number) {
  const n = NOISELESS.counts.length;
  const changed = NOISELESS.counts.map((mean, i) => mean * ratio(i / n));
  const family = templateFamily({ name: "x", unit: "", baseValue: 0, lower: 0, upper: 1 }, NOISELESS, [{
    value: 1,
    template: noisy(changed, seed, 16),
    reference: noisy(NOISELESS.counts, seed + 1, 16),
  }]);
  const all = NOISELESS.counts.reduce((a, b) => a + b, 0);
  const scale = all / changed.reduce((a, b) => a + b, 0);
  const truth = changed.map((value, i) => scale * value - NOISELESS.counts[i]);
  const size = (values: Float64Array): number =>
    values.reduce((sum, value, i) => sum + value * value / Math.max(1, NOISELESS.counts[i]), 0) / n;
  return {
    signal: size(truth),
    error: size(family.changes[1].map((value, i) => value - truth[i])),
  };
}

Deno.test("templateFamily() keeps a slow change of scattered counts and drops the noise of the pair", () => {
  // As many histories as make the noise of one measurement: two independent ones leave 2 units a channel.
  const { signal, error } = changeOfPair((x) => 1 + 0.6 * x - 0.9 * x * x, 71);
  assert.ok(signal > 1, `signal ${signal}`);
  assert.ok(error < 0.1, `error ${error}`);
  assert.ok(error < 0.1 * signal);
});

Deno.test("templateFamily() finds no change in a pair without one", () => {
  // Forty-four functions at three standard errors, known to 18 % from 16 groups: about one is kept by chance.
  const { signal, error } = changeOfPair(() => 1, 73);
  assert.ok(signal < 1e-20);
  assert.ok(error < 0.05, `error ${error}`);
});
