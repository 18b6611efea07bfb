import { cannot, InputError, type Notice, type Problem, suggest } from "../base/mod.ts";
import {
  BOLTZMANN_EV_PER_K,
  HC_EV_NM,
  lampLines,
  type Material,
  material,
  opticalConstantsAt,
} from "../data/mod.ts";
import { accelerationEv, hemisphereResolutionEv, kineticEnergyShiftEv } from "../instrument/mod.ts";
import { absorption, type BandModel, densityOfStates } from "../sample/mod.ts";
import type { AcquisitionSettings, Scenario } from "./types.ts";

/** A table that the user keeps in a CSV file beside the scenario. */
export interface UserTable {
  /** Energies from the Fermi level, eV, ascending, shape (n). */
  readonly energiesEv: readonly number[];
  /** Values, shape (n): states per eV, or lengths in nm. */
  readonly values: readonly number[];
}

/** Tables named by the scenario, already read. */
export interface UserTables {
  /** For `sample.densityOfStatesFile`. */
  readonly densityOfStates?: UserTable;
  /** For `sample.meanFreePathFile`. */
  readonly meanFreePath?: UserTable;
}

/** One photon energy, resolved. */
export interface ResolvedLine {
  /** Name of the line. */
  readonly name: string;
  /** Photon energy, eV. */
  readonly energyEv: number;
  /** Full width at half maximum, eV. */
  readonly fwhmEv: number;
  /** Relative number of photons absorbed, the main line about 1. */
  readonly absorbedWeight: number;
  /** Mean absorption depth along the normal, nm. */
  readonly absorptionDepthNm: number;
}

/** A scenario in which everything is a number; plain data. */
export interface ResolvedScenario {
  /** Title of the scenario. */
  readonly title: string;
  /** Work function, eV. */
  readonly workFunctionEv: number;
  /** Where the work function comes from. */
  readonly workFunctionSource: string;
  /** Temperature, K. */
  readonly temperatureK: number;
  /** kT, eV. */
  readonly thermalEnergyEv: number;
  /** Density of states: the material's band model, or the user's table. */
  readonly states:
    | { readonly kind: "model"; readonly model: BandModel }
    | ({ readonly kind: "table" } & UserTable);
  /** Depth of the band bottom below the Fermi level, eV. */
  readonly bandBottomBelowFermiEv: number;
  /** Inelastic mean free path: one value that fixes the model's law, or the user's table. */
  readonly meanFreePath:
    | { readonly kind: "reference"; readonly energyEv: number; readonly lengthNm: number }
    | ({ readonly kind: "table" } & UserTable);
  /** Transport mean free path, nm, or null. */
  readonly transportMeanFreePathNm: number | null;
  /** Surface barrier. */
  readonly barrier: "classical" | "quantum";
  /** Photon energies, the main one first. */
  readonly lines: readonly ResolvedLine[];
  /** Photon energy of the main line, eV. */
  readonly photonEnergyEv: number;
  /** Photons absorbed per second, all lines. */
  readonly absorbedPhotonsPerS: number;
  /** Half-angle of the acceptance cone, degrees. */
  readonly acceptanceHalfAngleDeg: number;
  /** Angle of the analyzer axis from the normal, degrees. */
  readonly emissionAngleDeg: number;
  /** Analyzer work function, eV. */
  readonly analyzerWorkFunctionEv: number;
  /** Sample bias, V. */
  readonly biasV: number;
  /** Recorded kinetic energy minus energy above the Fermi level, eV. */
  readonly kineticEnergyShiftEv: number;
  /** Energy gained between surface and analyzer, eV. */
  readonly accelerationEv: number;
  /** Resolution, full width at half maximum, eV. */
  readonly resolutionFwhmEv: number;
  /** Exponent of the transmission. */
  readonly transmissionExponent: number;
  /** Share of arriving electrons that is counted. */
  readonly detectionFraction: number;
  /** What is measured. */
  readonly acquisition: AcquisitionSettings;
  /** Histories wanted. */
  readonly histories: number;
  /** Seed. */
  readonly seed: number;
  /** Step of the transport grid, eV. */
  readonly energyStepEv: number;
  /** What a user should know before believing the result. */
  readonly warnings: readonly Notice[];
}

/** The pair kernel leaves out core levels and plasmons, so photon energies end here, eV. */
const HIGHEST_PHOTON_EV = 60;
/** Bins of the transport grid; the tables grow with the square. */
const MOST_BINS = 4000;
/** A satellite's copy of deeper states that reaches this share of the Fermi step disturbs the fit of the edge. */
const GHOST_SHARE = 0.1;

/**
 * Looks up every name of a scenario and checks what only makes sense together.
 *
 * @param scenario Checked scenario.
 * @param tables The user's tables; each must be there when the scenario names its file.
 * @returns Numbers only, with warnings.
 * @throws {InputError} If a name is unknown or a combination impossible; all problems at once.
 */
export function resolveScenario(scenario: Scenario, tables: UserTables = {}): ResolvedScenario {
  const problems: Problem[] = [];
  const attempt = <T>(place: string, lookUp: () => T): T | undefined => {
    try {
      return lookUp();
    } catch (error) {
      if (error instanceof InputError) problems.push(...error.problems.map((p) => ({ ...p, place })));
      else if (error instanceof RangeError) problems.push({ place, message: error.message });
      else throw error;
      return undefined;
    }
  };
  const { sample, light, geometry, analyzer, biasV } = scenario;
  const chosen = attempt("/sample/material", () => material(sample.material));
  const faceSource = chosen && attempt("/sample/face", () => faceWorkFunction(chosen, sample.face));
  if (chosen && chosen.valenceMaximumBelowFermiEv !== null && sample.densityOfStatesFile === null) {
    problems.push({
      place: "/sample/material",
      message: cannot("simulate", "a material with a gap must have a densityOfStatesFile", sample.material),
    });
  }
  const lines = light.kind === "lamp"
    ? attempt("/light/lamp", () => lampLines(light.lamp).slice(0, light.satellites ? undefined : 1))
    : [{ name: "band", energyEv: light.centerEv, relativeIntensity: 1 }];
  const fwhmEv = light.kind === "band" ? light.fwhmEv : 0;
  const optics = chosen && lines
    ? lines.map((line) =>
      attempt(light.kind === "lamp" ? "/light/lamp" : "/light/centerEv", () => {
        if (line.energyEv > HIGHEST_PHOTON_EV) {
          throw new RangeError(
            cannot(
              "simulate light",
              `photon energies must be <= ${HIGHEST_PHOTON_EV} eV`,
              `${line.energyEv} eV`,
            ),
          );
        }
        return absorption(
          opticalConstantsAt(chosen, line.energyEv),
          HC_EV_NM / line.energyEv,
          geometry.incidenceAngleDeg,
        );
      })
    )
    : undefined;
  const highest = Math.max(...(lines ?? []).map((line) => line.energyEv + 2 * fwhmEv), 0);
  if (highest / scenario.simulation.energyStepEv > MOST_BINS) {
    problems.push({
      place: "/simulation/energyStepEv",
      message: cannot(
        "simulate",
        `energyStepEv must be >= ${(highest / MOST_BINS).toPrecision(2)} eV at ${
          highest.toFixed(2)
        } eV photons`,
        `${scenario.simulation.energyStepEv} eV`,
      ),
    });
  }
  for (
    const [key, table] of [["densityOfStatesFile", "densityOfStates"], [
      "meanFreePathFile",
      "meanFreePath",
    ]] as const
  ) {
    if (sample[key] !== null && tables[table] === undefined) {
      problems.push({
        place: `/sample/${key}`,
        message: cannot("use scenario", "the file must be readable", sample[key]),
      });
    }
  }
  if (problems.length > 0 || !chosen || !faceSource || !lines || !optics) throw new InputError(problems);

  const workFunctionEv = sample.workFunctionEv ?? faceSource.value;
  const resolutionFwhmEv = analyzer.resolution.kind === "fwhm"
    ? analyzer.resolution.fwhmEv
    : hemisphereResolutionEv(
      analyzer.resolution.passEnergyEv,
      analyzer.resolution.slitWidthMm,
      analyzer.resolution.meanRadiusMm,
      (analyzer.resolution.slitHalfAngleDeg * Math.PI) / 180,
    );
  const resolvedLines = lines.map((line, i) => ({
    name: line.name,
    energyEv: line.energyEv,
    fwhmEv,
    absorbedWeight: line.relativeIntensity * (1 - optics[i]!.reflectedFraction),
    absorptionDepthNm: optics[i]!.meanDepthNm,
  }));
  const bandModel: BandModel = {
    bandBottomBelowFermiEv: chosen.bandBottomBelowFermiEv.value,
    spElectrons: chosen.spElectrons.value,
    lobes: chosen.dLobes.map((lobe) => ({
      centerBindingEv: lobe.centerBindingEv.value,
      fwhmEv: lobe.fwhmEv.value,
      electrons: lobe.electrons.value,
    })),
  };
  const resolved: Omit<ResolvedScenario, "warnings"> = {
    title: scenario.title,
    workFunctionEv,
    workFunctionSource: sample.workFunctionEv === null ? faceSource.source : "scenario",
    temperatureK: sample.temperatureK,
    thermalEnergyEv: BOLTZMANN_EV_PER_K * sample.temperatureK,
    states: tables.densityOfStates
      ? { kind: "table", ...tables.densityOfStates }
      : { kind: "model", model: bandModel },
    bandBottomBelowFermiEv: bandModel.bandBottomBelowFermiEv,
    meanFreePath: tables.meanFreePath ? { kind: "table", ...tables.meanFreePath } : {
      kind: "reference",
      energyEv: chosen.lowEnergyMeanFreePath.energyAboveFermiEv.value,
      lengthNm: chosen.lowEnergyMeanFreePath.lengthNm.value,
    },
    transportMeanFreePathNm: sample.transportMeanFreePathNm,
    barrier: sample.barrier,
    lines: resolvedLines,
    photonEnergyEv: lines[0].energyEv,
    absorbedPhotonsPerS: light.photonFluxPerS *
      resolvedLines.reduce((sum, line) => sum + line.absorbedWeight, 0),
    acceptanceHalfAngleDeg: analyzer.acceptanceHalfAngleDeg,
    emissionAngleDeg: geometry.emissionAngleDeg,
    analyzerWorkFunctionEv: analyzer.workFunctionEv,
    biasV,
    kineticEnergyShiftEv: kineticEnergyShiftEv(analyzer.workFunctionEv, biasV),
    accelerationEv: accelerationEv(workFunctionEv, analyzer.workFunctionEv, biasV),
    resolutionFwhmEv,
    transmissionExponent: analyzer.transmissionExponent,
    detectionFraction: analyzer.detectionFraction,
    acquisition: scenario.acquisition,
    histories: scenario.simulation.histories,
    seed: scenario.simulation.seed,
    energyStepEv: scenario.simulation.energyStepEv,
  };
  return { ...resolved, warnings: foresee(resolved) };
}

function faceWorkFunction(chosen: Material, face: string): { value: number; source: string } {
  const faces = Object.keys(chosen.workFunctions);
  if (Object.hasOwn(chosen.workFunctions, face)) return chosen.workFunctions[face];
  const near = suggest(face, faces);
  throw new InputError([{
    place: "",
    message: cannot(
      "look up work function",
      `face must be one of ${faces.join(", ")} for ${chosen.id}${near ? ` (did you mean ${near}?)` : ""}`,
      face,
    ),
  }]);
}

/** What will hide or disturb the edges, from the numbers alone. */
function foresee(r: Omit<ResolvedScenario, "warnings">): Notice[] {
  const warnings: Notice[] = [];
  const warn = (code: string, place: string, message: string): void =>
    void warnings.push({ code, place, message });
  const { startEv, endEv, stepEv } = r.acquisition;
  const cutoffEv = r.workFunctionEv + r.kineticEnergyShiftEv;
  const fermiEv = r.photonEnergyEv + r.kineticEnergyShiftEv;
  const show = (energyEv: number): string => `${energyEv.toFixed(3)} eV`;
  if (r.photonEnergyEv <= r.workFunctionEv) {
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
  if (stepEv > 0.6 * r.resolutionFwhmEv) {
    warn(
      "step-coarse",
      "/acquisition/stepEv",
      `the step ${show(stepEv)} is coarse for a resolution of ${
        show(r.resolutionFwhmEv)
      }: take at most half of it`,
    );
  }
  if (r.biasV > 0) {
    warn(
      "bias-retards",
      "/biasV",
      `a positive bias of ${r.biasV} V retards electrons; negative values accelerate them`,
    );
  }
  if (r.emissionAngleDeg > r.acceptanceHalfAngleDeg && r.accelerationEv > 0) {
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
  if (r.states.kind === "model" && r.lines.length > 1) {
    const states = densityOfStates(r.states.model);
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
