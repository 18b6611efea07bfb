import assert from "node:assert/strict";
import { energyGrid } from "../../src/transport/mod.ts";
import { assertClose } from "../support/assert_close.ts";

Deno.test("energyGrid() makes the vacuum level a bin edge with bins no wider than asked", () => {
  for (const workFunctionEv of [0.5, 1.234, 4.55, 5.1, 5.1099, 9.999]) {
    for (const widestStepEv of [0.002, 0.02, 0.1]) {
      const grid = energyGrid(widestStepEv, { photonEnergyEv: 21.2, workFunctionEv, thermalEnergyEv: 0.025 });
      assertClose(grid.vacuumBin * grid.stepEv, workFunctionEv, { relative: 1e-15 }, "vacuum level");
      assert.ok(grid.stepEv <= widestStepEv * (1 + 1e-9), `${grid.stepEv} eV`);
      assert.ok(grid.stepEv > widestStepEv * (1 - widestStepEv / workFunctionEv), `${grid.stepEv} eV`);
    }
  }
});

Deno.test("energyGrid() holds the photon energy and sixteen kT more", () => {
  for (const thermalEnergyEv of [0, 0.025, 0.2]) {
    const grid = energyGrid(0.02, { photonEnergyEv: 21.218, workFunctionEv: 4.55, thermalEnergyEv });
    assert.ok(grid.count * grid.stepEv > 21.218 + 16 * thermalEnergyEv);
    assert.ok((grid.count - 3) * grid.stepEv < 21.218 + 16 * thermalEnergyEv);
  }
});
