/**
 * Room `light`: what shines on the sample, as a list of photon energies with weights and widths: lamps, X-ray anodes,
 * monochromators, lasers, hot filaments, measured spectra.
 *
 * @module
 */
export { type LightPoint, mainPhotonEnergyEv, meanPhotonEnergyEv } from "./points.ts";
export { anodeLight, bandLight, lampLight, monochromatedAluminumLight, tabulatedLight } from "./sources.ts";
export { planckPhotonDensity, thermalLight, type ThermalWindow } from "./thermal.ts";
export { type LaserPulses, pulsedLaserLight, type PulsedLaserSettings } from "./laser.ts";
