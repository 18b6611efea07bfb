/**
 * Room `losses`: published formulas for fast electrons in a solid: how far they go without an energy loss, how much they
 * then lose, how far without a change of direction, and how deep the electrons come from that leave.
 *
 * @module
 */
export {
  type BulkNumbers,
  type MeanFreePathLaw,
  meanFreePathLaw,
  type MeanFreePathModel,
  meanFreePathNotices,
} from "./inelastic_mean_free_path.ts";
export { type LossOscillator, oscillatorInverseMeanFreePath } from "./oscillators.ts";
export {
  lossAlias,
  type LossDistribution,
  lossDistribution,
  type LossModel,
  lossQuantileEv,
  tougaardCrossSection,
} from "./loss_distribution.ts";
export { type AtomDensity, transportMeanFreePathNm } from "./transport_mean_free_path.ts";
export {
  type EmissionDepths,
  emissionDepths,
  type EmissionDepthsInput,
  singleScatteringAlbedo,
} from "./emission_depths.ts";
export { chandrasekharH } from "./chandrasekhar.ts";
export { surfaceExcitationParameter } from "./surface_excitation.ts";
