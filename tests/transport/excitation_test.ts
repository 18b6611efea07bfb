import assert from "node:assert/strict";
import { energyGrid, excitationWeights, fermiOccupation } from "../../src/transport/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { sumOf } from "../support/tally_mean.ts";

const KT_300_K = 0.02585199979; // eV, CODATA

Deno.test("fermiOccupation() is 1/2 at the Fermi level and falls from 90 to 10 % over 2 ln 9 kT", () => {
  // Closed form of the Fermi-Dirac function.
  for (const thermalEnergyEv of [1e-4, KT_300_K, 0.2]) {
    assert.equal(fermiOccupation(0, thermalEnergyEv), 0.5);
    assertClose(fermiOccupation(-Math.log(9) * thermalEnergyEv, thermalEnergyEv), 0.9, { relative: 1e-12 });
    assertClose(fermiOccupation(Math.log(9) * thermalEnergyEv, thermalEnergyEv), 0.1, { relative: 1e-12 });
  }
  assert.deepEqual([-1e-9, 0, 1e-9].map((energyEv) => fermiOccupation(energyEv, 0)), [1, 0.5, 0]);
  assert.deepEqual([-50, 50].map((energyEv) => fermiOccupation(energyEv, 0.01)), [1, 0], "no overflow");
});

Deno.test("excitationWeights() of constant states at T = 0 are a box from the Fermi level to the photon energy", () => {
  // Berglund & Spicer 1964 with constant D: every final energy 0 < E < h nu is as likely.
  const grid = energyGrid(0.02, { photonEnergyEv: 8.005, workFunctionEv: 4, thermalEnergyEv: 0 });
  const weights = excitationWeights(grid, 8.005, () => 1, 0);
  for (let k = 0; k < 400; k++) assert.equal(weights[k], 1, `bin ${k}`);
  assert.equal(weights[400], 0.25, "the photon energy ends a quarter into its bin");
  assert.equal(sumOf(weights, 401), 0);
});

Deno.test("excitationWeights() of free-electron states are sqrt(E_i + bottom) sqrt(E_f + bottom)", () => {
  // Product of the textbook densities of states before and after.
  const grid = energyGrid(0.02, { photonEnergyEv: 12, workFunctionEv: 4, thermalEnergyEv: 0 });
  const weights = excitationWeights(grid, 12, (energyEv) => Math.sqrt(Math.max(0, energyEv + 9)), 0);
  assert.equal(sumOf(weights, 0, 150), 0, "nothing starts below the band bottom, 3 eV - 12 eV = -9 eV");
  for (const k of [200, 350, 599]) {
    const finalEv = (k + 0.5) * 0.02;
    assertClose(weights[k], Math.sqrt((finalEv - 3) * (finalEv + 9)), { relative: 1e-4 }, `${finalEv} eV`);
  }
});

Deno.test("excitationWeights() of constant states follow the Fermi-Dirac function about the photon energy", () => {
  const grid = energyGrid(0.02, { photonEnergyEv: 8, workFunctionEv: 4, thermalEnergyEv: KT_300_K });
  const weights = excitationWeights(grid, 8, () => 1, KT_300_K);
  // Mean of 1/(1 + e^x) over a bin, from its integral x - ln(1 + e^x).
  const integral = (x: number): number => x - Math.log1p(Math.exp(x));
  for (let k = 380; k < 420; k++) {
    const [low, high] = [k, k + 1].map((edge) => (edge * 0.02 - 8) / KT_300_K);
    assertClose(weights[k], (integral(high) - integral(low)) / (high - low), { relative: 1e-3 }, `bin ${k}`);
  }
  // The integral of f about h nu is that of a step; final states from the Fermi level up lose the integral of f, kT ln 2.
  assertClose(sumOf(weights) * 0.02, 8 - KT_300_K * Math.LN2, { relative: 1e-6 }, "sum");
});
