import assert from "node:assert/strict";
import { fileURLToPath } from "node:url";
import { loadScenario } from "../../src/cli/simulate.ts";
import { pairEngineData } from "../../src/model/mod.ts";
import type { PairEngineData } from "../../src/transport/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import type { ResolvedScenario } from "../../src/scenario/mod.ts";
import type { Tally } from "../../src/transport/mod.ts";
import { assertMean } from "../support/assert_mean.ts";
import { flatMetal, type FlatMetalChanges } from "../support/flat_metal.ts";
import { sumOf, tallyMean } from "../support/tally_mean.ts";

const FOLDER = new URL("../../scenarios/", import.meta.url);
const NAMES = [...Deno.readDirSync(FOLDER)].map((entry) => entry.name)
  .filter((name) => name.endsWith(".json") && !name.endsWith(".schema.json"))
  // X-ray scenarios have a kernel and a test of their own (fast_test.ts).
  .filter((name) => !/"(anode|monochromatedAluminum)"/.test(Deno.readTextFileSync(new URL(name, FOLDER))))
  .toSorted();

/** Bins first..end - 1 of one window of energies. */
type Window = readonly [first: number, end: number];

/** Neighboring bins in which at least so many electrons are expected. */
function windowsOf(expected: Float64Array, least: number): Window[] {
  const windows: Window[] = [];
  let first = 0;
  let sum = 0;
  expected.forEach((value, bin) => {
    sum += value;
    if (sum < least) return;
    windows.push([first, bin + 1]);
    first = bin + 1;
    sum = 0;
  });
  assert.ok(windows.length > 0, `fewer than ${least} electrons are expected: run more histories`);
  // The rest joins the last window, so that no energy is left out.
  return windows.with(-1, [windows[windows.length - 1][0], expected.length]);
}

/** Electrons in all histories that the forced tally expects, by bin. */
function forcedElectrons(engine: PairEngineData, tally: Tally): Float64Array {
  return engine.direct.map((direct, bin) =>
    direct * tally.histories + tally.groups.reduce((sum, group) => sum + group.forced[bin], 0)
  );
}

/**
 * Checks window by window that the mean difference of the tallies is zero within 4.5 of its standard errors, from the
 * scatter between 64 groups: one false alarm in 30 000 for each window (Student's t of 63 degrees of freedom), one in a
 * hundred for the 400 windows of this file together. Seeds are fixed, so it can come up only when the histories change.
 */
function assertSame(
  engine: PairEngineData,
  forced: Tally,
  analogue: Tally,
  windows: readonly Window[],
): void {
  for (const [first, end] of windows) {
    const direct = sumOf(engine.direct, first, end);
    let index = 0;
    const { mean, standardError } = tallyMean(forced, (group) => {
      const counted = sumOf(analogue.groups[index++].analogue, first, end);
      return direct * group.histories + sumOf(group.forced, first, end) - counted;
    });
    assertMean(mean, standardError, 0, `forced - analogue in bins ${first}..${end - 1}`);
  }
}

/** The scenario with a work function that is higher by whole bins, so that the grid of energies is the same. */
function shifted(resolved: ResolvedScenario, bins: number, stepEv: number): ResolvedScenario {
  return {
    ...resolved,
    surface: resolved.surface.map((part) => ({
      ...part,
      workFunctionEv: part.workFunctionEv + bins * stepEv,
    })),
    energyStepEv: stepEv * (1 + 1e-6),
  };
}

Deno.test.each(NAMES.map((name) => ({ name })))(
  "forced and analogue tallies of scenarios/$name agree",
  async ({ name }) => {
    const { resolved } = await loadScenario(fileURLToPath(new URL(name, FOLDER)), []);
    const asShipped = pairEngineData(resolved);
    const { stepEv } = asShipped.stack.grid;
    const tally = runSeries(asShipped, 21, 320);
    const expected = forcedElectrons(asShipped, tally);
    const windows = windowsOf(expected, 80);
    assertSame(asShipped, tally, tally, windows);

    // No electron above h nu - W, whatever it went through, but for the thermal tail.
    const highestEv = Math.max(
      ...resolved.lines.flatMap(({ photons }) => photons.map((photon) => photon.energyEv)),
    );
    const limit = Math.ceil((highestEv + 10 * resolved.thermalEnergyEv) / stepEv);
    assert.ok(sumOf(expected, limit) < 1e-4 * sumOf(expected), "10 kT above the limit");
    assert.equal(tally.groups.reduce((sum, group) => sum + sumOf(group.analogue, limit), 0), 0);

    // A cone twice as wide lets in about four times as many electrons: the same check must see it.
    const acceptanceHalfAngleDeg = 2 * resolved.acceptanceHalfAngleDeg;
    const wider = runSeries(pairEngineData({ ...resolved, acceptanceHalfAngleDeg }), 22, 64);
    const first64 = runSeries(asShipped, 21, 64);
    assert.throws(
      () => assertSame(asShipped, first64, wider, [[0, expected.length]]),
      /forced - analogue/,
      "a cone twice as wide",
    );
  },
);

Deno.test.each(NAMES.map((name) => ({ name })))(
  "forced and analogue tallies of scenarios/$name agree over all directions",
  async ({ name }) => {
    const shipped = (await loadScenario(fileURLToPath(new URL(name, FOLDER)), [])).resolved;
    const resolved = { ...shipped, acceptanceHalfAngleDeg: 90, emissionAngleDeg: 0 };
    const engine = pairEngineData(resolved);
    const { stepEv } = engine.stack.grid;
    const tally = runSeries(engine, 23, 128);
    const windows = windowsOf(forcedElectrons(engine, tally), 300);
    assert.ok(windows.length >= 5, `only ${windows.length} windows`);
    assertSame(engine, tally, tally, windows);
    const wrong = pairEngineData(shifted(resolved, Math.round(0.25 / stepEv), stepEv));
    assert.equal(wrong.stack.grid.count, engine.stack.grid.count);
    assert.throws(
      () => assertSame(engine, tally, runSeries(wrong, 24, 128), windows),
      /forced - analogue/,
      "a work function 0.25 eV higher",
    );
  },
);

// What no shipped scenario has: each changes how directions, energies or depths decide who is recorded.
const UNUSUAL: readonly (FlatMetalChanges & { readonly title: string })[] = [
  { title: "off normal", emissionAngleDeg: 45, acceptanceHalfAngleDeg: 25 },
  { title: "a field that holds electrons back", biasV: 1, acceptanceHalfAngleDeg: 50 },
  { title: "elastic events and a quantum step", transportMeanFreePathNm: 0.5, barrier: "quantum" },
  { title: "2000 K", temperatureK: 2000 },
  { title: "a low barrier", workFunctionEv: 1.3, bandBottomBelowFermiEv: 2, biasV: -5 },
];

Deno.test.each(UNUSUAL)("forced and analogue tallies agree for $title", (changes) => {
  const metal = flatMetal({ photonEnergyEv: 15, energyStepEv: 0.05, ...changes });
  const engine = pairEngineData(metal);
  const tally = runSeries(engine, 25, 256);
  const windows = windowsOf(forcedElectrons(engine, tally), 200);
  assertSame(engine, tally, tally, windows);
  const wrong = pairEngineData({
    ...metal,
    layers: metal.layers.map((layer) => ({
      ...layer,
      meanFreePath: { kind: "table", energiesEv: [0, 200], values: [1.5, 1.5] },
    })),
  });
  assert.throws(
    () => assertSame(engine, tally, runSeries(wrong, 26, 256), [[0, engine.direct.length]]),
    /forced - analogue/,
    "a mean free path half as long again",
  );
});
