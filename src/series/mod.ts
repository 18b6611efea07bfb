/**
 * Room `series`: work functions from series of measurements: yield against photon energy, stopping potentials, largest
 * energies against frequency, and work functions against bias or temperature.
 *
 * Each result says whose work function it is, how well the series follows the model, and a verdict.
 *
 * @module
 */
export { fitFowler, type FowlerFit, type FowlerSeries } from "./fowler_fit.ts";
export { judgeFit, judgeResiduals, type Judgment } from "./judgment.ts";
export {
  fitPhotoelectricLine,
  type PhotoelectricLine,
  type PhotoelectricQuantity,
  type PhotoelectricSeries,
  PLANCK_EV_S,
} from "./photoelectric_line.ts";
export {
  fitStoppingPotential,
  fitStoppingSeries,
  type RetardingCell,
  type RetardingCurve,
  type StoppingPotential,
  type StoppingSeries,
} from "./stopping.ts";
export {
  type UncertainPoints,
  type WeightedMean,
  weightedMean,
  type YorkLine,
  yorkLine,
} from "./york_line.ts";
export {
  type BiasTrend,
  type TemperatureTrend,
  workFunctionAgainstBias,
  workFunctionAgainstTemperature,
  type WorkFunctionSeries,
} from "./trend.ts";
