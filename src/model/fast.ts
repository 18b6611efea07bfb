import { cannot } from "../base/mod.ts";
import { lineProfile } from "../spectrum/mod.ts";
import type { ResolvedFast, ResolvedScenario } from "../scenario/mod.ts";
import { type LossLayout, lossLayout, type Tally } from "../transport/mod.ts";
import type { FastEngineData } from "../transport/mod.ts";
import type { EngineResponse } from "./response.ts";
import { surfaceLosses } from "./surface_losses.ts";

/** Where electrons without a loss come from. */
export interface EmissionDepth {
  /** Depth of the upper face of their layer, nm. */
  readonly topNm: number;
  /** Width of a cell, nm. */
  readonly cellNm: number;
  /** Middles of the cells, nm. */
  readonly depthsNm: readonly number[];
  /** Share of the electrons per nm of depth in each cell. */
  readonly densityPerNm: readonly number[];
}

/** What of a core level reaches the analyzer and from how deep. */
export interface ExpectedLevel {
  /** Name. */
  readonly name: string;
  /** Recorded kinetic energy of the line, eV. */
  readonly kineticEnergyEv: number;
  /** Electrons per incident photon without an energy loss. */
  readonly noLossPerPhoton: number;
  /**
   * Electrons after 0, 1, 2, ... losses that add up to no more than the largest loss followed, relative to those without
   * (partial intensities; W. Werner, Surf. Interface Anal. 31, 141 (2001), from memory); empty when there are none.
   */
  readonly partialIntensities: readonly number[];
  /** Mean depth that they come from, nm (mean escape depth, ISO 18115-1). */
  readonly meanEscapeDepthNm: number;
  /** Depth above which 95 % of them start, nm (information depth, ISO 18115-1). */
  readonly informationDepth95Nm: number;
  /** Emission depth distribution: share of the signal per nm of depth, at the middle of each cell. */
  readonly emissionDepth: EmissionDepth;
}

/** Losses of one electron up to which partial intensities are given. */
const MOST_LOSSES = 10;
/** The line profile is tabulated with this many points per loss step. */
const POINTS_PER_STEP = 2;
/** Lines are followed this far beyond the source's own lines, eV: the Lorentzian tail there is below 1e-4 of the peak. */
const REACH_EV = 25;

/**
 * Response of a fast-electron engine: each level's losses folded with its line, the source's lines and the analyzer.
 *
 * The core level's and the source's Lorentzian widths add; a Doniach-Sunjic line keeps its form when folded with a
 * Lorentzian (its Fourier transform is multiplied by an exponential).
 *
 * @param resolved The scenario.
 * @param engine The engine.
 * @param kineticEnergiesEv Channels, eV.
 * @returns The response.
 */
export function fastResponse(
  resolved: ResolvedScenario,
  engine: FastEngineData,
  kineticEnergiesEv: Float64Array,
): EngineResponse {
  const fast = resolved.fast!;
  const layout = lossLayout(engine.medium);
  const { stepEv } = engine.medium;
  const spacingEv = stepEv / POINTS_PER_STEP;
  const profiles = fast.levels.map((level) =>
    levelProfile(fast, level, resolved.resolutionFwhmEv, spacingEv)
  );
  const positions = fast.levels.map((level) =>
    fast.photonEnergyEv - level.bindingEnergyEv + resolved.kineticEnergyShiftEv
  );
  const densityOf = (contents: Float64Array): Float64Array => {
    const density = new Float64Array(kineticEnergiesEv.length);
    profiles.forEach((profile, s) => {
      for (let c = 0; c < density.length; c++) {
        const offset = kineticEnergiesEv[c] - positions[s];
        let sum = 0;
        for (let b = 0; b < layout.lossBins; b++) {
          const content = contents[s * layout.stride + b];
          if (content === 0) continue;
          const lossEv = b === 0 ? 0 : (b - 0.5) * stepEv;
          const at = (offset + lossEv - profile.startEv) / spacingEv;
          if (at < 0 || at >= profile.values.length - 1) continue;
          const i = Math.floor(at);
          sum += content * (profile.values[i] + (at - i) * (profile.values[i + 1] - profile.values[i]));
        }
        density[c] += sum;
      }
    });
    return density;
  };
  const direct = new Float64Array(engine.tallySize);
  engine.direct.forEach((line, s) => direct[s * layout.stride] = line.electrons);
  const totalOf = (contents: Float64Array): Float64Array => Float64Array.of(electrons(contents, layout));
  return {
    photonsPerS: fast.photonFluxPerS,
    direct: densityOf(direct),
    directTotal: totalOf(direct)[0],
    densityOf,
    totalOf,
  };
}

/** Electrons in the loss bins of all sources. */
function electrons(contents: Float64Array, { stride, lossBins }: LossLayout): number {
  let sum = 0;
  for (let base = 0; base < contents.length; base += stride) {
    for (let b = 0; b < lossBins; b++) sum += contents[base + b];
  }
  return sum;
}

/** Density per eV of a level without losses, over kinetic energy from its nominal position. */
function levelProfile(
  fast: ResolvedFast,
  level: ResolvedFast["levels"][number],
  resolutionFwhmEv: number,
  spacingEv: number,
): { startEv: number; values: Float64Array } {
  const shifts = fast.light.map((point) => point.energyEv - fast.photonEnergyEv);
  const startEv = Math.min(...shifts) - fast.maxLossEv - REACH_EV;
  const count = Math.ceil((Math.max(...shifts) + REACH_EV - startEv) / spacingEv) + 1;
  const values = new Float64Array(count);
  fast.light.forEach((point, p) => {
    const line = lineProfile({
      lorentzFwhmEv: level.lorentzFwhmEv + point.lorentzFwhmEv,
      gaussFwhmEv: Math.hypot(resolutionFwhmEv, point.gaussFwhmEv),
      asymmetry: level.asymmetry,
    });
    for (let i = 0; i < count; i++) {
      const offset = startEv + i * spacingEv - shifts[p];
      if (Math.abs(offset) < REACH_EV) values[i] += point.weight * line(offset);
    }
  });
  // Within the reach every line is given unit area: the tail of an asymmetric line has no area of its own.
  const area = values.reduce((sum, value) => sum + value, 0) * spacingEv;
  const steps = Math.ceil(fast.maxLossEv / fast.stepEv);
  const losses = surfaceLosses(level.surfaceExcitations, fast.layers[0].losses, steps);
  const lost = new Float64Array(count);
  losses.forEach((share, j) => {
    if (share === 0) return;
    const down = j === 0 ? 0 : Math.round((j - 0.5) * POINTS_PER_STEP);
    for (let i = 0; i + down < count; i++) lost[i] += (share * values[i + down]) / area;
  });
  return { startEv, values: lost };
}

/**
 * Intensities and depths of the levels.
 *
 * @param resolved The scenario.
 * @param engine The engine.
 * @param tally Histories.
 * @returns One entry per level.
 */
export function expectedLevels(
  resolved: ResolvedScenario,
  engine: FastEngineData,
  tally: Tally,
): ExpectedLevel[] {
  const fast = resolved.fast!;
  const { stride, depthFrom, depthCells } = lossLayout(engine.medium);
  const layerTops = fast.layers.map((_, l) =>
    fast.layers.slice(0, l).reduce((sum, layer) => sum + layer.thicknessNm, 0)
  );
  return fast.levels.map((level, s) => {
    const { byDepth, electrons, depthCellNm } = engine.direct[s];
    const depths = byDepth.slice();
    let noLoss = electrons;
    const byLosses = new Float64Array(MOST_LOSSES + 1);
    for (const group of tally.groups) {
      noLoss += group.forced[s * stride] / tally.histories;
      for (let n = 1; n < byLosses.length; n++) {
        byLosses[n] += group.events[s * stride + n] / tally.histories;
      }
      for (let d = 0; d < depthCells; d++) {
        depths[d] += group.forced[s * stride + depthFrom + d] / tally.histories;
      }
    }
    const total = depths.reduce((sum, value) => sum + value, 0);
    const depthsNm = Array.from(depths, (_, d) => layerTops[level.layer] + (d + 0.5) * depthCellNm);
    const emissionDepth = {
      topNm: layerTops[level.layer],
      cellNm: depthCellNm,
      depthsNm,
      densityPerNm: Array.from(depths, (value) => value / total / depthCellNm),
    };
    return {
      name: level.name,
      kineticEnergyEv: fast.photonEnergyEv - level.bindingEnergyEv + resolved.kineticEnergyShiftEv,
      noLossPerPhoton: noLoss * Math.exp(-level.surfaceExcitations),
      partialIntensities: noLoss > 0 ? Array.from(byLosses, (value, n) => n === 0 ? 1 : value / noLoss) : [],
      meanEscapeDepthNm: depths.reduce((sum, value, i) => sum + value * depthsNm[i], 0) / total,
      informationDepth95Nm: informationDepthNm(emissionDepth, 95),
      emissionDepth,
    };
  });
}

/**
 * Depth above which a share of the electrons without a loss start (information depth, ISO 18115-1).
 *
 * @param distribution Emission depth distribution of a level.
 * @param percent Share, percent, > 0..99.
 * @returns Depth from the surface, nm; linear inside a cell of the distribution.
 * @throws {RangeError} If the share is out of range.
 */
export function informationDepthNm(distribution: EmissionDepth, percent: number): number {
  if (!(percent > 0 && percent <= 99)) {
    throw new RangeError(cannot("give an information depth", "percent must be in > 0..99", percent));
  }
  const { topNm, cellNm, densityPerNm } = distribution;
  const wanted = percent / 100;
  let before = 0;
  let cell = 0;
  while (cell < densityPerNm.length - 1 && before + densityPerNm[cell] * cellNm < wanted) {
    before += densityPerNm[cell++] * cellNm;
  }
  const inside = densityPerNm[cell] > 0 ? (wanted - before) / (densityPerNm[cell] * cellNm) : 0;
  return topNm + (cell + inside) * cellNm;
}
