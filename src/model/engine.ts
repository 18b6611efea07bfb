import { interpolateLinear } from "../math/mod.ts";
import { densityOfStates } from "../sample/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import {
  DEPTH_CELLS_PER_PATH,
  type DetectionTable,
  detectionTable,
  directYield,
  energyGrid,
  excitationWeights,
  type Histories,
  historyRunner,
  type PairTables,
  pairTables,
  type PhotonSource,
  photonSource,
} from "../transport/mod.ts";

/** Depth, in mean free paths, beyond which an electron is not scored: exp(-16) = 1e-7. */
const DEEPEST_PATHS = 16;

/** Photon energies that stand for a Gaussian band, and how far they reach in standard deviations. */
const BAND_POINTS = 33;
const BAND_REACH_SIGMAS = 4;

/** Everything the histories need, as plain data that can be sent to a worker. */
export interface EngineData {
  /** First event; null when no photon can lift an electron above the Fermi level. */
  readonly source: PhotonSource | null;
  /** Scattering, layer by layer. */
  readonly stack: LayerStack;
  /** Barriers and acceptances of the parts of the surface. */
  readonly surface: readonly SurfacePart[];
  /** Expected electrons per absorbed photon that reach the analyzer without an event, shape (bins). */
  readonly direct: Float64Array;
}

/** An engine ready to run batches. */
export interface Engine extends EngineData {
  /** Runs one batch; null when there is nothing to run. */
  readonly run: Histories | null;
}

/**
 * Builds the sampling tables of a scenario; takes some tenths of a second.
 *
 * @param resolved The scenario with all names looked up.
 * @returns Plain data.
 */
export function engineData(resolved: ResolvedScenario): EngineData {
  const { thermalEnergyEv, workFunctionEv, bandBottomBelowFermiEv } = resolved;
  const states = resolved.states.kind === "model"
    ? densityOfStates(resolved.states.model)
    : tableFunction(resolved.states.energiesEv, resolved.states.values, 0);
  const lines = resolved.lines.map((line) => ({ ...line, photons: bandPoints(line.energyEv, line.fwhmEv) }));
  const grid = energyGrid(resolved.energyStepEv, {
    photonEnergyEv: Math.max(...lines.flatMap((line) => line.photons.map((photon) => photon.energyEv))),
    workFunctionEv,
    thermalEnergyEv,
  });
  const tables = pairTables({
    grid,
    states,
    bandBottomBelowFermiEv,
    thermalEnergyEv,
    inelasticMeanFreePath: resolved.meanFreePath.kind === "reference" ? resolved.meanFreePath : {
      kind: "function",
      lengthNm: tableFunction(resolved.meanFreePath.energiesEv, resolved.meanFreePath.values, null),
    },
    transportMeanFreePathNm: resolved.transportMeanFreePathNm,
  });
  const detection = detectionTable({
    grid,
    workFunctionEv,
    bandBottomBelowFermiEv,
    barrier: resolved.barrier,
    accelerationEv: resolved.accelerationEv,
    acceptanceHalfAngleRad: (resolved.acceptanceHalfAngleDeg * Math.PI) / 180,
    emissionAngleRad: (resolved.emissionAngleDeg * Math.PI) / 180,
    cellsPerPath: DEPTH_CELLS_PER_PATH,
    deepestPaths: DEEPEST_PATHS,
  });
  const source = photonSource(lines.map((line) => {
    const excitation = new Float64Array(grid.count);
    for (const photon of line.photons) {
      const weights = excitationWeights(grid, photon.energyEv, states, thermalEnergyEv);
      const total = weights.reduce((sum, weight) => sum + weight, 0);
      if (total > 0) weights.forEach((weight, bin) => excitation[bin] += (photon.weight * weight) / total);
    }
    return { weight: line.absorbedWeight, absorptionDepthNm: line.absorptionDepthNm, excitation };
  }));
  const direct = source === null ? new Float64Array(grid.count) : directYield(source, tables, detection);
  return { source, tables, detection, direct };
}

/**
 * Makes engine data runnable, here or in a worker that received it.
 *
 * @param data From {@link engineData}.
 * @returns The engine.
 */
export function engineFrom(data: EngineData): Engine {
  return {
    ...data,
    run: data.source === null ? null : historyRunner(data.source, data.tables, data.detection),
  };
}

function tableFunction(
  energiesEv: readonly number[],
  values: readonly number[],
  outside: number | null,
): (energyEv: number) => number {
  const low = energiesEv[0];
  const high = energiesEv[energiesEv.length - 1];
  return (energyEv) =>
    outside !== null && (energyEv < low || energyEv > high)
      ? outside
      : interpolateLinear(energiesEv, values, energyEv);
}

/** A Gaussian band as equidistant photon energies with weights that add up to one. */
function bandPoints(centerEv: number, fwhmEv: number): { energyEv: number; weight: number }[] {
  if (fwhmEv === 0) return [{ energyEv: centerEv, weight: 1 }];
  const sigma = fwhmEv / (2 * Math.sqrt(2 * Math.LN2));
  const points = Array.from({ length: BAND_POINTS }, (_, i) => {
    const distance = BAND_REACH_SIGMAS * (-1 + (2 * i) / (BAND_POINTS - 1));
    return { energyEv: centerEv + distance * sigma, weight: Math.exp(-0.5 * distance * distance) };
  }).filter((point) => point.energyEv > 0);
  const total = points.reduce((sum, point) => sum + point.weight, 0);
  return points.map((point) => ({ ...point, weight: point.weight / total }));
}
