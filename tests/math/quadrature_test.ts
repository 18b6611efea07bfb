import assert from "node:assert/strict";
import { gaussLegendre } from "../../src/math/mod.ts";
import { assertClose } from "../support/assert_close.ts";

function apply(count: number, f: (x: number) => number): number {
  const { nodes, weights } = gaussLegendre(count);
  return nodes.reduce((sum, node, i) => sum + weights[i] * f(node), 0);
}

// M. Abramowitz, I. Stegun (1964), Table 25.4: closed forms for two, three and four nodes.
Deno.test.each([
  [1, 0, 2],
  [2, Math.sqrt(1 / 3), 1],
  [3, Math.sqrt(3 / 5), 5 / 9],
  [4, Math.sqrt(3 / 7 + (2 / 7) * Math.sqrt(6 / 5)), (18 - Math.sqrt(30)) / 36],
])("gaussLegendre() of %s nodes ends at %s with weight %s", (count, node, weight) => {
  const { nodes, weights } = gaussLegendre(count);
  assertClose(nodes[count - 1], node, { absolute: 1e-15 }, "node");
  assertClose(weights[count - 1], weight, { absolute: 1e-14 }, "weight");
});

Deno.test("gaussLegendre() is exact for monomials to degree 2n - 1 and not for 2n", () => {
  for (const count of [1, 2, 3, 5, 8, 16, 24, 64]) {
    for (let degree = 0; degree < 2 * count; degree++) {
      // Integral of x^d over [-1, 1]: 2/(d + 1) for even d, 0 for odd.
      const exact = degree % 2 === 0 ? 2 / (degree + 1) : 0;
      assertClose(
        apply(count, (x) => x ** degree),
        exact,
        { absolute: 2e-14 },
        `n ${count}, degree ${degree}`,
      );
    }
    if (count > 8) continue;
    assert.throws(() =>
      assertClose(apply(count, (x) => x ** (2 * count)), 2 / (2 * count + 1), { absolute: 1e-9 })
    );
  }
});

Deno.test("gaussLegendre() gives ascending nodes inside -1..1, mirrored, with positive weights", () => {
  for (const count of [1, 2, 7, 50, 201]) {
    const { nodes, weights } = gaussLegendre(count);
    nodes.forEach((node, i) => {
      assert.ok(
        Math.abs(node) < 1 && weights[i] > 0 && (i === 0 || node > nodes[i - 1]),
        `n ${count}, node ${i}`,
      );
      assertClose(node, -nodes[count - 1 - i], { absolute: 1e-15 });
    });
  }
});
