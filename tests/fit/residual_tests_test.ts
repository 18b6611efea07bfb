import assert from "node:assert/strict";
import { chiSquareProbability, runsTest } from "../../src/fit/mod.ts";
import { assertClose } from "../support/assert_close.ts";

// Percentage points of chi-square: M. Abramowitz, I. Stegun (1964), Table 26.8 (values from memory, high confidence).
Deno.test.each([
  [0.95, 10, 3.94030],
  [0.05, 1, 3.84146],
  [0.05, 10, 18.3070],
  [0.01, 5, 15.0863],
  [0.5, 3, 2.36597],
  [0.001, 100, 149.449],
])("chiSquareProbability() gives %d for %d degrees of freedom at %d", (probability, degrees, value) => {
  assertClose(chiSquareProbability(value, degrees), probability, { relative: 1e-4 });
});

Deno.test("chiSquareProbability() equals the closed form for even degrees of freedom", () => {
  // Q = exp(-x/2) sum_{j < dof/2} (x/2)^j / j!: Abramowitz & Stegun eq. 26.4.5 with even dof.
  for (const degrees of [2, 4, 10, 40, 300]) {
    for (const x of [0.1, 1, degrees / 2, degrees, 2 * degrees]) {
      let term = Math.exp(-x / 2);
      let sum = term;
      for (let j = 1; j < degrees / 2; j++) sum += term *= x / 2 / j;
      assertClose(chiSquareProbability(x, degrees), sum, { relative: 1e-10 }, `Q(${x}, ${degrees})`);
    }
  }
});

Deno.test("chiSquareProbability() keeps to its range", () => {
  assert.equal(chiSquareProbability(0, 3), 1);
  assert.equal(chiSquareProbability(Infinity, 3), 0);
  assert.throws(() => chiSquareProbability(-1, 3), RangeError);
  assert.throws(() => chiSquareProbability(1, 0), RangeError);
});

Deno.test("runsTest() agrees with counting all orders of ten plus and ten minus signs", () => {
  // Exact: P(R <= r) by combinations, A. Wald, J. Wolfowitz (1940); the normal approximation is good to 0.01 here.
  const choose = (n: number, k: number): number => k === 0 ? 1 : choose(n, k - 1) * (n - k + 1) / k;
  const all = choose(20, 10);
  const probabilityOf = (runs: number): number => {
    const half = Math.floor(runs / 2);
    return runs % 2 === 0
      ? 2 * choose(9, half - 1) ** 2 / all
      : 2 * choose(9, half) * choose(9, half - 1) / all;
  };
  const signs = [1, 1, 1, -1, -1, -1, -1, 1, 1, 1, 1, -1, -1, -1, -1, -1, 1, 1, 1, -1];
  const test = runsTest(signs);
  assert.equal(test.runs, 6);
  assert.equal(test.expectedRuns, 11);
  let exact = 0;
  for (let runs = 2; runs <= 6; runs++) exact += probabilityOf(runs);
  assertClose(test.probability, exact, { absolute: 0.01 });
});

Deno.test("runsTest() handles one sign only and leaves zeros out", () => {
  assert.equal(runsTest([1, 0, 2, 3]).probability, 0.25);
  assert.equal(runsTest([]).probability, 1);
  assert.equal(runsTest([1, 0, -1]).runs, 2);
});
