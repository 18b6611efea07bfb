/**
 * Room `instrument`: what the spectrometer does to the electrons that reach it: energy scale, resolution,
 * transmission, counting. Numbers in, numbers out; no transport.
 *
 * @module
 */
export { accelerationEv, kineticEnergyShiftEv } from "./energy_scale.ts";
export {
  applyResponse,
  hemisphereResolutionEv,
  type ResponseMatrix,
  responseMatrix,
  windowEv,
} from "./resolution.ts";
export { type Counting, drawCounts, type ExpectedCounts, expectedCounts } from "./counting.ts";
