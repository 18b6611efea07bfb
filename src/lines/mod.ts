/**
 * Room `lines`: core-level lines: their shapes, backgrounds and fits, and what the areas of two lines say.
 *
 * @module
 */
export {
  fitLines,
  type FittedLine,
  type LineBackground,
  type LinesFit,
  type LineSpec,
  type LineSpectrum,
  type LineValue,
} from "./fit_lines.ts";
export { areaRatio, overlayerThicknessNm } from "./quantify.ts";
export { shirleyBackground } from "./shirley.ts";
export { tougaardBackground, tougaardDensityPerEv, type TougaardShape } from "./tougaard.ts";
export { type LightShift, lightShifts } from "./light_shifts.ts";
