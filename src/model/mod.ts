/**
 * Room `model`: the forward model. A resolved scenario becomes an engine (tables for the histories), and a tally of
 * histories becomes the spectrum that the instrument would record.
 *
 * @module
 */
export { engineData, pairEngineData } from "./engine.ts";
export { type CellCurve, cellCurve, type CellSettings, collectingAll, noisyCurrents } from "./cell.ts";
export { countSpectrum, type ExpectedSpectrum, expectedSpectrum } from "./expected.ts";
export { type EmissionDepth, type ExpectedLevel, informationDepthNm } from "./fast.ts";
