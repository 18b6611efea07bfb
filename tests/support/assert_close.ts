import { AssertionError } from "node:assert/strict";

/** Passes when `actual` is within `absolute + relative * |expected|` of `expected`; the message shows all numbers. */
export function assertClose(
  actual: number,
  expected: number,
  tolerance: { relative?: number; absolute?: number },
  label = "value",
): void {
  const allowed = (tolerance.absolute ?? 0) + (tolerance.relative ?? 0) * Math.abs(expected);
  const delta = Math.abs(actual - expected);
  if (!(delta <= allowed && Number.isFinite(expected))) {
    throw new AssertionError({
      message: `${label}: actual ${actual}, expected ${expected}, difference ${delta}, allowed ${allowed}`,
      actual,
      expected,
    });
  }
}
