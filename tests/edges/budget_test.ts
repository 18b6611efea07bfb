import assert from "node:assert/strict";
import { calibrateScale, expandedUncertainty } from "../../src/edges/mod.ts";
import { coverageFactor, fitStraightLine } from "../../src/fit/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { measureTwoEdges, METAL } from "../support/two_edges.ts";

Deno.test("expandedUncertainty() gives the degrees of freedom of JCGM 100, H.1 (end gauge)", () => {
  // H.1.6: u 25, 9.7, 2.9, 16.6 nm with 18, 25.6, 50, 2 degrees of freedom; u_c 32 nm, nu_eff 16 (from memory).
  const terms = ([[25, 18], [9.7, 25.6], [2.9, 50], [16.6, 2]] as const).map(([u, degreesOfFreedom]) => ({
    name: "",
    standardUncertaintyEv: u,
    sensitivities: { cutoffEv: 1 },
    degreesOfFreedom,
    evaluation: "A" as const,
    note: "",
  }));
  const { expandedEv, effectiveDegreesOfFreedom } = expandedUncertainty(terms, "cutoffEv");
  assertClose(expandedEv / 2, 31.7, { absolute: 0.5 });
  assert.equal(Math.floor(effectiveDegreesOfFreedom), 16);
});

for (
  const [degreesOfFreedom, factor] of [
    [1, 13.97],
    [2, 4.53],
    [3, 3.31],
    [4, 2.87],
    [5, 2.65],
    [10, 2.28],
    [20, 2.13],
    [50, 2.05],
    [Infinity, 2],
  ]
) {
  Deno.test(`coverageFactor() is ${factor} for ${degreesOfFreedom} degrees of freedom`, () => {
    // JCGM 100:2008, table G.2, column 95.45 % (from memory).
    assertClose(coverageFactor(degreesOfFreedom), factor, { absolute: 0.0051 });
  });
}

Deno.test("coverageFactor() refuses what are no degrees of freedom", () => {
  assert.throws(() => coverageFactor(0), {
    name: "RangeError",
    message:
      "Cannot give a coverage factor as degrees of freedom must be a whole number >= 1: current value is 0",
  });
});

Deno.test("fitStraightLine() gives the calibration line of JCGM 100, H.3 (thermometer)", () => {
  // Table H.6: corrections b_k, degrees C, at t_k; x = t - 20. Results y1 -0.1712(29), y2 0.00218(67), r -0.930.
  const t = [21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511];
  const b = [-.171, -.169, -.166, -.159, -.164, -.165, -.156, -.157, -.159, -.161, -.160];
  const { offset, slope, covariance } = fitStraightLine(t.map((value) => value - 20), b, null);
  assertClose(offset.value, -0.1712, { absolute: 5e-5 });
  assertClose(offset.standardUncertainty, 0.0029, { absolute: 5e-5 });
  assertClose(slope.value, 0.00218, { absolute: 5e-6 });
  assertClose(slope.standardUncertainty, 0.00067, { absolute: 5e-6 });
  assertClose(covariance / offset.standardUncertainty / slope.standardUncertainty, -0.930, {
    absolute: 5e-4,
  });
});

/** ISO 15472 lines for monochromated Al K-alpha, eV: Au 4f7/2, Ag 3d5/2, Cu 2p3/2. */
const LINES_EV = [83.96, 368.21, 932.62];
const measuredWith = (gain: number, offsetEv: number) => LINES_EV.map((line) => offsetEv + gain * line);

Deno.test("calibrateScale() gives back gain and offset, with degrees of freedom from the scatter", () => {
  const lines = measuredWith(1.0005, 0.12).map((measuredEv, i) => ({ referenceEv: LINES_EV[i], measuredEv }));
  const { gain, line } = calibrateScale(lines);
  assertClose(gain.value, 1.0005, { absolute: 1e-12 });
  assertClose(line.offset.value, 0.12, { absolute: 1e-9 });
  assert.equal(gain.degreesOfFreedom, 1);
  const stated = calibrateScale(lines.map((entry) => ({ ...entry, standardUncertaintyEv: 0.02 })));
  assert.equal(stated.gain.degreesOfFreedom, Infinity);
  // Closed form: sigma / sqrt(sum (x - mean)^2).
  const mean = LINES_EV.reduce((a, b) => a + b) / 3;
  const spread = LINES_EV.reduce((sum, x) => sum + (x - mean) ** 2, 0);
  assertClose(stated.gain.standardUncertainty, 0.02 / Math.sqrt(spread), { relative: 1e-9 });
});

Deno.test("calibrateScale() refuses too few lines, half-known uncertainties and energies of two axes", () => {
  const line = (referenceEv: number, measuredEv: number) => ({ referenceEv, measuredEv });
  assert.throws(() => calibrateScale([line(1, 1), line(2, 2)]), /at least 3 points/);
  assert.throws(
    () => calibrateScale([line(1, 1), { ...line(2, 2), standardUncertaintyEv: 1 }, line(3, 3)]),
    /all lines or none must have an uncertainty: current value is "1 of 3"/,
  );
  assert.throws(() => calibrateScale([line(1, 3), line(2, 2), line(3, 1)]), /gain must be within 5 % of 1/);
});

Deno.test("measureWorkFunction() divides distances by the gain and takes its uncertainty into the budget", () => {
  const plain = measureTwoEdges(METAL, 1);
  const scaleGain = { value: 1.001, standardUncertainty: 0.0005, degreesOfFreedom: 1 };
  const scaled = measureTwoEdges(METAL, 1, { options: { scaleGain } });
  const width = plain.maxKineticEnergyEv!.value;
  assertClose(scaled.maxKineticEnergyEv!.value, width / 1.001, { absolute: 1e-12 });
  const u = (width / 1.001) * 0.0005 / 1.001;
  assertClose(
    scaled.workFunctionEv!.standardUncertainty,
    Math.hypot(plain.workFunctionEv!.standardUncertainty, u),
    {
      relative: 1e-9,
    },
  );
  // Welch-Satterthwaite: one term with one degree of freedom dominates.
  const { effectiveDegreesOfFreedom, coverageFactorFor95 } = scaled.expanded.workFunctionEv!;
  assertClose(effectiveDegreesOfFreedom, (scaled.workFunctionEv!.standardUncertainty / u) ** 4, {
    relative: 0.02,
  });
  assert.ok(coverageFactorFor95 > 5);
});

Deno.test("the budget of a work function adds up, and its correlations have the right signs", () => {
  const { budget, workFunctionEv, maxKineticEnergyEv, correlations, expanded } = measureTwoEdges(METAL, 1);
  const of = (quantity: "workFunctionEv" | "maxKineticEnergyEv") =>
    budget.filter((term) => (term.sensitivities[quantity] ?? 0) !== 0).map((term) =>
      term.standardUncertaintyEv
    );
  assertClose(Math.hypot(...of("workFunctionEv")), workFunctionEv!.standardUncertainty, { relative: 1e-12 });
  assert.equal(expanded.workFunctionEv!.expandedEv, 2 * workFunctionEv!.standardUncertainty);
  // W = h nu - KE_max: all terms but the photon energy are shared, with opposite sign.
  const [w, ke] = [workFunctionEv!.standardUncertainty, maxKineticEnergyEv!.standardUncertainty];
  assertClose(correlations!.workFunctionAndMaxKineticEnergy, -ke / w, { relative: 1e-9 });
  assertClose(correlations!.workFunctionAndIonizationEnergy, 1, { relative: 1e-9 });
});
