import assert from "node:assert/strict";
import { minimize } from "../../src/fit/mod.ts";

/**
 * NIST Statistical Reference Datasets, nonlinear regression, public domain: certified values from
 * https://www.itl.nist.gov/div898/strd/nls/nls_main.shtml (Misra1a: D. Misra, NIST; Thurber: R. Thurber, NIST).
 */
interface Certified {
  readonly name: string;
  readonly x: readonly number[];
  readonly y: readonly number[];
  readonly starts: readonly (readonly number[])[];
  readonly model: (b: Float64Array, x: number) => number;
  readonly values: readonly number[];
  readonly errors: readonly number[];
  readonly residualSum: number;
  /** Digits asked of values from both starts. */
  readonly digits: number;
}

const MISRA1A: Certified = {
  name: "Misra1a",
  x: [77.6, 114.9, 141.1, 190.8, 239.9, 289.0, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0],
  y: [10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78],
  starts: [[500, 1e-4], [250, 5e-4]],
  model: (b, x) => b[0] * (1 - Math.exp(-b[1] * x)),
  values: [2.3894212918e2, 5.5015643181e-4],
  errors: [2.7070075241e0, 7.2668688436e-6],
  residualSum: 1.2455138894e-1,
  digits: 8,
};

const THURBER: Certified = {
  name: "Thurber",
  // deno-fmt-ignore
  x: [-3.067, -2.981, -2.921, -2.912, -2.840, -2.797, -2.702, -2.699, -2.633, -2.481, -2.363, -2.322, -1.501, -1.460,
    -1.274, -1.212, -1.100, -1.046, -0.915, -0.714, -0.566, -0.545, -0.400, -0.309, -0.109, -0.103, 0.010, 0.119,
    0.377, 0.790, 0.963, 1.006, 1.115, 1.572, 1.841, 2.047, 2.200],
  // deno-fmt-ignore
  y: [80.574, 84.248, 87.264, 87.195, 89.076, 89.608, 89.868, 90.101, 92.405, 95.854, 100.696, 101.060, 401.672,
    390.724, 567.534, 635.316, 733.054, 759.087, 894.206, 990.785, 1090.109, 1080.914, 1122.643, 1178.351, 1260.531,
    1273.514, 1288.339, 1327.543, 1353.863, 1414.509, 1425.208, 1421.384, 1442.962, 1464.350, 1468.705, 1447.894,
    1457.628],
  starts: [[1000, 1000, 400, 40, 0.7, 0.3, 0.03], [1300, 1500, 500, 75, 1, 0.4, 0.05]],
  model: (b, x) => (b[0] + x * (b[1] + x * (b[2] + x * b[3]))) / (1 + x * (b[4] + x * (b[5] + x * b[6]))),
  // deno-fmt-ignore
  values: [1.2881396800e3, 1.4910792535e3, 5.8323836877e2, 7.5416644291e1, 9.6629502864e-1, 3.9797285797e-1,
    4.9727297349e-2],
  // deno-fmt-ignore
  errors: [4.6647963344e0, 3.9571156086e1, 2.8698696102e1, 5.5675370270e0, 3.1333340687e-2, 1.4984928198e-2,
    6.5842344623e-3],
  residualSum: 5.6427082397e3,
  digits: 6,
};

function solve(problem: Certified, start: readonly number[], y: readonly number[] = problem.y) {
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

for (const problem of [MISRA1A, THURBER]) {
  problem.starts.forEach((start, s) => {
    Deno.test(`minimize() solves NIST ${problem.name} from start ${s + 1}`, () => {
      const fit = solve(problem, start);
      assert.ok(fit.converged, fit.reason);
      const deviation = Math.sqrt(fit.chiSquare / fit.degreesOfFreedom);
      problem.values.forEach((certified, j) => {
        const found = digits(fit.values[j], certified);
        assert.ok(
          found >= problem.digits,
          `b${j + 1}: ${fit.values[j]} has ${found.toFixed(1)} digits of ${certified}`,
        );
        const error = digits(fit.standardErrors[j] * deviation, problem.errors[j]);
        assert.ok(error >= 5, `error of b${j + 1}: ${error.toFixed(1)} digits`);
      });
      assert.ok(digits(fit.chiSquare, problem.residualSum) >= 8);
    });
  });

  Deno.test(`minimize() does not reach the certified values of ${problem.name} when one datum is wrong`, () => {
    const y = problem.y.with(5, problem.y[5] * 1.001);
    const fit = solve(problem, problem.starts[1], y);
    assert.ok(problem.values.some((certified, j) => digits(fit.values[j], certified) < problem.digits));
  });
}
