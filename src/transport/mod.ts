/**
 * Room `transport`: electrons between the photon and the vacuum. Pure: no files, no clock, no workers.
 *
 * `pair_tables.ts` holds the physics of electron-electron scattering as sampling tables, `excitation.ts` the first
 * step (where and at which energy photoelectrons start), `stack.ts` several layers as one, `detection.ts` the last step (probability of reaching the
 * analyzer), `kernel.ts` the histories of slow electrons, `loss_kernel.ts` those of fast ones, `tally.ts` the sums and their standard errors.
 *
 * @module
 */
export { type EnergyGrid, energyGrid } from "./grid.ts";
export { excitationWeights, fermiOccupation } from "./excitation.ts";
export { type MeanFreePath, type PairTables, pairTables, type PairTablesInput } from "./pair_tables.ts";
export {
  acceptedShare,
  barrierTransmission,
  type DetectionInput,
  type DetectionTable,
  detectionTable,
} from "./detection.ts";
export {
  type BatchTally,
  DEPTH_CELLS_PER_PATH,
  directYield,
  emptyBatchTally,
  type Histories,
  HISTORIES_PER_BATCH,
  historyRunner,
  type PhotonSource,
  photonSource,
  type PhotonSourceInput,
  type SurfacePart,
} from "./kernel.ts";
export { type Layer, type LayerStack, layerStack } from "./stack.ts";
export {
  type DirectLine,
  directLines,
  lossHistoryRunner,
  type LossLayer,
  type LossLayout,
  lossLayout,
  type LossMedium,
  type LossSource,
} from "./loss_kernel.ts";
export { type EngineData, engineFrom, type FastEngineData, type PairEngineData } from "./engine.ts";
export { type Tally, TallyAccumulator } from "./tally.ts";
