import { cannot, InputError, type Notice, type Problem, suggest } from "../base/mod.ts";
import { BOLTZMANN_EV_PER_K, HC_EV_NM, type Material, material, opticalConstantsAt } from "../data/mod.ts";
import { hemisphereResolutionEv, kineticEnergyShiftEv } from "../instrument/mod.ts";
import { type BandModel, layeredAbsorption, type Polarization } from "../sample/mod.ts";
import { type ResolvedFast, resolveFast } from "./fast.ts";
import { foresee } from "./foresee.ts";
import { type LightGroup, lightGroups } from "./light.ts";
import { surfaceParts } from "./surface.ts";
import type { AcquisitionSettings, BandBendingSettings, Scenario } from "./types.ts";

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
  /** For `sample.materialFile`. */
  readonly material?: Material;
  /** For `sample.lossFile`: losses, eV, and their density. */
  readonly loss?: UserTable;
  /** For `light.file`: photon energies, eV, and photons per eV. */
  readonly light?: UserTable;
}

/** One photon energy, resolved. */
export interface ResolvedLine {
  /** Name of the line. */
  readonly name: string;
  /** Mean photon energy, eV. */
  readonly energyEv: number;
  /** Its photon energies, eV, with shares that add up to 1. */
  readonly photons: readonly { readonly energyEv: number; readonly weight: number }[];
  /** Relative number of photons absorbed, all layers; adds up with the reflected ones to the line's share. */
  readonly absorbedWeight: number;
  /** Where they are absorbed, layer by layer from the surface down. */
  readonly absorbed: readonly {
    /** Share of the absorbed photons; all layers add up to 1. */
    readonly share: number;
    /** Decay length along the normal, nm; Infinity where nothing is absorbed. */
    readonly depthNm: number;
  }[];
}

/** A film or the substrate, resolved. */
export interface ResolvedLayer {
  /** Material. */
  readonly material: string;
  /** Thickness, nm; Infinity for the substrate. */
  readonly thicknessNm: number;
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
}

/** A part of the surface, resolved. */
export interface ResolvedSurfacePart {
  /** Share of the area; all parts add up to 1. */
  readonly share: number;
  /** Work function that electrons have to overcome, eV. */
  readonly workFunctionEv: number;
  /** Tilt of its facets, degrees. */
  readonly facetTiltDeg: number;
}

/** A scenario in which everything is a number; plain data. */
export interface ResolvedScenario {
  /** Title of the scenario. */
  readonly title: string;
  /** Work function, eV: the area mean where the surface is not uniform. */
  readonly workFunctionEv: number;
  /** Where the work function comes from. */
  readonly workFunctionSource: string;
  /** Parts of the surface. */
  readonly surface: readonly ResolvedSurfacePart[];
  /** Temperature, K. */
  readonly temperatureK: number;
  /** kT, eV. */
  readonly thermalEnergyEv: number;
  /** Films from the surface down and the substrate. */
  readonly layers: readonly ResolvedLayer[];
  /** Band bending of the substrate, or null. */
  readonly bandBending: BandBendingSettings | null;
  /** Valence-band maximum of the substrate below the Fermi level, eV; null for a metal. */
  readonly valenceMaximumBelowFermiEv: number | null;
  /** Band gap of the substrate, eV; 0 for a metal. */
  readonly gapEv: number;
  /** Surface barrier. */
  readonly barrier: "classical" | "quantum";
  /** Photon energies, the main one first; empty above the ultraviolet. */
  readonly lines: readonly ResolvedLine[];
  /** Core levels and losses of fast electrons; null in the ultraviolet. */
  readonly fast: ResolvedFast | null;
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
  /** Recorded kinetic energy minus energy above the Fermi level, charging included, eV. */
  readonly kineticEnergyShiftEv: number;
  /** Resolution with the spread of the charging, full width at half maximum, eV. */
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

/** The pair kernel leaves out core levels and plasmons: above this photon energy the loss kernel takes over, eV. */
const HIGHEST_PAIR_EV = 60;
/** No surface is known below this, and the grid needs a vacuum level above the Fermi level, eV. */
const LEAST_WORK_FUNCTION_EV = 0.3;
/** Bins of the transport grid; the tables grow with the square. */
const MOST_BINS = 4000;

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
  const { sample, geometry, analyzer, biasV } = scenario;
  const lookUp = (id: string): Material => (tables.material?.id === id ? tables.material : material(id));
  const substrate = attempt("/sample/material", () => lookUp(sample.material));
  const films = sample.layers.map((layer, i) =>
    attempt(`/sample/layers/${i}/material`, () => lookUp(layer.material))
  );
  const top = films.length > 0 ? films[0] : substrate;
  const face = top && attempt("/sample/face", () => faceWorkFunction(top, sample.face));
  const light = attempt("/light", () => lightGroups(scenario.light, tables));
  if (substrate && sample.valenceMaximumBelowFermiEv !== null && !substrate.valenceMaximumBelowFermiEv) {
    problems.push({
      place: "/sample/valenceMaximumBelowFermiEv",
      message: cannot(
        "use scenario",
        `it must be null for ${substrate.id}, which has no band gap`,
        "a number",
      ),
    });
  }
  const materials = [...films, substrate].flatMap((chosen) => chosen ?? []);
  const thicknesses = [...sample.layers.map((layer) => layer.thicknessNm), Infinity];
  const highest = (light?.groups ?? []).flatMap((group) => group.photons).reduce(
    (high, photon) => Math.max(high, photon.energyEv),
    0,
  );
  const isFast = highest > HIGHEST_PAIR_EV;
  const absorbed = light && !isFast && materials.length === thicknesses.length
    ? light.groups.map((group) =>
      attempt(LIGHT_PLACES[scenario.light.kind], () =>
        absorbedLine(group, materials, thicknesses, {
          incidenceAngleDeg: geometry.incidenceAngleDeg,
          polarization: scenario.light.polarization,
        }))
    )
    : [];
  for (const [key, table] of USER_FILES) {
    if (sample[key] !== null && tables[table] === undefined) {
      problems.push({
        place: `/sample/${key}`,
        message: cannot("use scenario", "the file must be readable", sample[key]),
      });
    }
  }
  if (!isFast && highest / scenario.simulation.energyStepEv > MOST_BINS) {
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
  if (problems.length > 0 || !top || !substrate || !face || !light) throw new InputError(problems);
  // A weak line beyond the optical tables is left out with a warning; the main line must be inside.
  const lines = absorbed.flatMap((line) => (line === null || line === undefined ? [] : [line]));
  const omitted = isFast
    ? []
    : light.groups.filter((line) => !lines.some((known) => known.name === line.name));

  const { charging } = sample;
  const ownResolutionEv = analyzer.resolution.kind === "fwhm"
    ? analyzer.resolution.fwhmEv
    : hemisphereResolutionEv(
      analyzer.resolution.passEnergyEv,
      analyzer.resolution.slitWidthMm,
      analyzer.resolution.meanRadiusMm,
      (analyzer.resolution.slitHalfAngleDeg * Math.PI) / 180,
    );
  const resolutionFwhmEv = Math.hypot(ownResolutionEv, charging.fwhmEv);
  const shiftEv = kineticEnergyShiftEv(analyzer.workFunctionEv, biasV) - charging.shiftEv;
  const fast = isFast ? resolveFast(scenario, materials, tables, resolutionFwhmEv, shiftEv) : null;
  const surface = surfaceParts(sample.surface, sample.workFunctionEv ?? face.value, resolutionFwhmEv);
  const lowest = Math.min(...surface.parts.map((part) => part.workFunctionEv));
  if (!(lowest >= LEAST_WORK_FUNCTION_EV)) {
    throw new InputError([{
      place: "/sample/surface",
      message: cannot(
        "simulate",
        `every work function must stay >= ${LEAST_WORK_FUNCTION_EV} eV after spread, dipoles and field`,
        `${lowest.toFixed(3)} eV`,
      ),
    }]);
  }
  const maximum = sample.valenceMaximumBelowFermiEv ?? substrate.valenceMaximumBelowFermiEv?.value ?? null;
  const layers = materials.map((chosen, i): ResolvedLayer => {
    const isSubstrate = i === materials.length - 1;
    const model = bandModel(chosen, isSubstrate ? maximum : null);
    return {
      material: chosen.id,
      thicknessNm: thicknesses[i],
      states: isSubstrate && tables.densityOfStates
        ? { kind: "table", ...tables.densityOfStates }
        : { kind: "model", model },
      bandBottomBelowFermiEv: model.bandBottomBelowFermiEv,
      meanFreePath: isSubstrate && tables.meanFreePath ? { kind: "table", ...tables.meanFreePath } : {
        kind: "reference",
        energyEv: chosen.lowEnergyMeanFreePath.energyAboveFermiEv.value,
        lengthNm: chosen.lowEnergyMeanFreePath.lengthNm.value,
      },
      transportMeanFreePathNm: isSubstrate
        ? sample.transportMeanFreePathNm
        : sample.layers[i].transportMeanFreePathNm,
    };
  });
  const resolved: Omit<ResolvedScenario, "warnings"> = {
    title: scenario.title,
    workFunctionEv: surface.meanWorkFunctionEv,
    workFunctionSource: sample.workFunctionEv === null && sample.surface.patches.length === 0
      ? face.source
      : "scenario",
    surface: surface.parts,
    temperatureK: sample.temperatureK,
    thermalEnergyEv: BOLTZMANN_EV_PER_K * sample.temperatureK,
    layers,
    bandBending: sample.bandBending,
    valenceMaximumBelowFermiEv: maximum,
    gapEv: substrate.bulk.gapEv.value,
    barrier: sample.barrier,
    lines,
    fast: fast?.fast ?? null,
    photonEnergyEv: fast?.fast.photonEnergyEv ?? lines[0].energyEv,
    absorbedPhotonsPerS: scenario.light.photonFluxPerS *
      lines.reduce((sum, line) => sum + line.absorbedWeight, 0),
    acceptanceHalfAngleDeg: analyzer.acceptanceHalfAngleDeg,
    emissionAngleDeg: geometry.emissionAngleDeg,
    analyzerWorkFunctionEv: analyzer.workFunctionEv,
    biasV,
    kineticEnergyShiftEv: shiftEv,
    resolutionFwhmEv,
    transmissionExponent: analyzer.transmissionExponent,
    detectionFraction: analyzer.detectionFraction,
    acquisition: scenario.acquisition,
    histories: scenario.simulation.histories,
    seed: scenario.simulation.seed,
    energyStepEv: scenario.simulation.energyStepEv,
  };
  const left = omitted.map((line): Notice => ({
    code: "line-omitted",
    place: "/light",
    message: `${line.name} at ${
      line.energyEv.toFixed(2)
    } eV is left out: the optical constants end before it`,
  }));
  return {
    ...resolved,
    warnings: [...light.warnings, ...left, ...(fast?.warnings ?? []), ...foresee(resolved)],
  };
}

/** Where a source says which photon energies it has. */
const LIGHT_PLACES: Readonly<Record<Scenario["light"]["kind"], string>> = {
  lamp: "/light/lamp",
  anode: "/light/anode",
  monochromatedAluminum: "/light/kind",
  band: "/light/centerEv",
  table: "/light/file",
  thermal: "/light/highEv",
  laser: "/light/photonEnergyEv",
};

const USER_FILES = [
  ["materialFile", "material"],
  ["lossFile", "loss"],
  ["densityOfStatesFile", "densityOfStates"],
  ["meanFreePathFile", "meanFreePath"],
] as const;

/** Where a line is absorbed; null for a weak line beyond an optical table. */
function absorbedLine(
  group: LightGroup,
  materials: readonly Material[],
  thicknessesNm: readonly number[],
  light: { readonly incidenceAngleDeg: number; readonly polarization: Polarization },
): ResolvedLine | null {
  const { name, energyEv, photons } = group;
  const indices = materials.map((chosen) => {
    try {
      return opticalConstantsAt(chosen, energyEv);
    } catch (error) {
      if (error instanceof RangeError && !group.needed) return null;
      throw error;
    }
  }).flatMap((index) => index ?? []);
  if (indices.length < materials.length) return null;
  const films = indices.slice(0, -1).map((index, i) => ({ index, thicknessNm: thicknessesNm[i] }));
  const { absorbedFractions, meanDepthsNm } = layeredAbsorption(films, indices[indices.length - 1], {
    wavelengthNm: HC_EV_NM / energyEv,
    ...light,
  });
  const total = absorbedFractions.reduce((sum, share) => sum + share, 0);
  return {
    name,
    energyEv,
    photons,
    absorbedWeight: group.weight * total,
    absorbed: absorbedFractions.map((share, i) => ({
      share: total > 0 ? share / total : 0,
      depthNm: meanDepthsNm[i],
    })),
  };
}

function bandModel(chosen: Material, maximumBelowFermiEv: number | null): BandModel {
  const maximum = maximumBelowFermiEv ?? chosen.valenceMaximumBelowFermiEv?.value ?? null;
  return {
    bandBottomBelowFermiEv: chosen.bandBottomBelowFermiEv.value,
    spElectrons: chosen.spElectrons.value,
    lobes: chosen.dLobes.map((lobe) => ({
      // Doping moves all bands of a semiconductor together.
      centerBindingEv: lobe.centerBindingEv.value +
        (maximum === null ? 0 : maximum - chosen.valenceMaximumBelowFermiEv!.value),
      fwhmEv: lobe.fwhmEv.value,
      electrons: lobe.electrons.value,
    })),
    gap: maximum === null || chosen.bulk.gapEv.value === 0
      ? null
      : { valenceMaximumBelowFermiEv: maximum, widthEv: chosen.bulk.gapEv.value },
  };
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
