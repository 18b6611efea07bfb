/**
 * Twoedge: simulate the photoemission spectrum of a real surface, and read the work function back from its two edges.
 *
 * @example A simulated gold surface gives its work function back
 * ```ts
 * import { expectedSpectrum, countSpectrum, engineData, measureWorkFunction, nearestLine, parseScenario,
 *   resolveScenario, runSeries } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 *
 * const scenario = parseScenario(`{
 *   "title": "gold",
 *   "sample": { "material": "Au" },
 *   "light": { "kind": "lamp", "lamp": "He I" },
 *   "analyzer": { "workFunctionEv": 4.4, "acceptanceHalfAngleDeg": 4, "resolution": { "kind": "fwhm", "fwhmEv": 0.1 } },
 *   "biasV": -9,
 *   "acquisition": { "startEv": 9, "endEv": 29, "stepEv": 0.02, "dwellS": 1 }
 * }`, "gold.json");
 * const resolved = resolveScenario(scenario);
 * const engine = engineData(resolved);
 * const spectrum = expectedSpectrum(resolved, engine, runSeries(engine, 1, 100));
 * const { workFunctionEv } = measureWorkFunction([{
 *   label: "", file: "", energyKind: "kinetic", energiesEv: spectrum.kineticEnergiesEv,
 *   counts: countSpectrum(spectrum, 1), photonEnergyEv: resolved.photonEnergyEv, biasV: -9, asRecorded: true,
 *   analyzerWorkFunctionEv: 4.4, acceptanceHalfAngleDeg: 4, temperatureK: 300,
 * }], { knownLine: nearestLine });
 * assert.ok(workFunctionEv !== null && Math.abs(workFunctionEv.value - 5.1) < 0.03);
 * ```
 *
 * @module
 */
export * from "./src/base/mod.ts";
export * from "./src/math/mod.ts";
export * from "./src/rng/mod.ts";
export * from "./src/data/mod.ts";
export * from "./src/sample/mod.ts";
export * from "./src/light/mod.ts";
export * from "./src/losses/mod.ts";
export * from "./src/transport/mod.ts";
export * from "./src/instrument/mod.ts";
export * from "./src/spectrum/mod.ts";
export * from "./src/fit/mod.ts";
export * from "./src/emission/mod.ts";
export * from "./src/series/mod.ts";
export * from "./src/lines/mod.ts";
export * from "./src/edges/mod.ts";
export * from "./src/formats/mod.ts";
export * from "./src/scenario/mod.ts";
export * from "./src/model/mod.ts";
export * from "./src/sweep/mod.ts";
export * from "./src/run/mod.ts";
export * from "./src/compare/mod.ts";
export * from "./src/plan/mod.ts";
export * from "./src/report/mod.ts";
