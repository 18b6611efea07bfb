import assert from "node:assert/strict";
import { type FitResult, minimize } from "../../src/fit/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { type Certified, GAUSS1, MISRA1A, THURBER } from "./nist_data.ts";

/** Digits asked of values and residual sum, and of errors, which derivatives by differences know less well. */
const VALUE_DIGITS = 8;
const ERROR_DIGITS = 6;

function solve(problem: Certified, start: readonly number[], y: readonly number[] = problem.y): FitResult {
  return minimize({
    parameters: start.map((value, j) => ({ name: `b${j + 1}`, start: value })),
    model: (b, out) => problem.x.forEach((x, i) => out[i] = problem.model(b, x)),
    data: Float64Array.from(y),
    sigma: new Float64Array(y.length).fill(1),
  });
}

/** Agreeing decimal digits, as NIST counts them: minus log10 of the relative difference. */
function digits(actual: number, certified: number): number {
  return -Math.log10(Math.abs(actual - certified) / Math.abs(certified) + 1e-16);
}

function assertCertified(fit: FitResult, { values, errors, residualSum }: Certified): void {
  // NIST scales its errors by the residual standard deviation; ours are for the sigma that was given, here 1.
  const deviation = Math.sqrt(fit.chiSquare / fit.degreesOfFreedom);
  const rows: (readonly [string, number, number, number])[] = [
    ...values.map((value, j) => [`b${j + 1}`, fit.values[j], value, VALUE_DIGITS] as const),
    ...errors.map((error, j) =>
      [`error of b${j + 1}`, fit.standardErrors[j] * deviation, error, ERROR_DIGITS] as const
    ),
    ["residual sum", fit.chiSquare, residualSum, VALUE_DIGITS],
  ];
  for (const [label, actual, certified, wanted] of rows) {
    const found = digits(actual, certified);
    assert.ok(found >= wanted, `${label}: ${actual} has ${found.toFixed(1)} digits of ${certified}`);
  }
}

for (const problem of [MISRA1A, THURBER, GAUSS1]) {
  problem.starts.forEach((start, s) => {
    Deno.test(`minimize() solves NIST ${problem.name} from start ${s + 1}`, () => {
      const fit = solve(problem, start);
      assert.ok(fit.converged, fit.reason);
      assertCertified(fit, problem);
    });
  });

  Deno.test(`minimize() does not reach the certified values of ${problem.name} when one datum is wrong`, () => {
    const y = problem.y.with(5, problem.y[5] * 1.001);
    const fit = solve(problem, problem.starts[1], y);
    assert.ok(fit.converged, fit.reason);
    assert.throws(() => assertCertified(fit, problem), /b1: .* digits/);
  });
}

Deno.test("The data of Gauss1 have the sums of the data that NIST published", () => {
  // Sums taken when the certified values were last reproduced from the published file.
  assertClose(GAUSS1.y.reduce((sum, y) => sum + y, 0), 15132.848935, { absolute: 1e-6 }, "sum");
  assertClose(GAUSS1.y.reduce((sum, y) => sum + y * y, 0), 1349179.593130, { absolute: 1e-6 }, "squares");
});
