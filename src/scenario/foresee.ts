import type { Notice } from "../base/mod.ts";
import { accelerationEv } from "../instrument/mod.ts";
import { densityOfStates } from "../sample/mod.ts";
import type { ResolvedScenario } from "./resolve.ts";

/** A satellite's copy of deeper states that reaches this share of the Fermi step disturbs the fit of the edge. */
const GHOST_SHARE = 0.1;

/**
 * What will hide or disturb the edges, from the numbers alone.
 *
 * @param r The resolved scenario.
 * @returns Warnings.
 */
export function foresee(r: Omit<ResolvedScenario, "warnings">): Notice[] {
  const warnings: Notice[] = [];
  const warn = (code: string, place: string, message: string): void =>
    void warnings.push({ code, place, message });
  const { startEv, endEv, stepEv } = r.acquisition;
  const lowest = Math.min(...r.surface.map((part) => part.workFunctionEv));
  const cutoffEv = lowest + r.kineticEnergyShiftEv;
  const fermiEv = r.photonEnergyEv + r.kineticEnergyShiftEv;
  const show = (energyEv: number): string => `${energyEv.toFixed(3)} eV`;
  if (r.surface.some((part) => part.workFunctionEv !== lowest)) {
    warn(
      "several-work-functions",
      "/sample/surface",
      `the surface has work functions from ${show(lowest)} to ${
        show(Math.max(...r.surface.map((part) => part.workFunctionEv)))
      }, area mean ${show(r.workFunctionEv)}: the cutoff is that of the lowest, not of the mean`,
    );
  }
  for (const [i, layer] of r.layers.slice(0, -1).entries()) {
    if (layer.meanFreePath.kind === "reference" && layer.thicknessNm > 20 * layer.meanFreePath.lengthNm) {
      warn(
        "layer-opaque",
        `/sample/layers/${i}/thicknessNm`,
        `no electron of what lies below gets through ${layer.thicknessNm} nm of ${layer.material} without losses`,
      );
    }
  }
  if (stepEv > 0.6 * r.resolutionFwhmEv) {
    warn(
      "step-coarse",
      "/acquisition/stepEv",
      `the step ${show(stepEv)} is coarse for a resolution of ${
        show(r.resolutionFwhmEv)
      }: take at most half of it`,
    );
  }
  if (r.fast !== null) return warnings; // the edges below are those of an ultraviolet spectrum
  if (r.photonEnergyEv <= lowest) {
    warn(
      "below-threshold",
      "/light",
      `the photon energy ${show(r.photonEnergyEv)} is not above the work function ${
        show(r.workFunctionEv)
      }: only the thermal tail of the electrons can leave`,
    );
  }
  if (cutoffEv <= 0) {
    warn(
      "cutoff-hidden",
      "/biasV",
      `the cutoff would be recorded at ${
        show(cutoffEv)
      }, below the analyzer's own limit at 0 eV: apply a bias below ${(r.biasV + cutoffEv).toFixed(2)} V`,
    );
  } else if (startEv > cutoffEv - r.resolutionFwhmEv) {
    warn(
      "cutoff-outside",
      "/acquisition/startEv",
      `the window starts at ${show(startEv)}, above the foot of the cutoff at ${show(cutoffEv)}`,
    );
  }
  if (endEv < fermiEv + r.resolutionFwhmEv) {
    warn(
      "fermi-edge-outside",
      "/acquisition/endEv",
      `the window ends at ${show(endEv)}, before the Fermi edge at ${show(fermiEv)} is over`,
    );
  }
  if (r.biasV > 0) {
    warn(
      "bias-retards",
      "/biasV",
      `a positive bias of ${r.biasV} V retards electrons; negative values accelerate them`,
    );
  }
  const gained = accelerationEv(r.workFunctionEv, r.analyzerWorkFunctionEv, r.biasV);
  if (r.emissionAngleDeg > r.acceptanceHalfAngleDeg && gained > 0) {
    const tangent = Math.tan(((r.emissionAngleDeg - r.acceptanceHalfAngleDeg) * Math.PI) / 180);
    warn(
      "cutoff-displaced",
      "/geometry/emissionAngleDeg",
      `off normal the slowest electrons miss the analyzer: the cutoff appears ${
        show(Math.max(0, cutoffEv) * tangent * tangent)
      } too high`,
    );
  }
  if (r.energyStepEv > 0.5 * r.resolutionFwhmEv) {
    warn(
      "grid-coarse",
      "/simulation/energyStepEv",
      `the transport grid of ${show(r.energyStepEv)} is coarse for a resolution of ${
        show(r.resolutionFwhmEv)
      }`,
    );
  }
  const [uppermost] = r.layers;
  if (
    uppermost.states.kind === "model" && uppermost.states.model.gap === null && r.lines.length > 1 &&
    r.lines.every((line) => line.photons.length === 1)
  ) {
    const states = densityOfStates(uppermost.states.model);
    for (const line of r.lines.slice(1)) {
      const shift = line.energyEv - r.photonEnergyEv;
      const share = (line.absorbedWeight * states(-shift)) / (r.lines[0].absorbedWeight * states(0));
      if (shift < 0 && shift > -3) {
        warn(
          "satellite-edge-below",
          "/light",
          `${line.name} makes a second Fermi edge ${show(-shift)} below the main one`,
        );
      } else if (shift > 0 && share > GHOST_SHARE) {
        warn(
          "satellite-under-edge",
          "/light",
          `${line.name} puts its copy of the states at ${show(shift)} binding energy under the Fermi edge, ${
            (100 * share).toFixed(0)
          } % of its step`,
        );
      }
    }
  }
  return warnings;
}
