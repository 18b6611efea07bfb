import assert from "node:assert/strict";
import { engineData, expectedSpectrum, informationDepthNm } from "../../src/model/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { assertMean } from "../support/assert_mean.ts";

const TEXT = await Deno.readTextFile(
  new URL("../../scenarios/gold_under_aluminum_al_kalpha.json", import.meta.url),
);
const GOLD = await Deno.readTextFile(new URL("../../scenarios/clean_gold_he1.json", import.meta.url));

function spectrum(...overrides: string[]) {
  const resolved = resolveScenario(parseScenario(TEXT, "x-ray", overrides));
  const engine = engineData(resolved);
  return { resolved, engine, expected: expectedSpectrum(resolved, engine, runSeries(engine, 1, 64)) };
}

Deno.test("X-ray lines appear at h nu - binding energy - W_A - eU, Au 4f as ISO 15472 has it", () => {
  const { expected } = spectrum("sample.layers=[]");
  const level = expected.levels.find(({ name }) => name === "Au 4f7/2");
  assertClose(level!.kineticEnergyEv, 1486.7 - 83.96 - 4.4, { absolute: 1e-9 });
  const { counts, kineticEnergiesEv } = expected;
  const peak = kineticEnergiesEv[counts.indexOf(Math.max(...counts))];
  // The asymmetric line's maximum lies some meV below; the step is 0.1 eV.
  assertClose(peak, level!.kineticEnergyEv, { absolute: 0.1 });
});

Deno.test("forced and analogue tallies of the shipped X-ray scenario agree", () => {
  const { expected } = spectrum();
  let chiSquare = 0;
  let windows = 0;
  for (let c = 0; c + 40 <= expected.counts.length; c += 80) {
    // The middle of a window stands for it: neighbors share histories.
    const error = Math.hypot(expected.standardErrors[c + 20], expected.analogueStandardErrors[c + 20]);
    if (error === 0) continue;
    chiSquare += ((expected.counts[c + 20] - expected.analogueCounts[c + 20]) / error) ** 2;
    windows++;
  }
  // 99.99 % point of chi-square for 9 degrees of freedom: 33.7 (table, from memory).
  assert.ok(windows >= 8 && chiSquare < 35, `${chiSquare} in ${windows} windows`);
  const wrong = expected.counts[320] * 1.5 - expected.analogueCounts[320];
  assert.ok(Math.abs(wrong) > 4 * expected.analogueStandardErrors[320], "50 % more would be seen");
});

Deno.test("an overlayer weakens the substrate's line by exp(-d/(lambda cos theta)) without elastic events", () => {
  const none = "sample.transportMeanFreePathNm=null";
  const bare = spectrum(none, "sample.layers=[]", "analyzer.acceptanceHalfAngleDeg=2");
  const covered = spectrum(
    none,
    'sample.layers=[{"material":"Al","thicknessNm":1}]',
    "analyzer.acceptanceHalfAngleDeg=2",
  );
  const noLoss = ({ expected }: typeof bare) =>
    expected.levels.find(({ name }) => name === "Au 4f7/2")!.noLossPerPhoton;
  // TPP-2M of aluminum at 1402 eV from the table of the design: 2.3663 at 1000, 3.2352 at 1486.6 eV (non-relativistic).
  const row = covered.resolved.fast!.layers[0].inelasticMeanFreePathNm[350];
  assert.ok(row > 3 && row < 3.15, `${row} nm`);
  assertClose(noLoss(covered) / noLoss(bare), Math.exp(-1 / row), { relative: 3e-3 });
});

Deno.test("partial intensities along straight lines are the shares of n losses that end within what is followed", () => {
  // No deflection: C_n = C_0 (W. Werner, Surf. Interface Anal. 31, 141 (2001), from memory), so what is left of C_n within
  // the largest loss L is the distribution function of the sum of n losses, here the convolution of their distribution.
  const { resolved, engine } = spectrum("sample.transportMeanFreePathNm=null", "sample.layers=[]");
  const fast = resolved.fast!;
  const [{ losses }] = fast.layers;
  const bins = Math.round(fast.maxLossEv / fast.stepEv);
  const sums = [1, 2].map((n) => {
    let share = 0;
    for (let a = 0; a < bins; a++) {
      if (n === 1) share += losses[a];
      // Two uniform places in their bins lie below the edge of the sum with probability 1, 1/2 or 0.
      else for (let b = 0; a + b < bins; b++) share += losses[a] * losses[b] * (a + b === bins - 1 ? 0.5 : 1);
    }
    return share;
  });
  const level = fast.levels.findIndex(({ name }) => name === "Au 4f7/2");
  const runs = Array.from(
    { length: 16 },
    (_, seed) =>
      expectedSpectrum(resolved, engine, runSeries(engine, seed, 8)).levels[level].partialIntensities,
  );
  assert.ok(sums[0] < 0.95 && sums[1] < 0.8, `${sums}: the limit must be felt`);
  [1, ...sums].forEach((expected, n) => {
    const mean = runs.reduce((sum, run) => sum + run[n], 0) / runs.length;
    if (n === 0) return assert.equal(mean, 1);
    const scatter = runs.reduce((sum, run) => sum + (run[n] - mean) ** 2, 0);
    const error = Math.sqrt(scatter / runs.length / (runs.length - 1));
    // One false alarm in 2400 each (Student's t of 15 degrees of freedom).
    assertMean(mean, error, expected, `${n} losses`);
    assert.throws(() => assertMean(mean, error, 1), `${n} losses, without the limit`);
  });
});

Deno.test("directCounts of gold hold the highest energies and next to nothing of the cutoff", () => {
  // Just below the Fermi edge every inelastic event leads out of the window; at the cutoff cascades make nearly all.
  const gold = resolveScenario(parseScenario(GOLD, "gold", ["light.satellites=false"]));
  const engine = engineData(gold);
  const { counts, directCounts, kineticEnergiesEv } = expectedSpectrum(
    gold,
    engine,
    runSeries(engine, 1, 64),
  );
  const shareAt = (energyEv: number): number => {
    const c = kineticEnergiesEv.findIndex((channel) => channel >= energyEv);
    return directCounts[c] / counts[c];
  };
  const edgeEv = gold.photonEnergyEv + gold.kineticEnergyShiftEv;
  assert.ok(shareAt(edgeEv - 0.1) > 0.95, `${shareAt(edgeEv - 0.1)}`);
  assert.ok(shareAt(gold.workFunctionEv + gold.kineticEnergyShiftEv + 0.3) < 0.2);
  directCounts.forEach((direct, c) => assert.ok(direct >= 0 && direct <= counts[c] * (1 + 1e-12)));
});

Deno.test("a window without a core level is an error, formulas outside their range a warning that names them", () => {
  assert.throws(
    () => spectrum("acquisition.startEv=100", "acquisition.endEv=150"),
    /must hold a line or its losses/,
  );
  const { resolved } = spectrum(
    'light={"kind":"band","centerEv":180,"fwhmEv":0.1}',
    "sample.layers=[]",
    "acquisition.startEv=60",
    "acquisition.endEv=110",
    "simulation.maxLossEv=40",
  );
  assert.match(resolved.warnings.map(({ message }) => message).join("\n"), /TPP-2M/);
});

Deno.test("surface excitations take exp(-P) of the line and put it below, nothing lost", () => {
  const without = spectrum("sample.layers=[]", "acquisition.startEv=1300", "acquisition.stepEv=0.2");
  const withThem = spectrum(
    "sample.layers=[]",
    "acquisition.startEv=1300",
    "acquisition.stepEv=0.2",
    "sample.surfaceExcitationFactor=1",
  );
  const mean = withThem.resolved.fast!.levels[0].surfaceExcitations;
  // 1/(1 + 0.173 sqrt(E)), a free-electron metal at normal emission (form from memory, see the formula).
  assertClose(mean, 1 / (1 + 0.1727 * Math.sqrt(1486.7 - 83.96)), { relative: 2e-3 });
  const line = ({ expected }: typeof without) => expected.levels[0].noLossPerPhoton;
  assertClose(line(withThem) / line(without), Math.exp(-mean), { relative: 1e-9 });
  const height = ({ expected }: typeof without) => Math.max(...expected.counts);
  assert.ok(height(withThem) < 0.9 * height(without));
  const all = ({ expected }: typeof without) => expected.counts.reduce((sum, value) => sum + value, 0);
  // Of a loss of 20 eV or more little leaves the window of 98 eV below the line.
  assertClose(all(withThem), all(without), { relative: 0.03 });
});

Deno.test("informationDepthNm() of an exponential distribution is the mean depth times ln(1/(1 - share))", () => {
  const cellNm = 0.01;
  const densityPerNm = Array.from({ length: 2000 }, (_, i) => Math.exp(-(i + 0.5) * cellNm));
  const distribution = { topNm: 0.5, cellNm, depthsNm: [], densityPerNm };
  // ISO 18115-1; exact for a straight line: lambda cos(theta) ln(1/(1 - P/100)).
  for (const percent of [50, 90, 95, 99]) {
    assertClose(informationDepthNm(distribution, percent), 0.5 + Math.log(1 / (1 - percent / 100)), {
      absolute: 2e-3,
    });
  }
  assert.throws(() => informationDepthNm(distribution, 100), /percent must be in > 0..99/);
});
