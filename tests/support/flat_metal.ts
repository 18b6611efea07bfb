import type { ResolvedLayer, ResolvedScenario } from "../../src/scenario/mod.ts";

/** Light of one photon energy absorbed at a mean depth of 10 nm. */
export function line(energyEv: number): ResolvedScenario["lines"][number] {
  return {
    name: "line",
    energyEv,
    photons: [{ energyEv, weight: 1 }],
    absorbedWeight: 1,
    absorbed: [{ share: 1, depthNm: 10 }],
  };
}

/** Numbers of {@link flatMetal} that a test may change; the others follow from them. */
export type FlatMetalChanges =
  & Partial<
    Omit<ResolvedScenario, "lines" | "thermalEnergyEv" | "kineticEnergyShiftEv" | "layers" | "surface">
  >
  & Partial<Omit<ResolvedLayer, "thicknessNm" | "material">>;

/**
 * An ideal metal for exact limits: the same number of states at every energy, an inelastic mean free path of 1 nm at
 * every energy, T = 0, and an analyzer that takes every direction, has no dead time and no dark counts.
 */
export function flatMetal(changes: FlatMetalChanges = {}): ResolvedScenario {
  const { states, bandBottomBelowFermiEv, meanFreePath, transportMeanFreePathNm, ...others } = changes;
  const metal = {
    title: "flat metal",
    workFunctionEv: 4.5,
    workFunctionSource: "invented",
    temperatureK: 0,
    layers: [{
      material: "invented",
      thicknessNm: Infinity,
      states: states ?? { kind: "table", energiesEv: [-200, 200], values: [1, 1] },
      bandBottomBelowFermiEv: bandBottomBelowFermiEv ?? 10,
      meanFreePath: meanFreePath ?? { kind: "table", energiesEv: [0, 200], values: [1, 1] },
      transportMeanFreePathNm: transportMeanFreePathNm ?? null,
    }],
    bandBending: null,
    valenceMaximumBelowFermiEv: null,
    gapEv: 0,
    fast: null,
    barrier: "classical",
    photonEnergyEv: 10,
    absorbedPhotonsPerS: 1e6,
    acceptanceHalfAngleDeg: 90,
    emissionAngleDeg: 0,
    analyzerWorkFunctionEv: 4.5,
    biasV: 0,
    resolutionFwhmEv: 0.1,
    transmissionExponent: 0,
    detectionFraction: 1,
    acquisition: {
      startEv: 0.1,
      endEv: 7,
      stepEv: 0.02,
      dwellS: 1,
      sweeps: 1,
      darkRateCountsPerS: 0,
      deadTimeS: 0,
    },
    histories: 8192,
    seed: 1,
    energyStepEv: 0.02,
    warnings: [],
    ...others,
  } satisfies Omit<ResolvedScenario, "lines" | "thermalEnergyEv" | "kineticEnergyShiftEv" | "surface">;
  return {
    ...metal,
    surface: [{ share: 1, workFunctionEv: metal.workFunctionEv, facetTiltDeg: 0 }],
    lines: [line(metal.photonEnergyEv)],
    thermalEnergyEv: 8.617333262e-5 * metal.temperatureK, // k_B in eV/K, exact in the SI of 2019
    kineticEnergyShiftEv: -metal.analyzerWorkFunctionEv - metal.biasV,
  };
}
