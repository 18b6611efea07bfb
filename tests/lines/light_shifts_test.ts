import assert from "node:assert/strict";
import { anodeLight, bandLight } from "../../src/light/mod.ts";
import { lightShifts } from "../../src/lines/mod.ts";
import { assertClose } from "../support/assert_close.ts";

Deno.test("lightShifts() refers to the peak of the unresolved main line", () => {
  // Peaks of the summed components, computed outside the project: Mg 1253.646, Al 1486.700 eV.
  for (const [name, peakEv] of [["Mg", 1253.646], ["Al", 1486.700]] as const) {
    const [first] = lightShifts(anodeLight(name, true));
    assertClose(anodeLight(name, true)[0].energyEv - first.shiftEv, peakEv, { absolute: 6e-4 }, name);
  }
});

Deno.test("lightShifts() has the satellites at the tabulated shifts with the tabulated areas", () => {
  // Shift from the peak, eV, and percent of the area of K alpha 1,2, from the same components (sums computed outside).
  const table = {
    Mg: [[4.81, 1.17], [8.24, 8.26], [10.11, 4.91], [17.39, 0.73], [20.54, 0.42]],
    Al: [[5.60, 0.73], [9.53, 6.79], [11.70, 3.49], [20.02, 0.42], [23.51, 0.31]],
  };
  for (const [name, rows] of Object.entries(table)) {
    const shifts = lightShifts(anodeLight(name, true));
    const main = shifts.filter(({ shiftEv }) => shiftEv < 1).reduce((sum, { weight }) => sum + weight, 0);
    for (const [shiftEv, percent] of rows) {
      // K alpha 3 and its neighbor 0.3 to 0.4 eV above it, and the small one of Mg beside K alpha 5, count together.
      const near = shifts.filter((line) => line.shiftEv > shiftEv - 0.1 && line.shiftEv < shiftEv + 0.5);
      assertClose(near[0].shiftEv, shiftEv, { absolute: 0.006 }, `${name} ${shiftEv} eV`);
      const area = 100 * near.reduce((sum, { weight }) => sum + weight, 0) / main;
      assertClose(area, percent, { absolute: 0.006 }, `${name} ${shiftEv} eV`);
    }
  }
});

Deno.test("lightShifts() leaves a single line alone", () => {
  assert.deepEqual(lightShifts(bandLight(1486.7, 0.3)), [{ shiftEv: 0, weight: 1, lorentzFwhmEv: 0 }]);
});
