import { cannot } from "../base/mod.ts";
import { gaussLegendre } from "../math/mod.ts";

const RULE = gaussLegendre(128);

/**
 * Chandrasekhar's H function for isotropic scattering in a half-space.
 *
 * Electrons born uniformly and isotropically in a half-space, scattered isotropically with albedo w and lost at
 * inelastic events, leave per unit solid angle as `sqrt(1 - w) H(mu, w)`, relative to no scattering.
 *
 * `ln H = -(mu/pi) integral_0^(pi/2) ln(1 - w t cot t)/(cos^2 t + mu^2 sin^2 t) dt`; with `tan p = mu tan t` the peak of the
 * integrand goes, and `p = (pi/2) s^3` tames the logarithm at w = 1. Absolute error below 1e-7.
 *
 * Sources: S. Chandrasekhar, Radiative Transfer (Dover, 1960), ch. V; D. Stibbs, R. Weir, Mon. Not. R. Astron. Soc. 119,
 * 512 (1959).
 *
 * @param cosine Cosine of the emission angle from the normal, 0..1.
 * @param albedo Single-scattering albedo w, 0..1.
 * @returns H, 1..2.908.
 * @throws {RangeError} If an argument is outside its range.
 * @example Conservative scattering along the normal
 * ```ts
 * import { chandrasekharH } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(chandrasekharH(1, 1).toFixed(4), "2.9078");
 * ```
 */
export function chandrasekharH(cosine: number, albedo: number): number {
  if (!(cosine >= 0 && cosine <= 1)) {
    throw new RangeError(cannot("compute H function", "cosine must be in 0..1", cosine));
  }
  if (!(albedo >= 0 && albedo <= 1)) {
    throw new RangeError(cannot("compute H function", "albedo must be in 0..1", albedo));
  }
  if (cosine === 0) return 1;
  let sum = 0;
  for (let i = 0; i < RULE.nodes.length; i++) {
    const s = 0.5 * (1 + RULE.nodes[i]);
    const tangent = Math.tan(0.5 * Math.PI * s ** 3) / cosine;
    const tCot = Math.atan(tangent) / tangent;
    // Near t = 0 the difference 1 - t cot t = t^2/3 + t^4/45 + ... would be lost to rounding.
    const rest = tangent < 1e-3 ? (tangent * tangent) / 3 : 1 - tCot;
    sum += 0.5 * RULE.weights[i] * 1.5 * Math.PI * s * s * Math.log(1 - albedo + albedo * rest);
  }
  return Math.exp(-sum / Math.PI);
}
