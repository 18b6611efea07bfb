import { normalCdf } from "../math/mod.ts";

/**
 * Where the steepest line of a broadened edge meets the base line, measured from the start of the edge: for an edge that
 * rises over `rampEv` and is folded with a Gaussian, `r/2 - r/(2 (2 Phi(r/2s) - 1))`, since the line is steepest in the
 * middle. Without a ramp `-sqrt(pi/2) s = -0.532234 FWHM` (erf edge). Derived here.
 *
 * @param sigmaEv Standard deviation of the Gaussian, eV, > 0.
 * @param rampEv Width of the rise, eV, >= 0.
 * @returns Shift, eV; negative below the start.
 * @example An erf edge of 0.1 eV FWHM
 * ```ts
 * import { edgeTangentShiftEv } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(edgeTangentShiftEv(0.1 / 2.35482004503, 0).toFixed(6), "-0.053223");
 * ```
 */
export function edgeTangentShiftEv(sigmaEv: number, rampEv: number): number {
  const half = rampEv / 2;
  if (half < 1e-6 * sigmaEv) return -Math.sqrt(Math.PI / 2) * sigmaEv;
  return half - half / (2 * normalCdf(half / sigmaEv) - 1);
}
