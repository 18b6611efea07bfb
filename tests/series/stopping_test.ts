import assert from "node:assert/strict";
import { normalEnergyDensityEv, totalEnergyDensityEv } from "../../src/emission/mod.ts";
import {
  fitStoppingPotential,
  fitStoppingSeries,
  PLANCK_EV_S,
  type RetardingCell,
  type RetardingCurve,
} from "../../src/series/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { integrate } from "../support/integrate.ts";
import { normalDraws, pullsAreNormal } from "../support/normal.ts";

/** A sodium emitter and a nickel collector, wired together. */
const EMITTER_EV = 2.3;
const COLLECTOR_EV = 5.0;
const CELL: RetardingCell = {
  temperatureK: 300,
  darkCurrentA: 2e-13,
  geometry: "plane",
  contactPotentialV: { value: COLLECTOR_EV - EMITTER_EV, standardUncertainty: 0.01 },
};
const BACK_CURRENT_A = 8e-13;
const NOISE_A = 1e-13;

/** Currents by integrating the energy distribution above the retarding energy: nothing of the fitted formula is used. */
function curve(photonEnergyEv: number, normal: () => number, geometry: "plane" | "sphere"): RetardingCurve {
  const maximumEv = photonEnergyEv - EMITTER_EV;
  const density = geometry === "plane" ? normalEnergyDensityEv : totalEnergyDensityEv;
  const current = (retardingEv: number): number =>
    integrate(
      (energyEv) => density(energyEv, maximumEv, CELL.temperatureK),
      [Math.max(0, retardingEv), Math.max(0, retardingEv, maximumEv) + 1],
      2000,
    );
  const saturated = current(0);
  const retardingVoltagesV = Array.from(
    { length: 60 },
    (_, i) => photonEnergyEv - COLLECTOR_EV - 2 + 0.05 * i,
  );
  return {
    photonEnergyEv,
    retardingVoltagesV,
    currentsA: retardingVoltagesV.map((voltage) =>
      1e-10 * current(voltage + COLLECTOR_EV - EMITTER_EV) / saturated - BACK_CURRENT_A + CELL.darkCurrentA +
      NOISE_A * normal()
    ),
    currentUncertaintiesA: retardingVoltagesV.map(() => NOISE_A),
  };
}

for (const geometry of ["plane", "sphere"] as const) {
  Deno.test(`fitStoppingPotential() finds the collector's work function with a ${geometry}`, () => {
    // 250 replicates; false alarm: see pullsAreNormal(), two calls.
    const normal = normalDraws(31);
    const exact = curve(5.5, () => 0, geometry);
    const fits = Array.from({ length: 250 }, () =>
      fitStoppingPotential({
        ...exact,
        currentsA: Array.from(exact.currentsA, (current) => current + NOISE_A * normal()),
      }, { ...CELL, geometry }));
    const pulls = fits.map(({ workFunctionEv }) =>
      (workFunctionEv!.value - COLLECTOR_EV) / workFunctionEv!.standardUncertainty
    );
    assert.ok(pullsAreNormal(pulls), "work function");
    assert.ok(!pullsAreNormal(pulls.map((pull) => 2 * pull)), "half the uncertainty");
    assert.ok(
      pullsAreNormal(
        fits.map(({ backCurrentA }) =>
          (backCurrentA!.value - BACK_CURRENT_A) / backCurrentA!.standardUncertainty
        ),
      ),
      "back-current",
    );
    const [{ stoppingPotentialV, workFunctionOf, emitterWorkFunctionEv, usedVoltagesV }] = fits;
    assert.equal(workFunctionOf, "collector");
    assertClose(stoppingPotentialV!.value, 5.5 - COLLECTOR_EV, { absolute: 0.02 }, "stopping potential");
    assertClose(emitterWorkFunctionEv!.value, EMITTER_EV, { absolute: 0.04 }, "emitter");
    assert.ok(emitterWorkFunctionEv!.standardUncertainty >= 0.01);
    assert.ok(usedVoltagesV.length < 60 && usedVoltagesV[0] > exact.retardingVoltagesV[0]);
    const doubtful = fits.filter(({ verdict }) => verdict !== "good").length;
    assert.ok(doubtful <= 12, `${doubtful} of 250 good curves are doubtful`);
  });
}

Deno.test("fitStoppingPotential() doubts the wrong shape of the cell and an open back-current", () => {
  const normal = normalDraws(32);
  const wrong = curve(5.5, () => 0, "sphere");
  for (let i = 0; i < 20; i++) {
    const currentsA = Array.from(wrong.currentsA, (current) => current + NOISE_A * normal());
    assert.equal(fitStoppingPotential({ ...wrong, currentsA }, CELL).verdict, "doubtful", `draw ${i}`);
  }
  const whole = curve(5.5, normal, "plane");
  const short: RetardingCurve = {
    ...whole,
    retardingVoltagesV: Array.from(whole.retardingVoltagesV).slice(0, 41),
    currentsA: Array.from(whole.currentsA).slice(0, 41),
    currentUncertaintiesA: Array.from(whole.currentUncertaintiesA).slice(0, 41),
  };
  const open = fitStoppingPotential(short, CELL);
  assert.equal(open.verdict, "doubtful");
  assert.match(open.reasons[0], /only \d readings lie beyond the stopping potential/);
});

Deno.test("fitStoppingSeries() draws Einstein's line through the curves of one cell", () => {
  const normal = normalDraws(33);
  const { curves, line } = fitStoppingSeries(
    [4.0, 4.9, 5.5, 6.2].map((energy) => curve(energy, normal, "plane")),
    CELL,
  );
  assert.equal(curves.length, 4);
  // 4.5 standard uncertainties: one false alarm in 150 000; a slope 5 % off is refused.
  const { value, standardUncertainty } = line!.planckEvS;
  assert.ok(Math.abs(value - PLANCK_EV_S) < 4.5 * standardUncertainty);
  assert.ok(Math.abs(value - 1.05 * PLANCK_EV_S) > 4.5 * standardUncertainty);
  assertClose(line!.workFunctionEv.value, COLLECTOR_EV, { absolute: 0.02 }, "collector");
  assert.equal(line!.workFunctionOf, "collector");
  assert.equal(fitStoppingSeries([curve(5, normal, "plane")], CELL).line, null);
});

/** A curve with electrons from a narrow band `belowFermiEv` deep, on top of those of {@link curve}. */
function withBand(whole: RetardingCurve, belowFermiEv: number): RetardingCurve {
  const top = whole.photonEnergyEv - COLLECTOR_EV - belowFermiEv;
  return {
    ...whole,
    currentsA: Array.from(
      whole.currentsA,
      (current, i) => current + 3e-10 * Math.max(0, top - whole.retardingVoltagesV[i]),
    ),
  };
}

Deno.test("fitStoppingPotential() fits only what lies above a band that the formula does not know", () => {
  // 4.5 standard uncertainties, 100 replicates: at most one false alarm in 1400; 0.3 eV off is refused.
  const normal = normalDraws(34);
  const fits = Array.from(
    { length: 100 },
    () => fitStoppingPotential(withBand(curve(5.5, normal, "plane"), 1), CELL),
  );
  const agree = (truthEv: number): boolean =>
    fits.every(({ workFunctionEv }) =>
      Math.abs(workFunctionEv!.value - truthEv) < 4.5 * workFunctionEv!.standardUncertainty
    );
  assert.ok(agree(COLLECTOR_EV));
  assert.ok(!agree(COLLECTOR_EV + 0.3) && !agree(COLLECTOR_EV - 0.3));
  for (const { usedShare, usedVoltagesV, verdict } of fits) {
    assert.ok(usedShare <= 1 / 4 && usedVoltagesV[0] > 5.5 - COLLECTOR_EV - 1.3, `${usedShare} ${verdict}`);
  }
});

Deno.test("fitStoppingPotential() gives no number for an ohmic leak, and the series leaves it out with a reason", () => {
  const good = [4.0, 4.9, 5.5].map((energy) => curve(energy, normalDraws(35), "plane"));
  const whole = curve(6.2, normalDraws(36), "plane");
  const leaking: RetardingCurve = {
    ...whole,
    currentsA: Array.from(
      whole.currentsA,
      (current, i) => current - 3e-11 * (whole.retardingVoltagesV[i] - whole.retardingVoltagesV[0]) ** 2,
    ),
  };
  const { curves, leftOut, line } = fitStoppingSeries([...good, leaking], CELL);
  assert.deepEqual(curves.map(({ verdict }) => verdict === "failed"), [false, false, false, true]);
  assert.deepEqual([curves[3].stoppingPotentialV, curves[3].workFunctionEv, curves[3].backCurrentA], [
    null,
    null,
    null,
  ]);
  assert.equal(leftOut.length, 1);
  assert.equal(leftOut[0].photonEnergyEv, 6.2);
  assert.match(leftOut[0].reason, /^chi-square per degree of freedom is [\d.e+]+, above 10, in every part/);
  assert.deepEqual(line, fitStoppingSeries(good, CELL).line);
});

Deno.test("fitStoppingPotential() ends when a curve holds no electrons", () => {
  const flat = { ...curve(5.5, () => 0, "plane"), currentsA: new Array(60).fill(1e-13) };
  assert.throws(
    () => fitStoppingPotential(flat, CELL),
    /at least 6 readings from half of the largest current on/,
  );
});

Deno.test("fitStoppingPotential() refuses what it cannot use", () => {
  const good = curve(5.5, () => 0, "plane");
  const cases: [Partial<RetardingCurve>, Partial<RetardingCell>, RegExp][] = [
    [{ photonEnergyEv: 0 }, {}, /photonEnergyEv must be > 0 eV: current value is 0/],
    [{ retardingVoltagesV: [1, 2] }, {}, /at least 6 readings: current value is 2/],
    [{ retardingVoltagesV: good.currentsA }, {}, /retardingVoltagesV\[\d+\] must be finite and ascending/],
    [{ currentsA: [1] }, {}, /there must be 60 currents and uncertainties: current value is "1, 60"/],
    [{}, { darkCurrentA: NaN }, /darkCurrentA must be finite: current value is NaN/],
    [{}, { geometry: "sphere", contactPotentialV: null }, /contactPotentialV must be given for a sphere/],
  ];
  for (const [change, cellChange, message] of cases) {
    assert.throws(() => fitStoppingPotential({ ...good, ...change }, { ...CELL, ...cellChange }), {
      name: "RangeError",
      message,
    });
  }
});
