import assert from "node:assert/strict";
import { cellCurve, collectingAll, noisyCurrents, pairEngineData } from "../../src/model/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { flatMetal, type FlatMetalChanges } from "../support/flat_metal.ts";

function curve(changes: FlatMetalChanges, voltagesV: readonly number[], cell: {
  collectorWorkFunctionEv?: number;
  backShare?: number;
  darkCurrentA?: number;
} = {}) {
  const metal = collectingAll(flatMetal({ energyStepEv: 0.05, ...changes }));
  const engine = pairEngineData(metal);
  return cellCurve(metal, engine, runSeries(engine, 3, 64), {
    collectorWorkFunctionEv: 4.2,
    voltagesV,
    backShare: 0,
    darkCurrentA: 0,
    ...cell,
  });
}

// e V_stop = h nu - W_collector when both are wired together (R. Millikan, Phys. Rev. 7, 355 (1916); contact potential).
Deno.test("cellCurve() stops at h nu - W of the collector, whatever the emitter's work function", () => {
  for (const workFunctionEv of [4.0, 4.5, 5]) {
    const { currentsA, stoppingV } = curve({ workFunctionEv, photonEnergyEv: 7 }, [2.7, 2.8, 2.801]);
    assertClose(stoppingV, 2.8, { absolute: 1e-12 });
    assert.ok(currentsA[0] > 0, "below it some arrive");
    // The bins of 0.05 eV blur the end by one bin.
    assert.ok(currentsA[0] > 3 * currentsA[1], "at it hardly any");
    const higher = curve({ workFunctionEv, photonEnergyEv: 7 }, [2.9], { collectorWorkFunctionEv: 4.2 });
    assert.equal(higher.currentsA[0], 0);
  }
});

Deno.test("cellCurve() saturates at e times the yield, whose threshold is the emitter's", () => {
  const { currentsA, saturatedA, yieldPerPhoton } = curve({ photonEnergyEv: 7 }, [-5, 0]);
  assertClose(currentsA[0], saturatedA, { relative: 1e-12 });
  // e in C is exact (SI 2019); the metal absorbs 1e6 photons a second.
  assertClose(saturatedA, 1.602176634e-19 * 1e6 * yieldPerPhoton, { relative: 1e-12 });
  assert.equal(curve({ photonEnergyEv: 4.4 }, [0]).saturatedA, 0, "below threshold");
  assert.ok(curve({ photonEnergyEv: 4.7 }, [0]).saturatedA > 0, "above threshold");
});

Deno.test("cellCurve() adds the dark current and takes off the collector's own electrons", () => {
  const plain = curve({ photonEnergyEv: 7 }, [-5, 3.5]);
  const dirty = curve({ photonEnergyEv: 7 }, [-5, 3.5], { backShare: 0.1, darkCurrentA: 1e-15 });
  // Far into retardation every electron of the collector reaches the sample.
  assertClose(dirty.currentsA[1], -0.1 * plain.saturatedA + 1e-15, { relative: 1e-9 }, "retarding");
  // Accelerating forward holds the collector's electrons back.
  assertClose(dirty.currentsA[0], plain.currentsA[0] + 1e-15, { relative: 1e-9 }, "accelerating");
});

Deno.test("noisyCurrents() scatters by the noise asked for", () => {
  const zeros = new Array<number>(10_000).fill(0);
  const noisy = noisyCurrents(zeros, 2, 5, 0);
  const variance = noisy.reduce((sum, value) => sum + value * value, 0) / noisy.length;
  // Standard deviation of a variance estimate: 4 sqrt(2/10000) = 0.057; 4.5 of them, one false alarm in 150 000.
  assertClose(variance, 4, { absolute: 0.26 });
  assert.throws(() => assertClose(variance, 4.6, { absolute: 0.26 }));
  assert.notDeepEqual(noisyCurrents(zeros, 2, 5, 1), noisy);
});
