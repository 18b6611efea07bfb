import assert from "node:assert/strict";
import { fowlerFunction, fowlerYieldEv2 } from "../../src/emission/mod.ts";
import { gaussLegendre } from "../../src/math/mod.ts";
import { assertClose } from "../support/assert_close.ts";

/** f(mu) as a polylogarithm in 40-digit arithmetic (computed outside the project with mpmath), 13 digits. */
const FOWLER: readonly (readonly [number, number])[] = [
  [-8, 3.354344983026e-4],
  [-6, 2.477217813442e-3],
  [-5, 6.726630877522e-3],
  [-4, 1.823244896998e-2],
  [-3, 4.918072033882e-2],
  [-2, 0.1310124847144],
  [-1.5, 0.2117819796254],
  [-1, 0.3386479964035],
  [-0.5, 0.5332172799949],
  [0, 0.8224670334241],
  [0.5, 1.236716786853],
  [1, 1.806286070445],
  [1.5, 2.558152087223],
  [2, 3.513921582134],
  [3, 6.095753346509],
  [4, 9.626701617878],
  [5, 14.13820743597],
  [6, 19.64245684903],
  [8, 33.64459863235],
  [10, 51.64488866743],
  [12, 73.64492792265],
  [15, 114.1449337609],
  [20, 201.6449340648],
];

Deno.test("fowlerFunction() agrees with the polylogarithm to the digits of the table", () => {
  for (const [mu, expected] of FOWLER) {
    assertClose(fowlerFunction(mu), expected, { relative: 1e-12 }, `f(${mu})`);
  }
});

Deno.test("fowlerFunction() is the integral that defines it", () => {
  // Integral of ln(1 + e^(mu - y)) by a quadrature that shares nothing with the series.
  const { nodes, weights } = gaussLegendre(200);
  for (const mu of [-30, -3.3, -0.7, 0.01, 2.6, 9.4]) {
    const end = Math.max(mu, 0) + 40;
    let integral = 0;
    nodes.forEach((node, i) => {
      const y = 0.5 * end * (1 + node);
      integral += 0.5 * end * weights[i] * Math.log1p(Math.exp(mu - y));
    });
    assertClose(fowlerFunction(mu), integral, { relative: 1e-11 }, `f(${mu})`);
  }
});

Deno.test("fowlerFunction() keeps its limits and its symmetry", () => {
  assert.equal(fowlerFunction(-Infinity), 0);
  assertClose(fowlerFunction(-40), Math.exp(-40), { relative: 1e-14 }, "far below: e^mu");
  assertClose(fowlerFunction(1e4), 0.5e8 + Math.PI ** 2 / 6, { relative: 1e-15 }, "far above: square law");
  for (const mu of [0.3, 1, 7]) {
    const sum = Math.PI ** 2 / 6 + mu * mu / 2;
    assertClose(fowlerFunction(mu) + fowlerFunction(-mu), sum, { relative: 1e-14 }, `f(${mu}) + f(-${mu})`);
  }
  assert.ok(Number.isNaN(fowlerFunction(NaN)));
});

Deno.test("fowlerYieldEv2() tends to the square law when the temperature goes to zero", () => {
  assert.equal(fowlerYieldEv2(5, 4.5, 0), 0.125);
  assert.equal(fowlerYieldEv2(4, 4.5, 0), 0);
  assertClose(fowlerYieldEv2(5, 4.5, 1), 0.125, { absolute: 2e-8 }, "1 K: (pi kT)^2/6 above");
  assert.throws(() => fowlerYieldEv2(5, 4.5, -1), {
    name: "RangeError",
    message: "Cannot compute emission as temperatureK must be >= 0 K: current value is -1",
  });
});
