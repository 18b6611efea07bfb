import assert from "node:assert/strict";
import { expectedSpectrum, pairEngineData } from "../../src/model/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { parseScenario, type ResolvedScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { assertMean } from "../support/assert_mean.ts";
import { sumOf, tallyMean } from "../support/tally_mean.ts";

const GOLD = await Deno.readTextFile(new URL("../../scenarios/clean_gold_he1.json", import.meta.url));

function gold(...overrides: string[]): ResolvedScenario {
  return resolveScenario(parseScenario(GOLD, "gold", ["simulation.energyStepEv=0.05", ...overrides]));
}

// What a real surface adds, one at a time and all together: both tallies must see the same.
const SURFACES: readonly string[][] = [
  ['sample.layers=[{"material":"Al","thicknessNm":0.5}]'],
  ['sample.layers=[{"material":"Al","thicknessNm":0.3,"transportMeanFreePathNm":1},{"material":"Ag","thicknessNm":1}]'],
  ['sample.surface.patches=[{"areaFraction":0.3,"workFunctionEv":4.7},{"areaFraction":0.7,"workFunctionEv":5.2}]'],
  ["sample.surface.facetTiltDeg=25"],
  ['sample.bandBending={"surfaceShiftEv":0.5,"widthNm":3}'],
  ["sample.material=Si", "sample.transportMeanFreePathNm=3", "simulation.energyStepEv=0.1"],
  [
    "sample.surface.workFunctionSpreadEv=0.1",
    "sample.surface.facetTiltDeg=10",
    'sample.layers=[{"material":"Cu","thicknessNm":0.5}]',
    "sample.barrier=quantum",
    "simulation.energyStepEv=0.1",
  ],
];

for (const overrides of SURFACES) {
  Deno.test(`forced and analogue tallies agree with ${overrides.join(" ")}`, () => {
    const resolved = { ...gold(...overrides), acceptanceHalfAngleDeg: 40 };
    const engine = pairEngineData(resolved);
    const tally = runSeries(engine, 31, 128);
    const { vacuumBin, count } = engine.stack.grid;
    const step = Math.ceil((count - vacuumBin) / 6);
    for (let from = vacuumBin; from < count; from += step) {
      const direct = sumOf(engine.direct, from, Math.min(count, from + step));
      const { mean, standardError } = tallyMean(
        tally,
        (group) =>
          sumOf(group.forced, from, Math.min(count, from + step)) -
          sumOf(group.analogue, from, Math.min(count, from + step)),
      );
      if (direct * tally.histories < 50) continue; // too few electrons for Gaussian statistics
      // One false alarm in 30 000 for each window (Student's t of 63 degrees of freedom).
      assertMean(mean, standardError, -direct, `bins from ${from}`);
      assert.throws(() => assertMean(mean, standardError, -direct - 8 * standardError - 0.2 * direct));
    }
  });
}

Deno.test("a film of the substrate's own material changes nothing but the random numbers", () => {
  const total = (resolved: ResolvedScenario) => {
    const engine = pairEngineData(resolved);
    const { mean, standardError } = tallyMean(runSeries(engine, 32, 128), (group) => sumOf(group.forced));
    return { mean: mean + sumOf(engine.direct), standardError, direct: sumOf(engine.direct) };
  };
  const plain = total(gold());
  const filmed = total(gold('sample.layers=[{"material":"Au","thicknessNm":0.7}]'));
  assertClose(filmed.direct, plain.direct, { relative: 2e-3 }, "unscattered part");
  assertMean(
    filmed.mean - plain.mean,
    Math.hypot(filmed.standardError, plain.standardError),
    0,
    "all electrons",
  );
  const other = total(gold('sample.layers=[{"material":"Al","thicknessNm":0.7}]'));
  assert.ok(Math.abs(other.direct / plain.direct - 1) > 0.02, "another material does change it");
});

Deno.test("patches in a strong field give the area-weighted sum of their spectra", () => {
  const counts = (resolved: ResolvedScenario) => {
    const engine = pairEngineData(resolved);
    return expectedSpectrum(resolved, engine, runSeries(engine, 33, 96));
  };
  const mixed = counts(gold(
    'sample.surface.patches=[{"areaFraction":0.3,"workFunctionEv":4.8},{"areaFraction":0.7,"workFunctionEv":5.2}]',
  ));
  const [low, high] = [counts(gold("sample.workFunctionEv=4.8")), counts(gold("sample.workFunctionEv=5.2"))];
  let chiSquare = 0;
  let channels = 0;
  for (let c = 0; c < mixed.counts.length; c += 7) {
    const expected = 0.3 * low.counts[c] + 0.7 * high.counts[c];
    const error = Math.hypot(
      mixed.standardErrors[c],
      0.3 * low.standardErrors[c],
      0.7 * high.standardErrors[c],
    );
    if (expected < 100 || error === 0) continue;
    chiSquare += ((mixed.counts[c] - expected) / Math.hypot(error, 2e-3 * expected)) ** 2;
    channels++;
  }
  // Neighbors share histories, so a chi-square of twice the number of channels is still ordinary; a wrong share is not.
  assert.ok(channels > 100 && chiSquare < 2 * channels, `${chiSquare} in ${channels} channels`);
});

Deno.test("in a weak field electrons of low patches have to pass the area mean", () => {
  const resolved = gold(
    'sample.surface.patches=[{"areaFraction":0.5,"workFunctionEv":4.6},{"areaFraction":0.5,"workFunctionEv":5.2}]',
    "sample.surface.patchField=weak",
  );
  // C. Herring, M. Nichols, Rev. Mod. Phys. 21, 185 (1949).
  assert.deepEqual(resolved.surface.map((part) => part.workFunctionEv), [4.9, 5.2]);
});

Deno.test("dipoles and fields move the work function by Helmholtz's and Schottky's laws", () => {
  // 0.376730314 eV for 1 D on 1e18 per m^2; 0.0379468648 eV at 1e6 V/m (SI constants).
  const dipoles = gold("sample.surface.dipoleDensityPerNm2=1", "sample.surface.dipoleMomentDebye=-1");
  assertClose(dipoles.workFunctionEv, 5.1 - 0.376730314, { absolute: 1e-9 });
  const field = gold("sample.surface.extractionFieldVPerM=1e6");
  assertClose(field.workFunctionEv, 5.1 - 0.0379468648, { absolute: 1e-9 });
});

Deno.test("charging moves the whole spectrum and widens it", () => {
  const charged = gold("sample.charging.shiftEv=2", "sample.charging.fwhmEv=0.3");
  assertClose(charged.kineticEnergyShiftEv, gold().kineticEnergyShiftEv - 2, { absolute: 1e-12 });
  assertClose(charged.resolutionFwhmEv, Math.hypot(0.3, gold().resolutionFwhmEv), { absolute: 1e-12 });
});

Deno.test("a semiconductor has no electrons from its gap", () => {
  const resolved = gold(
    "sample.material=Si",
    "sample.valenceMaximumBelowFermiEv=0.8",
    "light.satellites=false",
    "sample.temperatureK=0",
  );
  const engine = pairEngineData(resolved);
  const electrons = [engine.direct, ...runSeries(engine, 34, 32).groups.map((group) => group.forced)];
  const top = Math.ceil((resolved.photonEnergyEv - 0.8) / engine.stack.grid.stepEv) + 1;
  for (const contents of electrons) assert.equal(sumOf(contents, top), 0);
  assert.ok(sumOf(engine.direct, top - 40, top) > 0);
});

// M. Chung, T. Everhart, J. Appl. Phys. 45, 707 (1974): E/(E + phi)^4 of free-electron cascades, maximum at phi/3. Lamp
// light makes a cascade of few generations on top of primary electrons, so only the order of the maximum is theirs.
Deno.test("the slow electrons of all directions have their maximum near a third of the work function", () => {
  const resolved = { ...gold("light.satellites=false"), acceptanceHalfAngleDeg: 90, biasV: -50 };
  const engine = pairEngineData(resolved);
  const tally = runSeries(engine, 35, 128);
  const sum = engine.direct.map((direct, k) =>
    direct + tally.groups.reduce((all, group) => all + group.forced[k], 0) / tally.histories
  );
  const slow = sum.subarray(engine.stack.grid.vacuumBin, engine.stack.grid.vacuumBin + 100);
  const peakEv = slow.indexOf(Math.max(...slow)) * engine.stack.grid.stepEv;
  // Found: 2.25 eV where their law has 1.7 eV; the difference is stated, not tuned away.
  assert.ok(peakEv > 1.7 / 2 && peakEv < 1.7 * 2, `${peakEv} eV`);
});
