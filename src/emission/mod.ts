/**
 * Room `emission`: published formulas for photoelectric and thermionic emission near threshold, and for the barrier that
 * electrons leave over.
 *
 * @module
 */
export { fowlerFunction, fowlerYieldEv2 } from "./fowler.ts";
export {
  normalEnergyDensityEv,
  planeRetardedYieldEv2,
  sphereRetardedYieldEv2,
  totalEnergyDensityEv,
} from "./dubridge.ts";
export { helmholtzDipoleEv, schottkyLoweringEv, schottkyMaximumNm } from "./barrier.ts";
export { richardsonDushmanAPerM2 } from "./thermionic.ts";
export { quinnFerrellLifetimeFs } from "./lifetime.ts";
