/**
 * Room `data`: numbers from outside, each with its source and how sure it is: constants, lamp lines, materials.
 *
 * @module
 */
export { BOLTZMANN_EV_PER_K, HC_EV_NM } from "./constants.ts";
export { type Anode, anode, ANODE_NAMES, type AnodeLine } from "./anodes.ts";
export type { Cited, Confidence } from "./cited.ts";
export { LAMP_NAMES, type LampLine, lampLines, nearestLine } from "./lamps.ts";
export {
  type CitedBulk,
  type CitedCoreLevel,
  type CitedLobe,
  type CitedOscillatorLoss,
  type CitedTougaardLoss,
  listMaterialValues,
  type Material,
  material,
  MATERIAL_IDS,
  type MaterialValue,
  opticalConstantsAt,
  parseMaterial,
} from "./materials.ts";
export { materialFrom } from "./user_material.ts";
