/**
 * Room `report`: results as figures and as text. Draws and writes; computes no physics.
 *
 * @module
 */
export { renderSvg } from "./render.ts";
export {
  type FigureCurve,
  type FigureEdge,
  spectrumFigure,
  type SpectrumFigureInput,
} from "./spectrum_figure.ts";
export { type FigureSeries, seriesFigure, type SeriesFigureInput } from "./series_figure.ts";
export { formatEstimate } from "./values.ts";
export {
  axisTitle,
  type FigurePoint,
  sweepFigure,
  type SweepFigureAxis,
  type SweepFigureInput,
} from "./sweep_figure.ts";
