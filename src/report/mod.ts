/**
 * Room `report`: results as figures and as text. Draws and writes; computes no physics.
 *
 * @module
 */
export { compareFigure, type CompareFigureInput, type CompareFigureRegion } from "./compare_figure.ts";
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
export { budgetFigure, type BudgetFigureInput, type FigureBudgetTerm } from "./budget_figure.ts";
export {
  depthFigure,
  type DepthFigureInput,
  type FigureDepthCurve,
  type FigureLossPart,
  lossFigure,
  type LossFigureInput,
} from "./curves_figures.ts";
export { cutoffFigure, type CutoffFigureInput, type FigureConvention } from "./cutoff_figure.ts";
export { levelsFigure, type LevelsFigureInput } from "./levels_figure.ts";
export {
  type PageFigure,
  type PageSpectrum,
  type PageTable,
  reportPage,
  type ReportPageInput,
} from "./page.ts";
export { svgToPng } from "./png.ts";
export { type Displayed, type DisplayEdge, type DisplayFit, displayFit, displaySpectrum } from "./display.ts";
export {
  type FigurePartialIntensities,
  partialIntensitiesFigure,
  type PartialIntensitiesFigureInput,
} from "./partial_intensities_figure.ts";
export { planFigure, type PlanFigureInput } from "./plan_figure.ts";
export {
  type RunSheet,
  runSheetHtml,
  runSheetMarkdown,
  type SheetPicture,
  type SheetSection,
} from "./run_sheet.ts";
