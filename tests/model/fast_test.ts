import assert from "node:assert/strict";
import { engineData, expectedSpectrum } from "../../src/model/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { assertClose } from "../support/assert_close.ts";

const TEXT = await Deno.readTextFile(
  new URL("../../scenarios/gold_under_aluminum_al_kalpha.json", import.meta.url),
);

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
