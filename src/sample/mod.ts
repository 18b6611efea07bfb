/**
 * Room `sample`: what the surface is made of, as functions that transport can use: density of states, absorption of
 * light.
 *
 * @module
 */
export { type BandLobe, type BandModel, densityOfStates } from "./density_of_states.ts";
export { type Absorption, absorption, type OpticalIndex } from "./absorption.ts";
export {
  type LayeredAbsorption,
  layeredAbsorption,
  type LayeredLight,
  type OpticalLayer,
  type Polarization,
} from "./layered_absorption.ts";
