import assert from "node:assert/strict";
import { nearestLine } from "../../src/data/mod.ts";
import { measureWorkFunction, type WorkFunctionResult } from "../../src/edges/mod.ts";
import { countSpectrum, engineData, type ExpectedSpectrum, expectedSpectrum } from "../../src/model/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { parseScenario, type ResolvedScenario, resolveScenario } from "../../src/scenario/mod.ts";

const BATCHES = 500;

interface Simulated {
  readonly resolved: ResolvedScenario;
  readonly spectrum: ExpectedSpectrum;
}

async function simulated(...overrides: string[]): Promise<Simulated> {
  const file = new URL("../../scenarios/clean_gold_he1.json", import.meta.url);
  const scenario = parseScenario(await Deno.readTextFile(file), "clean_gold_he1.json", overrides);
  const resolved = resolveScenario(scenario);
  const engine = engineData(resolved);
  return { resolved, spectrum: expectedSpectrum(resolved, engine, runSeries(engine, 1, BATCHES)) };
}

function measured({ resolved, spectrum }: Simulated, counts: Float64Array): WorkFunctionResult {
  return measureWorkFunction([{
    label: "",
    file: "",
    energyKind: "kinetic",
    energiesEv: spectrum.kineticEnergiesEv,
    counts,
    photonEnergyEv: resolved.photonEnergyEv,
    biasV: resolved.biasV,
    asRecorded: true,
    analyzerWorkFunctionEv: resolved.analyzerWorkFunctionEv,
    acceptanceHalfAngleDeg: resolved.acceptanceHalfAngleDeg,
    temperatureK: resolved.temperatureK,
  }], { knownLine: nearestLine });
}

const REPLICATES = 50;

/**
 * Mean pull within 3.5 standard errors and chi-square of the pulls below its 99.9 % point at 50 degrees of freedom,
 * 86.7 (chi-square table, from memory): false alarm below 0.2 % together. A spread too small is no alarm, as the
 * uncertainty holds more than counting.
 */
function pullsAgree(pulls: readonly number[]): boolean {
  const mean = pulls.reduce((sum, pull) => sum + pull, 0) / pulls.length;
  const square = pulls.reduce((sum, pull) => sum + pull * pull, 0);
  return Math.abs(mean) < 3.5 / Math.sqrt(pulls.length) && square < 86.7;
}

Deno.test("measureWorkFunction() gives back the work function put in over 50 replicates of the noise", async () => {
  const gold = await simulated();
  const truth = gold.resolved.workFunctionEv;
  const values: { value: number; standardUncertainty: number }[] = [];
  for (let replicate = 0; replicate < REPLICATES; replicate++) {
    const { workFunctionEv, verdict } = measured(gold, countSpectrum(gold.spectrum, 1000 + replicate));
    assert.notEqual(verdict, "failed");
    values.push(workFunctionEv!);
  }
  const pulls = (workFunctionEv: number): number[] =>
    values.map((w) => (w.value - workFunctionEv) / w.standardUncertainty);
  assert.ok(pullsAgree(pulls(truth)));
  // Twins that must fail: a work function 4 meV off, and uncertainties half as large.
  assert.ok(!pullsAgree(pulls(truth + 0.004)));
  assert.ok(!pullsAgree(pulls(truth).map((pull) => 3 * pull)));
  // Nor are the uncertainties idle: the scatter is at least a third of them.
  const mean = values.reduce((sum, w) => sum + w.value, 0) / REPLICATES;
  const scatter = Math.sqrt(values.reduce((sum, w) => sum + (w.value - mean) ** 2, 0) / (REPLICATES - 1));
  const typical = values.map((w) => w.standardUncertainty).sort((a, b) => a - b)[REPLICATES / 2];
  assert.ok(scatter > typical / 3, `${scatter} against ${typical}`);
});

/** Exact expectation: no counting noise, so a deviation is that of the model. */
const onExpectation = async (...overrides: string[]) => {
  const run = await simulated(...overrides);
  const result = measured(run, run.spectrum.counts);
  const { value, standardUncertainty } = result.workFunctionEv ?? { value: NaN, standardUncertainty: NaN };
  return { result, errorEv: value - run.resolved.workFunctionEv, standardUncertainty };
};

for (
  const overrides of [
    ["sample.temperatureK=77"],
    ["sample.temperatureK=0"],
    ["biasV=-3", "acquisition.startEv=2.8", "acquisition.endEv=23"],
    ["sample.material=Ag", "acquisition.startEv=8"],
    ["sample.material=Cu"],
    ["sample.material=Al", "acquisition.startEv=8"],
    ["sample.material=W"], // steep, curved states at the Fermi edge
    ['light.lamp="Ne I"', "acquisition.endEv=24"], // a second line 0.18 eV below
    ["sample.transportMeanFreePathNm=5", "light.photonFluxPerS=2e9"],
    ["sample.workFunctionEv=4.7"],
    ["analyzer.workFunctionEv=4.1"],
  ]
) {
  Deno.test(`measureWorkFunction() finds the work function with ${overrides.join(" ")}`, async () => {
    const { result, errorEv, standardUncertainty } = await onExpectation(...overrides);
    assert.equal(result.verdict, "good", result.reasons.join());
    assert.ok(Math.abs(errorEv) < standardUncertainty, `${errorEv} eV off, u = ${standardUncertainty} eV`);
    assert.ok(standardUncertainty < 0.008);
  });
}

for (
  const [overrides, reason] of [
    [["sample.barrier=quantum"], /the counts rise by/],
    [["analyzer.acceptanceHalfAngleDeg=10"], /does not describe the secondary cutoff/],
    [["acquisition.endEv=24"], /a Fermi edge could not be seen/],
  ] as const
) {
  Deno.test(`measureWorkFunction() doubts what its model does not cover: ${overrides.join(" ")}`, async () => {
    const { result, errorEv, standardUncertainty } = await onExpectation(...overrides);
    assert.equal(result.verdict, "doubtful");
    assert.match(result.reasons.join("\n"), reason);
    assert.ok(
      Math.abs(errorEv) < 2 * standardUncertainty,
      `${errorEv} eV off, u = ${standardUncertainty} eV`,
    );
  });
}

for (
  const [overrides, reason] of [
    [["acquisition.startEv=9.65"], /starts on the cutoff/],
    [["acquisition.startEv=12"], /secondary cutoff/],
    [["acquisition.endEv=25.9"], /edge/],
    [["light.photonFluxPerS=1e3"], /found/],
  ] as const
) {
  Deno.test(`measureWorkFunction() gives no number with ${overrides.join(" ")}`, async () => {
    const run = await simulated(...overrides);
    const result = measured(run, countSpectrum(run.spectrum, 1));
    assert.equal(result.verdict, "failed");
    assert.equal(result.workFunctionEv, null);
    assert.equal(result.ionizationEnergyEv, null);
    assert.match(result.reasons.join("\n"), reason);
  });
}

Deno.test("measureWorkFunction() gives the lower work function of two patches, and doubts it", async () => {
  const patches = JSON.stringify([
    { areaFraction: 0.25, workFunctionEv: 4.7 },
    { areaFraction: 0.75, workFunctionEv: 5.2 },
  ]);
  const run = await simulated(`sample.surface.patches=${patches}`, "acquisition.startEv=8.4");
  for (let replicate = 0; replicate < 5; replicate++) {
    const { verdict, reasons, workFunctionEv } = measured(run, countSpectrum(run.spectrum, 70 + replicate));
    assert.equal(verdict, "doubtful");
    assert.match(reasons.join("\n"), /one step does not describe the secondary cutoff/);
    // 4.7 eV was put in; five standard uncertainties, false alarm below one in a million.
    assert.ok(Math.abs(workFunctionEv!.value - 4.7) < 5 * workFunctionEv!.standardUncertainty);
    assert.ok(workFunctionEv!.standardUncertainty < 0.03);
  }
});
