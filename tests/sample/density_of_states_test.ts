import assert from "node:assert/strict";
import { type BandModel, densityOfStates } from "../../src/sample/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { integrate } from "../support/integrate.ts";

const FREE: BandModel = { bandBottomBelowFermiEv: 9, spElectrons: 1.5, lobes: [], gap: null };
const D_BAND = { centerBindingEv: 4, fwhmEv: 1.6, electrons: 6 };

Deno.test("densityOfStates() of free electrons is 3 n/(2 E_F) at the Fermi level and rises as a square root", () => {
  // Free-electron gas: N. Ashcroft, N. Mermin, Solid State Physics, eq. 2.65 (from memory).
  const states = densityOfStates(FREE);
  assertClose(states(0), (3 * 1.5) / (2 * 9), { relative: 1e-14 });
  assertClose(states(27), 2 * states(0), { relative: 1e-14 }, "four times the energy above the bottom");
  assert.equal(states(-9), 0);
  assert.equal(states(-9.001), 0);
});

Deno.test("densityOfStates() holds the given electrons below the Fermi level", () => {
  // Substituting E = -9 + u^2 leaves 2 u D, smooth at the band bottom.
  const states = densityOfStates(FREE);
  const held = integrate((u) => 2 * u * states(-9 + u * u), [0, 3]);
  assertClose(held, 1.5, { relative: 1e-9 });
});

Deno.test("densityOfStates() adds Gaussian lobes of the given size, place and width", () => {
  const free = densityOfStates({ ...FREE, bandBottomBelowFermiEv: 20 });
  const both = densityOfStates({ ...FREE, bandBottomBelowFermiEv: 20, lobes: [D_BAND] });
  const lobe = (energyEv: number): number => both(energyEv) - free(energyEv);
  assertClose(integrate(lobe, [-14, 6]), 6, { relative: 1e-9 }, "electrons");
  assertClose(lobe(-4.8), 0.5 * lobe(-4), { relative: 1e-12 }, "half height below");
  assertClose(lobe(-3.2), 0.5 * lobe(-4), { relative: 1e-12 }, "half height above");
});

Deno.test("densityOfStates() cuts lobes at the band bottom and keeps empty ones above the Fermi level", () => {
  const states = densityOfStates({
    ...FREE,
    lobes: [{ ...D_BAND, centerBindingEv: 8.9 }, { ...D_BAND, centerBindingEv: -2 }],
  });
  assert.equal(states(-9.1), 0);
  assert.ok(states(-8.9) > 3 && states(2) > 3);
});
