/**
 * Room `math`: special functions, interpolation and quadrature. Vectors and numbers only, no physics.
 *
 * @module
 */
export { erfc, erfcx, fastErfcx, normalCdf, normalPdf } from "./erfc.ts";
export { FWHM_PER_SIGMA } from "./gaussian.ts";
export { interpolateLinear } from "./interpolate.ts";
export { gaussLegendre, type QuadratureRule } from "./quadrature.ts";
export {
  type Complex,
  complexAdd,
  complexDivide,
  complexLog,
  complexMultiply,
  complexSqrt,
} from "./complex.ts";
