import assert from "node:assert/strict";
import { countSpectrum, expectedSpectrum, pairEngineData } from "../../src/model/mod.ts";
import type { PairEngineData } from "../../src/transport/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { flatMetal, type FlatMetalChanges } from "../support/flat_metal.ts";
import { integrate } from "../support/integrate.ts";
import { sumOf } from "../support/tally_mean.ts";

/** Slope and intercept of the straight line through points, by least squares. */
function straightLine(points: readonly (readonly [number, number])[]): { slope: number; intercept: number } {
  const n = points.length;
  const meanX = points.reduce((sum, [x]) => sum + x, 0) / n;
  const meanY = points.reduce((sum, [, y]) => sum + y, 0) / n;
  const slope = points.reduce((sum, [x, y]) => sum + (x - meanX) * (y - meanY), 0) /
    points.reduce((sum, [x]) => sum + (x - meanX) ** 2, 0);
  return { slope, intercept: meanY - slope * meanX };
}

/**
 * Probability that an electron of the flat metal leaves unscattered, 1/2 [(1 - mu_c) - (1/aL) ln((1 + aL)/(1 + aL mu_c))]
 * with mu_c^2 = (W + bottom)/(E + bottom) and aL = 1/10: C. Berglund, W. Spicer, Phys. Rev. 136, A1030 (1964).
 */
function escapeProbability(energyEv: number): number {
  const edge = Math.sqrt(14.5 / (energyEv + 10));
  return 0.5 * ((1 - edge) - 10 * Math.log((1 + 0.1) / (1 + 0.1 * edge)));
}

Deno.test("pairEngineData() spreads the unscattered electrons of a flat metal as the volume model says", () => {
  // Final energies 0..h nu = 10 eV are equally likely.
  const { direct, stack: { grid } } = pairEngineData(flatMetal());
  assert.equal(grid.stepEv, 0.02);
  for (const bin of [225, 226, 240, 300, 400, 499]) {
    const exact = integrate(escapeProbability, [bin * 0.02, (bin + 1) * 0.02], 10) / 10;
    assertClose(direct[bin], exact, { relative: 2e-4 }, `bin ${bin}`);
  }
  assertClose(sumOf(direct), integrate(escapeProbability, [4.5, 10]) / 10, { relative: 2e-4 }, "all");
});

/** Electrons per absorbed photon at T = 0, for light a given energy above the work function of 4.5 eV. */
function yieldAbove(excessEv: number): { direct: number; scattered: number; photonEnergyEv: number } {
  const photonEnergyEv = 4.5 + excessEv;
  const engine = pairEngineData(flatMetal({ photonEnergyEv, energyStepEv: 0.005 }));
  const tally = runSeries(engine, 1, 2);
  const scattered = tally.groups.reduce((sum, group) => sum + sumOf(group.forced), 0) / tally.histories;
  return { direct: sumOf(engine.direct), scattered, photonEnergyEv };
}

Deno.test("pairEngineData() follows the threshold law of the volume model: sqrt(yield) linear in h nu - W", () => {
  // Closed form to lowest order from the escape probability above: 1 - mu_c = (E - W)/(2 V0), so the yield is
  // aL/(1 + aL) (h nu - W)^2/(8 V0 h nu) with aL = 1/10, V0 = W + bottom = 14.5 eV. The next order is a few percent.
  const points = [0.05, 0.1, 0.15, 0.2].map((excessEv) => ({ excessEv, ...yieldAbove(excessEv) }));
  for (const { excessEv, direct, scattered, photonEnergyEv } of points) {
    const exact = (0.1 / 1.1) * excessEv ** 2 / (8 * 14.5 * photonEnergyEv);
    assertClose(direct, exact, { relative: 0.1 * excessEv + 2e-3 }, `${excessEv} eV above`);
    assert.ok(scattered < 0.01 * direct, "next to nothing comes out after a collision");
  }
  const threshold = (f: (y: number) => number): number => {
    const { slope, intercept } = straightLine(points.map((p) => [p.photonEnergyEv, f(p.direct)]));
    return -intercept / slope;
  };
  assertClose(threshold(Math.sqrt), 4.5, { absolute: 3e-3 }, "threshold");
  assert.ok(Math.abs(threshold((y) => y) - 4.5) > 0.03, "a straight line through the yield itself misses W");
  assert.ok(Math.abs(threshold(Math.cbrt) - 4.5) > 0.03, "and so does one through its cube root");
});

/** Everything that a metal lets out, by energy bin and in units of electrons per photon. */
function allElectrons(engine: PairEngineData, batches = 20): Float64Array[] {
  const tally = runSeries(engine, 9, batches);
  const perPhoton = (key: "forced" | "analogue"): Float64Array =>
    engine.direct.map((_, bin) =>
      tally.groups.reduce((sum, group) => sum + group[key][bin], 0) / tally.histories
    );
  return [engine.direct, perPhoton("forced"), perPhoton("analogue")];
}

Deno.test("pairEngineData() and runSeries() let nothing out above h nu - W at T = 0", () => {
  const engine = pairEngineData(flatMetal());
  assert.ok(engine.direct[499] > 0, "up to the limit of 10 eV there are electrons");
  for (const electrons of allElectrons(engine)) {
    assert.ok(sumOf(electrons, 225, 500) > 0);
    assert.equal(sumOf(electrons, 500), 0, "above 10 eV there are none");
    assert.equal(sumOf(electrons, 0, 225), 0, "nor below the vacuum level at 4.5 eV");
  }
});

Deno.test("pairEngineData() and runSeries() let out above h nu - W what the Fermi-Dirac function says, kT by kT", () => {
  const [direct, forced] = allElectrons(pairEngineData(flatMetal({ temperatureK: 300 })));
  const kT = 0.02585199979;
  const filled = (energyEv: number): number => 1 / (1 + Math.exp((energyEv - 10) / kT));
  for (let bin = 490; bin < 510; bin++) {
    const [low, high] = [bin * 0.02, (bin + 1) * 0.02];
    const exact = integrate((energyEv) => filled(energyEv) * escapeProbability(energyEv), [low, high], 10) /
      10;
    // Final states that heat has filled at the Fermi level, kT ln 2 of 10 eV, change the norm by 0.2 %.
    assertClose(direct[bin], exact, { relative: 3e-3 }, `${low}..${high} eV`);
  }
  assert.ok(sumOf(direct, 516) < Math.exp(-12) * sumOf(direct), "12 kT above");
  assert.ok(sumOf(forced, 505) < 0.1 * sumOf(direct, 505), "collisions do not lift electrons");
});

Deno.test("pairEngineData() and runSeries() let out nothing below threshold at T = 0 at any intensity", () => {
  for (
    const [workFunctionEv, photonEnergyEv] of [[4.5, 4.5], [4.5, 3], [4.51, 4.505], [4.517, 4.516999], [
      4.5,
      0.3,
    ]]
  ) {
    for (const absorbedPhotonsPerS of [1, 1e20]) {
      const metal = flatMetal({ workFunctionEv, photonEnergyEv, absorbedPhotonsPerS, biasV: -5 });
      const engine = pairEngineData(metal);
      assert.ok(engine.source !== null, "photons are absorbed");
      for (const electrons of allElectrons(engine, 2)) assert.equal(sumOf(electrons), 0);
      const spectrum = expectedSpectrum(metal, engine, runSeries(engine, 1, 2));
      assert.equal(sumOf(spectrum.counts), 0);
      assert.equal(sumOf(countSpectrum(spectrum, 1)), 0);
    }
  }
});

Deno.test("pairEngineData() lets out the thermal tail below threshold in a warm metal", () => {
  const yieldAt = (temperatureK: number): number =>
    sumOf(pairEngineData(flatMetal({ photonEnergyEv: 4.4, temperatureK, energyStepEv: 0.005 })).direct);
  // R. Fowler, Phys. Rev. 38, 45 (1931): yield proportional to T^2 f(mu), f(mu) = e^mu - e^(2 mu)/4 + ..., with
  // mu = -0.1 eV/kT = -3.868 and -1.934; f from the series, five terms.
  const fowler = (mu: number): number =>
    [1, 2, 3, 4, 5].reduce((sum, n) => sum - (-Math.exp(mu)) ** n / n ** 2, 0);
  const kT = 0.02585199979;
  const expected = 4 * fowler(-0.05 / kT) / fowler(-0.1 / kT);
  // The escape probability is linear above W only to lowest order: 0.4 % at kT.
  assertClose(
    yieldAt(600) / yieldAt(300),
    expected,
    { relative: 0.01 },
    "yield at 600 K over yield at 300 K",
  );
});

/** Width of the spectrum outside at T = 0, from the first to the last bin that lets electrons out. */
function maxKineticEnergyEv(changes: FlatMetalChanges): number {
  const { direct, stack: { grid } } = pairEngineData(
    flatMetal({ ...changes, biasV: -5, energyStepEv: 0.01 }),
  );
  const first = direct.findIndex((value) => value > 0);
  return (direct.findLastIndex((value) => value > 0) + 1 - first) * grid.stepEv;
}

Deno.test("the highest kinetic energy against photon energy is a line of slope 1 and intercept -W", () => {
  // A. Einstein, Ann. Phys. 17, 132 (1905).
  for (const workFunctionEv of [4.5, 3.7]) {
    const { slope, intercept } = straightLine(
      [5.003, 6.21, 8, 9.517, 12].map((photonEnergyEv) => [
        photonEnergyEv,
        maxKineticEnergyEv({ workFunctionEv, photonEnergyEv }),
      ]),
    );
    assertClose(slope, 1, { absolute: 3e-3 }, "slope");
    assertClose(intercept, -workFunctionEv, { absolute: 0.02 }, "intercept");
  }
});

/** Recorded energy at which the topmost edge has half its height. */
function recordedFermiEdgeEv(changes: FlatMetalChanges & { readonly photonEnergyEv: number }): number {
  const about = changes.photonEnergyEv - 4.4 + 6;
  const metal = flatMetal({
    ...changes,
    analyzerWorkFunctionEv: 4.4,
    biasV: -6,
    resolutionFwhmEv: 0.03,
    energyStepEv: 0.01,
    acquisition: {
      startEv: about - 0.1,
      endEv: about + 0.1,
      stepEv: 0.001,
      dwellS: 1,
      sweeps: 1,
      darkRateCountsPerS: 0,
      deadTimeS: 0,
    },
  });
  const engine = pairEngineData(metal);
  const { counts, kineticEnergiesEv } = expectedSpectrum(metal, engine, runSeries(engine, 1, 2));
  const half = 0.5 * counts[40];
  const below = counts.findLastIndex((value) => value > half);
  const share = (counts[below] - half) / (counts[below] - counts[below + 1]);
  return kineticEnergiesEv[below] + 0.001 * share;
}

Deno.test("the recorded Fermi edge against photon energy is a line of slope 1 and intercept -W_A - e U, whatever W", () => {
  // Sample and analyzer share a Fermi level: the contact potential, not W, decides (R. Millikan, Phys. Rev. 7, 355 (1916)).
  for (const workFunctionEv of [4.5, 3.7]) {
    const { slope, intercept } = straightLine(
      [5.5, 6.21, 8, 9.52].map((photonEnergyEv) => [
        photonEnergyEv,
        recordedFermiEdgeEv({ photonEnergyEv, workFunctionEv }),
      ]),
    );
    assertClose(slope, 1, { absolute: 2e-4 }, "slope");
    assertClose(intercept, -4.4 + 6, { absolute: 2e-3 }, "intercept");
  }
});
