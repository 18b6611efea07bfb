/** A complete scenario of gold under the main helium line; invented, no such measurement was made. */
export const SCENARIO_TEXT = `{
  "title": "gold",
  "sample": { "material": "Au", "temperatureK": 300 },
  "light": { "kind": "lamp", "lamp": "He I", "photonFluxPerS": 5e9 },
  "geometry": { "incidenceAngleDeg": 45, "emissionAngleDeg": 0 },
  "analyzer": {
    "workFunctionEv": 4.4,
    "acceptanceHalfAngleDeg": 4,
    "resolution": {
      "kind": "hemisphere", "passEnergyEv": 10, "slitWidthMm": 1, "meanRadiusMm": 150, "slitHalfAngleDeg": 3
    }
  },
  "biasV": -9,
  "acquisition": { "startEv": 8.8, "endEv": 29, "stepEv": 0.02, "dwellS": 0.5 },
  "simulation": { "histories": 20000, "seed": 1 }
}`;
