/** A sweep file of two biases and two temperatures over `gold.json`; the changes replace its keys. Invented. */
export function sweepText(changes: Readonly<Record<string, unknown>> = {}): string {
  return JSON.stringify({
    title: "two by two",
    scenario: "gold.json",
    axes: [
      { kind: "list", path: "biasV", values: [-9, -8] },
      { kind: "list", path: "sample.temperatureK", values: [100, 300] },
    ],
    record: { values: ["peakCounts"] },
    ...changes,
  });
}

/** Gold with coarse tables and few photons, so that a point takes some tens of milliseconds. Invented. */
export const QUICK_GOLD = `{
  "title": "gold, quick",
  "sample": { "material": "Au" },
  "light": { "kind": "lamp", "lamp": "He I", "photonFluxPerS": 1e9 },
  "analyzer": {
    "workFunctionEv": 4.4,
    "acceptanceHalfAngleDeg": 4,
    "resolution": { "kind": "fwhm", "fwhmEv": 0.3 }
  },
  "biasV": -9,
  "acquisition": { "startEv": 8.8, "endEv": 29, "stepEv": 0.1, "dwellS": 0.5 },
  "simulation": { "histories": 8192, "seed": 1, "energyStepEv": 0.1 }
}`;
