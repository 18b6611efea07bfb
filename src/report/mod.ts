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
export { formatEstimate } from "./values.ts";
