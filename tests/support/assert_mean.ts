import { AssertionError } from "node:assert/strict";

/**
 * Passes when a sample mean lies within 4.5 standard errors of its expectation: one false alarm in 150 000 checks
 * for a normal mean. Also refuses a standard error of zero or NaN, which would make the check empty.
 */
export function assertMean(
  mean: number,
  standardError: number,
  expected: number,
  label = "mean",
): void {
  const z = (mean - expected) / standardError;
  if (!(standardError > 0) || !(Math.abs(z) < 4.5)) {
    throw new AssertionError({
      message: `${label}: mean ${mean} +- ${standardError}, expected ${expected}, z ${z}, allowed |z| < 4.5`,
      actual: mean,
      expected,
    });
  }
}
