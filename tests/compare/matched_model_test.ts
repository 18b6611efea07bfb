import assert from "node:assert/strict";
import { matchedModel } from "../../src/compare/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { expectedTwoEdges } from "../support/two_edges.ts";
import {
  BASE,
  channels,
  COARSE,
  RESOLUTION,
  TEMPERATURE,
  withWorkFunction,
  WORK_FUNCTION,
} from "./templates.ts";

const { energiesEv } = expectedTwoEdges(COARSE);

/** Offset, gain, extra width, background, intensity, values. */
function parameters(...values: number[]): Float64Array {
  return Float64Array.from(values);
}

Deno.test("derivative() of matchedModel() matches central differences in every parameter", () => {
  const families = [WORK_FUNCTION, TEMPERATURE, RESOLUTION];
  const model = matchedModel(BASE, families, channels(energiesEv, new Float64Array(energiesEv.length)));
  const at = parameters(0.03, 1.002, 0.1, 5, 1.3, 5.17, 560, 0.33);
  const steps = [1e-5, 1e-6, 1e-5, 1e-3, 1e-5, 1e-5, 1e-2, 1e-5];
  const exact = new Float64Array(energiesEv.length);
  const [above, below] = [exact.slice(), exact.slice()];
  steps.forEach((step, index) => {
    if (!model.derivative(index, at, exact)) return assert.equal(model.names[index], "extraFwhmEv");
    model.expected(at.with(index, at[index] + step), above);
    model.expected(at.with(index, at[index] - step), below);
    const largest = exact.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
    assert.ok(largest > 0);
    exact.forEach((value, i) =>
      assertClose((above[i] - below[i]) / (2 * step), value, { absolute: 1e-5 * largest }, model.names[index])
    );
  });
});

Deno.test("matchedModel() interpolated in the work function is the spectrum computed there, and not that of the base", () => {
  // 0.15 eV from the nearest node. The spectrum at 5.25 eV comes from Simpson's rule over its physics.
  const truth = expectedTwoEdges({ ...withWorkFunction(5.25), marginsEv: [1.5, 1.5] });
  const model = matchedModel(BASE, [WORK_FUNCTION], channels(truth.energiesEv, truth.counts));
  const out = new Float64Array(truth.counts.length);
  const misfit = (workFunctionEv: number): number => {
    model.expected(parameters(0, 1, 0, 0, 1, workFunctionEv), out);
    // Nodes are scaled to one sum: the intensity is free.
    const scale = truth.counts.reduce((a, b) => a + b, 0) / out.reduce((a, b) => a + b, 0);
    return truth.counts.reduce((sum, count, i) => sum + (count - scale * out[i]) ** 2 / count, 0);
  };
  // In units of chi-square: far below what counting noise makes of 250 channels.
  assert.ok(misfit(5.25) < 5, `misfit ${misfit(5.25)}`);
  assert.ok(misfit(5.1) > 1e4);
});

Deno.test("matchedModel() moves, stretches and scales the template as its formula says", () => {
  const n = energiesEv.length;
  const model = matchedModel(BASE, [], channels(energiesEv, new Float64Array(n)));
  const [plain, changed] = [new Float64Array(n), new Float64Array(n)];
  model.expected(parameters(0, 1, 0, 0, 1), plain);
  model.expected(parameters(0, 1, 0, 7, 2), changed);
  // Intensity leaves the dark counts alone.
  plain.forEach((value, i) =>
    assertClose(changed[i], 2 * (value - COARSE.dark) + COARSE.dark + 7, { relative: 1e-12 })
  );
  // E' = E_F + offset + gain (E - E_F), energies of a moved axis.
  const moved = energiesEv.map((e) => BASE.fermiEdgeEv + 0.2 + 1.01 * (e - BASE.fermiEdgeEv));
  matchedModel(BASE, [], channels(moved, changed)).expected(parameters(0.2, 1.01, 0, 0, 1), changed);
  plain.forEach((value, i) => assertClose(changed[i], value, { relative: 1e-9 }));
});
