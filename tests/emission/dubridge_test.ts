import assert from "node:assert/strict";
import {
  fowlerYieldEv2,
  normalEnergyDensityEv,
  planeRetardedYieldEv2,
  sphereRetardedYieldEv2,
  totalEnergyDensityEv,
} from "../../src/emission/mod.ts";
import { gaussLegendre } from "../../src/math/mod.ts";
import { assertClose } from "../support/assert_close.ts";

/** Integral from a to b in panels of 0.05 eV: kT is 0.026 eV and more. */
function integral(f: (x: number) => number, a: number, b: number): number {
  const { nodes, weights } = gaussLegendre(12);
  const panels = Math.ceil((b - a) / 0.05);
  const half = (b - a) / panels / 2;
  let sum = 0;
  for (let panel = 0; panel < panels; panel++) {
    nodes.forEach((node, i) => sum += half * weights[i] * f(a + half * (2 * panel + 1 + node)));
  }
  return sum;
}

Deno.test("totalEnergyDensityEv() has its maximum where the Lambert function puts it", () => {
  // kT [1 + W0(e^(mu - 1))], computed outside the project with mpmath.
  const maxima = [
    [0.2, 300, 0.157850778],
    [0.5, 300, 0.428987533],
    [1, 300, 0.908722017],
    [2, 300, 1.889408912],
    [1, 1000, 0.815906360],
  ];
  for (const [maximumEv, temperatureK, expected] of maxima) {
    // Bisection on the sign of the central difference.
    let low = 0.01;
    let high = maximumEv;
    while (high - low > 1e-9) {
      const middle = (low + high) / 2;
      const slope = totalEnergyDensityEv(middle + 1e-5, maximumEv, temperatureK) -
        totalEnergyDensityEv(middle - 1e-5, maximumEv, temperatureK);
      if (slope > 0) low = middle;
      else high = middle;
    }
    assertClose(low, expected, { absolute: 1e-7 }, `E_m ${maximumEv} eV, ${temperatureK} K`);
  }
});

Deno.test("both energy distributions integrate to Fowler's yield", () => {
  // Exact identity.
  for (const [maximumEv, temperatureK] of [[0.5, 300], [1, 1000], [-0.1, 300]]) {
    const yieldEv2 = fowlerYieldEv2(5 + maximumEv, 5, temperatureK);
    const normal = integral((e) => normalEnergyDensityEv(e, maximumEv, temperatureK), 0, 6);
    const total = integral((e) => totalEnergyDensityEv(e, maximumEv, temperatureK), 0, 6);
    assertClose(normal, yieldEv2, { relative: 1e-9 }, `normal, ${maximumEv} eV`);
    assertClose(total, yieldEv2, { relative: 1e-9 }, `total, ${maximumEv} eV`);
  }
});

Deno.test("retarded yields are the integrals of their distributions above the retarding energy", () => {
  for (const [retardingEv, maximumEv, temperatureK] of [[0.3, 0.5, 300], [0.9, 0.5, 1000], [0, 1, 300]]) {
    const label = `${retardingEv}, ${maximumEv} eV, ${temperatureK} K`;
    const above = (density: typeof normalEnergyDensityEv) =>
      integral((e) => density(e, maximumEv, temperatureK), retardingEv, 7);
    const plane = planeRetardedYieldEv2(retardingEv, maximumEv, temperatureK);
    const sphere = sphereRetardedYieldEv2(retardingEv, maximumEv, temperatureK);
    assertClose(plane, above(normalEnergyDensityEv), { relative: 1e-9 }, `plane ${label}`);
    assertClose(sphere, above(totalEnergyDensityEv), { relative: 1e-9 }, `sphere ${label}`);
  }
});

Deno.test("retarded yields saturate without retarding and have closed forms at 0 K", () => {
  assert.equal(planeRetardedYieldEv2(-2, 1, 300), planeRetardedYieldEv2(0, 1, 300));
  assert.equal(sphereRetardedYieldEv2(-2, 1, 300), sphereRetardedYieldEv2(0, 1, 300));
  // A triangle cut at R: plane (E_m - R)^2/2, sphere (E_m^2 - R^2)/2.
  assertClose(planeRetardedYieldEv2(0.4, 1, 0), 0.18, { relative: 1e-14 });
  assertClose(sphereRetardedYieldEv2(0.4, 1, 0), 0.42, { relative: 1e-14 });
  assert.equal(totalEnergyDensityEv(1.01, 1, 0), 0);
  assert.equal(totalEnergyDensityEv(0.5, 1, 0), 0.5);
  assert.equal(normalEnergyDensityEv(-0.1, 1, 300), 0);
});
