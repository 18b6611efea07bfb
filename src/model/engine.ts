import { interpolateLinear } from "../math/mod.ts";
import { densityOfStates } from "../sample/mod.ts";
import type { ResolvedFast, ResolvedLayer, ResolvedLine, ResolvedScenario } from "../scenario/mod.ts";
import { accelerationEv } from "../instrument/mod.ts";
import {
  DEPTH_CELLS_PER_PATH,
  detectionTable,
  directLines,
  directYield,
  type EnergyGrid,
  energyGrid,
  type EngineData,
  excitationWeights,
  type FastEngineData,
  layerStack,
  lossLayout,
  type LossMedium,
  type PairEngineData,
  pairTables,
  photonSource,
  type PhotonSourceInput,
} from "../transport/mod.ts";

/** Depth, in mean free paths, beyond which an electron is not scored: exp(-16) = 1e-7. */
const DEEPEST_PATHS = 16;

/** Slabs of equal thickness that stand for a profile of band bending. */
const BENDING_SLABS = 16;

/**
 * Builds the sampling tables of a scenario; takes some tenths of a second.
 *
 * @param resolved The scenario with all names looked up.
 * @returns Plain data.
 */
export function engineData(resolved: ResolvedScenario): EngineData {
  return resolved.fast === null ? pairEngineData(resolved) : fastEngine(resolved, resolved.fast);
}

/**
 * Builds the tables of slow electrons.
 *
 * @param resolved A scenario in the ultraviolet.
 * @returns Plain data.
 */
export function pairEngineData(resolved: ResolvedScenario): PairEngineData {
  const { thermalEnergyEv, layers } = resolved;
  const grid = energyGrid(resolved.energyStepEv, {
    photonEnergyEv: Math.max(
      ...resolved.lines.flatMap(({ photons }) => photons.map((photon) => photon.energyEv)),
    ),
    workFunctionEv: Math.min(...resolved.surface.map((part) => part.workFunctionEv)),
    thermalEnergyEv,
  });
  const states = layers.map((layer) =>
    layer.states.kind === "model"
      ? densityOfStates(layer.states.model)
      : tableFunction(layer.states.energiesEv, layer.states.values, 0)
  );
  const stack = layerStack(layers.map((layer, i) => ({
    thicknessNm: layer.thicknessNm,
    tables: pairTables({
      grid,
      states: states[i],
      bandBottomBelowFermiEv: layer.bandBottomBelowFermiEv,
      thermalEnergyEv,
      inelasticMeanFreePath: meanFreePath(layer),
      transportMeanFreePathNm: layer.transportMeanFreePathNm,
    }),
  })));
  const surface = resolved.surface.map(({ share, workFunctionEv, facetTiltDeg }) => ({
    share,
    detection: detectionTable({
      grid,
      workFunctionEv,
      bandBottomBelowFermiEv: layers[0].bandBottomBelowFermiEv,
      barrier: resolved.barrier,
      accelerationEv: accelerationEv(workFunctionEv, resolved.analyzerWorkFunctionEv, resolved.biasV),
      acceptanceHalfAngleRad: radians(resolved.acceptanceHalfAngleDeg),
      emissionAngleRad: radians(resolved.emissionAngleDeg),
      facetTiltRad: radians(facetTiltDeg),
      cellsPerPath: DEPTH_CELLS_PER_PATH,
      deepestPaths: DEEPEST_PATHS,
    }),
  }));
  const source = photonSource(
    resolved.lines.flatMap((line) =>
      layers.flatMap((_, i) =>
        slabs(resolved, line, i).map(({ shiftEv, ...slab }) => ({
          ...slab,
          excitation: lineExcitation(grid, line.photons, (energyEv) =>
            states[i](energyEv + shiftEv), thermalEnergyEv),
        }))
      )
    ),
  );
  const direct = source === null ? new Float64Array(grid.count) : directYield(source, stack, surface);
  return { kind: "pair", tallySize: grid.count, source, stack, surface, direct };
}

function fastEngine(resolved: ResolvedScenario, fast: ResolvedFast): FastEngineData {
  const [top] = resolved.layers;
  const rows = fast.layers[0].inelasticMeanFreePathNm.length;
  const { workFunctionEv } = resolved;
  const medium: LossMedium = {
    layers: fast.layers.map((layer) => ({
      ...layer,
      inelasticMeanFreePathNm: Float64Array.from(layer.inelasticMeanFreePathNm),
      losses: Float64Array.from(layer.losses),
    })),
    sources: fast.levels.map((level) => ({
      layer: level.layer,
      energyEv: fast.photonEnergyEv - level.bindingEnergyEv,
      perNm: level.perNm,
      directWeight: level.directWeight,
    })),
    detection: detectionTable({
      grid: {
        stepEv: fast.rowEv,
        count: rows,
        vacuumBin: Math.ceil(workFunctionEv / fast.rowEv),
        thermalBins: 0,
      },
      workFunctionEv,
      bandBottomBelowFermiEv: top.bandBottomBelowFermiEv,
      barrier: resolved.barrier,
      accelerationEv: accelerationEv(workFunctionEv, resolved.analyzerWorkFunctionEv, resolved.biasV),
      acceptanceHalfAngleRad: radians(resolved.acceptanceHalfAngleDeg),
      emissionAngleRad: radians(resolved.emissionAngleDeg),
      cellsPerPath: DEPTH_CELLS_PER_PATH,
      deepestPaths: DEEPEST_PATHS,
    }),
    stepEv: fast.stepEv,
    maxLossEv: fast.maxLossEv,
  };
  return {
    kind: "loss",
    tallySize: lossLayout(medium).stride * medium.sources.length,
    medium,
    direct: directLines(medium),
  };
}

function radians(degrees: number): number {
  return (degrees * Math.PI) / 180;
}

function meanFreePath(
  { meanFreePath: path }: ResolvedLayer,
): Parameters<typeof pairTables>[0]["inelasticMeanFreePath"] {
  if (path.kind === "reference") return path;
  return { kind: "function", lengthNm: tableFunction(path.energiesEv, path.values, null) };
}

/** Where a layer absorbs a line; with band bending the substrate is cut into slabs of one shift each. */
function slabs(
  { layers, bandBending }: ResolvedScenario,
  line: ResolvedLine,
  layer: number,
): (Omit<PhotonSourceInput, "excitation"> & { shiftEv: number })[] {
  const { share, depthNm } = line.absorbed[layer];
  const weight = line.absorbedWeight * share;
  if (!(weight > 0)) return [];
  const topNm = layers.slice(0, layer).reduce((sum, { thicknessNm }) => sum + thicknessNm, 0);
  const { thicknessNm } = layers[layer];
  if (bandBending === null || layer < layers.length - 1) {
    return [{ weight, absorptionDepthNm: depthNm, layer, topNm, thicknessNm, shiftEv: 0 }];
  }
  const { surfaceShiftEv, widthNm } = bandBending;
  const thin = widthNm / BENDING_SLABS;
  return Array.from({ length: BENDING_SLABS + 1 }, (_, i) => {
    const above = i * thin;
    const last = i === BENDING_SLABS;
    const thickness = last ? Infinity : thin;
    return {
      weight: weight * Math.exp(-above / depthNm) * -Math.expm1(-thickness / depthNm),
      absorptionDepthNm: depthNm,
      layer,
      topNm: topNm + above,
      thicknessNm: thickness,
      // Parabolic (depletion approximation): V (1 - z/w)^2, taken at the middle of the slab.
      shiftEv: last ? 0 : surfaceShiftEv * (1 - (i + 0.5) / BENDING_SLABS) ** 2,
    };
  });
}

function lineExcitation(
  grid: EnergyGrid,
  photons: readonly { readonly energyEv: number; readonly weight: number }[],
  states: (energyEv: number) => number,
  thermalEnergyEv: number,
): Float64Array {
  const excitation = new Float64Array(grid.count);
  for (const photon of photons) {
    const weights = excitationWeights(grid, photon.energyEv, states, thermalEnergyEv);
    const total = weights.reduce((sum, weight) => sum + weight, 0);
    if (total > 0) weights.forEach((weight, bin) => excitation[bin] += (photon.weight * weight) / total);
  }
  return excitation;
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
