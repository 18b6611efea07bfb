import { cannot, type Estimate } from "../base/mod.ts";
import type { LinesFit } from "./fit_lines.ts";

/**
 * Ratio of the areas of two lines of one fit, with their covariance.
 *
 * Areas are counts: differences of cross-section, transmission and path length between the lines are the caller's.
 *
 * @param fit The fit.
 * @param above Name of the line in the numerator.
 * @param below Name of the line in the denominator.
 * @returns Ratio.
 * @throws {RangeError} If a name is unknown (a failed fit has no lines) or the lower area is not > 0.
 */
export function areaRatio(fit: LinesFit, above: string, below: string): Estimate {
  const fail = (rule: string, value: unknown) => new RangeError(cannot("divide areas", rule, value));
  const names = fit.lines.map(({ name }) => name);
  const [a, b] = [above, below].map((name) => {
    const index = names.indexOf(name);
    if (index < 0) throw fail(`the line must be one of ${names.join(", ") || "none (the fit failed)"}`, name);
    return index;
  });
  const [upper, lower] = [fit.lines[a], fit.lines[b]];
  const area = lower.areaCountsEv.value;
  if (!(area > 0)) throw fail(`the area of ${below} must be > 0 counts eV`, area);
  const value = upper.areaCountsEv.value / area;
  const covariance = (i: number, j: number): number => fit.areaCovariance[i * names.length + j];
  const variance = (covariance(a, a) - 2 * value * covariance(a, b) + value ** 2 * covariance(b, b)) /
    area ** 2;
  return { value, standardUncertainty: Math.sqrt(Math.max(0, variance)) };
}

/**
 * Thickness of a uniform film from the ratio of a line of the film to the same line of the substrate,
 * `L cos(theta) ln(1 + R/R0)`.
 *
 * Both lines have nearly the same energy, so one length serves for both in the film. Elastic scattering is in L alone:
 * trust emission angles up to 60 degrees (common practice, no source).
 *
 * Source: T. A. Carlson, G. E. McGuire, J. Electron Spectrosc. 1, 161 (1972); in this form B. R. Strohmeier, Surf.
 * Interface Anal. 15, 51 (1990) (both from memory).
 *
 * @param ratio Area of the film's line over that of the substrate's, R.
 * @param bulkRatio R0: the same ratio for infinitely thick film and clean substrate, `N_f L_f/(N_s L_s)` with the atoms
 * per volume N and the lengths L, > 0.
 * @param effectiveAttenuationLengthNm L in the film, nm, > 0.
 * @param emissionAngleDeg Emission angle from the surface normal, degrees, 0..< 90.
 * @returns Thickness, nm, with the uncertainty of the ratio alone.
 * @throws {RangeError} If a number is out of range.
 * @example Where film and substrate shine alike
 * ```ts
 * import { overlayerThicknessNm } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const thickness = overlayerThicknessNm({ value: 1, standardUncertainty: 0.1 }, 1, 3, 0);
 * assert.equal(thickness.value.toFixed(6), (3 * Math.LN2).toFixed(6));
 * assert.equal(thickness.standardUncertainty.toFixed(3), "0.150");
 * ```
 */
export function overlayerThicknessNm(
  ratio: Estimate,
  bulkRatio: number,
  effectiveAttenuationLengthNm: number,
  emissionAngleDeg: number,
): Estimate {
  const fail = (rule: string, value: unknown) => new RangeError(cannot("compute a thickness", rule, value));
  if (!(ratio.value >= 0)) throw fail("the ratio must be >= 0", ratio.value);
  if (!(bulkRatio > 0)) throw fail("bulkRatio must be > 0", bulkRatio);
  if (!(effectiveAttenuationLengthNm > 0)) {
    throw fail("effectiveAttenuationLengthNm must be > 0 nm", effectiveAttenuationLengthNm);
  }
  if (!(emissionAngleDeg >= 0 && emissionAngleDeg < 90)) {
    throw fail("emissionAngleDeg must be in 0..< 90 degrees", emissionAngleDeg);
  }
  const length = effectiveAttenuationLengthNm * Math.cos((emissionAngleDeg * Math.PI) / 180);
  return {
    value: length * Math.log1p(ratio.value / bulkRatio),
    standardUncertainty: (length * ratio.standardUncertainty) / (bulkRatio + ratio.value),
  };
}
