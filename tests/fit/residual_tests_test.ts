import assert from "node:assert/strict";
import { chiSquareProbability, type FitResult, residualTests, runsTest } from "../../src/fit/mod.ts";
import { assertClose } from "../support/assert_close.ts";

// Percentage points of chi-square: M. Abramowitz, I. Stegun (1964), Table 26.8 (values from memory, high confidence).
Deno.test.each([
  [0.95, 10, 3.94030],
  [0.05, 1, 3.84146],
  [0.05, 10, 18.3070],
  [0.01, 5, 15.0863],
  [0.5, 3, 2.36597],
  [0.001, 100, 149.449],
])("chiSquareProbability() gives %s for %s degrees of freedom at %s", (probability, degrees, value) => {
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

Deno.test("runsTest() agrees with counting all orders of up to eleven signs", () => {
  for (const [positive, negative] of [[1, 1], [2, 2], [1, 9], [3, 8], [5, 5], [6, 5]]) {
    const total = positive + negative;
    const orders: number[][] = [];
    for (let bits = 0; bits < 2 ** total; bits++) {
      const order = Array.from({ length: total }, (_, i) => (bits >> i) & 1 ? 1 : -1);
      if (order.filter((sign) => sign > 0).length === positive) orders.push(order);
    }
    const counts = orders.map((order) =>
      1 + order.filter((sign, i) => i > 0 && sign !== order[i - 1]).length
    );
    const mean = counts.reduce((a, b) => a + b) / counts.length;
    const variance = counts.reduce((sum, runs) => sum + (runs - mean) ** 2, 0) / counts.length;
    orders.forEach((order, o) => {
      const test = runsTest(order);
      assert.equal(test.runs, counts[o]);
      assertClose(test.expectedRuns, mean, { relative: 1e-12 }, "expected runs");
      assertClose(test.z * Math.sqrt(variance), test.runs - mean, { absolute: 1e-12 }, "z");
      const exact = counts.filter((runs) => runs <= test.runs).length / counts.length;
      assertClose(
        test.probability,
        exact,
        { relative: 1e-12 },
        `${positive}+ ${negative}- ${test.runs} runs`,
      );
    });
  }
});

Deno.test("runsTest() approaches the normal distribution for many residuals", () => {
  // 200 of each sign in 181 runs: z = -20/9.99, probability of at most that with continuity correction Phi(-1.95).
  const order: number[] = [];
  const lengths = [...new Array(90).fill(1), 110];
  lengths.forEach((length, i) => {
    for (let k = 0; k < length; k++) order.push(1);
    if (i < 90) { for (let k = 0; k < (i === 89 ? 111 : 1); k++) order.push(-1); }
  });
  const test = runsTest(order);
  assert.equal(test.runs, 181);
  assertClose(test.z, -2.0025, { absolute: 1e-3 });
  assertClose(test.probability, 0.0255, { absolute: 5e-4 }); // Phi(-1.952), Abramowitz & Stegun, Table 26.1
});

Deno.test("runsTest() handles one sign only, leaves zeros out and refuses NaN", () => {
  assert.deepEqual(runsTest([1, 0, 2, 3]), {
    runs: 1,
    expectedRuns: 2,
    z: -1 / Math.sqrt(0.5),
    probability: 0.25,
  });
  assert.equal(runsTest([]).probability, 1);
  assert.equal(runsTest([1]).probability, 1);
  assert.equal(runsTest([1, 0, -1]).runs, 2);
  assert.throws(() => runsTest([1, NaN]), {
    name: "RangeError",
    message: "Cannot count runs as residuals must be numbers: current value is NaN",
  });
});

Deno.test("residualTests() puts the tests of one fit together", () => {
  const fit = { chiSquare: 4, degreesOfFreedom: 2, fitted: Float64Array.of(2, 2, 2, 2) };
  const tests = residualTests(fit as unknown as FitResult, Float64Array.of(3, 4, 1, 0));
  assert.equal(tests.reducedChiSquare, 2);
  assertClose(tests.chiSquareProbability, Math.exp(-2), { relative: 1e-12 });
  assert.equal(tests.runs.runs, 2);
  assertClose(tests.runs.probability, 1 / 3, { relative: 1e-12 });
});
