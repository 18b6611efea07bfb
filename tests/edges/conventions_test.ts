import assert from "node:assert/strict";
import { edgeTangentShiftEv } from "../../src/spectrum/mod.ts";
import { measureTwoEdges, METAL } from "../support/two_edges.ts";
import { assertClose } from "../support/assert_close.ts";

Deno.test("edgeTangentShiftEv() of an erf edge is 0.532234 FWHM below it", () => {
  // sqrt(pi/2) sigma / (2.354820045 sigma), independent evaluation.
  assertClose(edgeTangentShiftEv(1, 0), -0.532234 * 2.354820045, { absolute: 1e-5 });
});

Deno.test("edgeTangentShiftEv() of a ramp without broadening is zero, and agrees with the steepest line", () => {
  // Exact limits: a straight ramp's own line starts where the ramp does.
  assertClose(edgeTangentShiftEv(1e-9, 0.1), 0, { absolute: 1e-12 });
  assertClose(edgeTangentShiftEv(1, 1e-5), edgeTangentShiftEv(1, 0), { absolute: 1e-5 });
  // By numbers: height of a ramp of width 1 folded with a Gaussian of 0.3, summed over 4000 positions.
  const [sigma, ramp, n] = [0.3, 1, 4000];
  const gaussian = (x: number) => Math.exp(-0.5 * (x / sigma) ** 2) / (sigma * Math.sqrt(2 * Math.PI));
  let slope = 0;
  for (let i = 0; i < n; i++) slope += gaussian(ramp / 2 - ((i + 0.5) * ramp) / n) / n;
  assertClose(edgeTangentShiftEv(sigma, ramp), ramp / 2 - 0.5 / slope, { absolute: 1e-6 });
});

Deno.test("cutoffConventions() agree when corrected and spread by the resolution shift when not", () => {
  const { conventions } = measureTwoEdges({ ...METAL, top: 2e5, fwhmEv: 0.15 }, 1);
  const [model, half, steepest] = conventions!.rows;
  assert.deepEqual([model.name, half.name, steepest.name], ["model", "half height", "steepest line"]);
  assertClose(conventions!.edgeFwhmEv, 0.15, { relative: 0.05 });
  assertClose(steepest.resolutionShiftEv, -0.532234 * conventions!.edgeFwhmEv, { relative: 1e-4 });
  // The true cutoff is W - W_A - e U = 9.7 eV. The falling top moves the conventions by some meV, as their docs say.
  for (const row of conventions!.rows) assertClose(row.correctedEv.value, 9.7, { absolute: 0.012 }, row.name);
  assertClose(steepest.uncorrectedEv.value, 9.7 - 0.532234 * 0.15, { absolute: 0.012 });
  assert.ok(conventions!.uncorrectedSpreadEv > 0.06 && conventions!.spreadEv < 0.02);
});

Deno.test("cutoffConventions() scatter as much as their uncertainties say", () => {
  const replicates = 60;
  const rows = Array.from({ length: replicates }, (_, i) => measureTwoEdges(METAL, i).conventions!.rows);
  for (const index of [0, 1, 2]) {
    const values = rows.map((row) => row[index].uncorrectedEv);
    const mean = values.reduce((sum, { value }) => sum + value, 0) / replicates;
    const squares = values.reduce((sum, v) => sum + ((v.value - mean) / v.standardUncertainty) ** 2, 0);
    // Chi-square of 59 degrees of freedom: 0.01 % and 99.99 % points 26 and 109 (normal approximation of Wilson and
    // Hilferty). The steepest of many noisy lines is not drawn at random, so it may scatter less, not more.
    assert.ok(squares < 109, `${rows[0][index].name}: ${squares}`);
    assert.ok(index === 2 || squares > 26, `${rows[0][index].name}: ${squares}`);
    assert.ok(squares * 4 > 109); // the twin: uncertainties half as large
  }
});
