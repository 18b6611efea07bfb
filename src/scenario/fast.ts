import { cannot, InputError, type Notice } from "../base/mod.ts";
import type { Material } from "../data/mod.ts";
import { type LightPoint, mainPhotonEnergyEv } from "../light/mod.ts";
import {
  type BulkNumbers,
  lossDistribution,
  type LossModel,
  type MeanFreePathLaw,
  meanFreePathLaw,
  meanFreePathNotices,
  surfaceExcitationParameter,
} from "../losses/mod.ts";
import { fastLight } from "./light.ts";
import type { UserTables } from "./resolve.ts";
import type { Scenario } from "./types.ts";

/** A core level of one layer, resolved. */
export interface ResolvedLevel {
  /** Name, such as `Au 4f7/2`. */
  readonly name: string;
  /** Layer it is in, from the surface down. */
  readonly layer: number;
  /** Binding energy, eV. */
  readonly bindingEnergyEv: number;
  /** Natural width, eV. */
  readonly lorentzFwhmEv: number;
  /** Doniach-Sunjic asymmetry. */
  readonly asymmetry: number;
  /** Electrons per photon and nanometer of depth, 1/nm. */
  readonly perNm: number;
  /** Mean number of surface excitations on the way out. */
  readonly surfaceExcitations: number;
  /** Angular weight of emission toward the analyzer. */
  readonly directWeight: number;
}

/** A layer for fast electrons, resolved. */
export interface ResolvedFastLayer {
  /** Thickness, nm. */
  readonly thicknessNm: number;
  /** Inelastic mean free path at multiples of {@link ResolvedFast.rowEv}, at the middle of each row, nm. */
  readonly inelasticMeanFreePathNm: readonly number[];
  /** Transport mean free path, nm, or null. */
  readonly transportMeanFreePathNm: number | null;
  /** Probability of each loss in steps of {@link ResolvedFast.stepEv}. */
  readonly losses: readonly number[];
}

/** What is simulated above the ultraviolet: core levels and the losses of fast electrons. */
export interface ResolvedFast {
  /** Lines of the source. */
  readonly light: readonly LightPoint[];
  /** Photon energy of the strongest line, eV. */
  readonly photonEnergyEv: number;
  /** Photons per second on the spot. */
  readonly photonFluxPerS: number;
  /** Rows of the tables of lengths, eV. */
  readonly rowEv: number;
  /** Step of the losses, eV. */
  readonly stepEv: number;
  /** Largest loss, eV. */
  readonly maxLossEv: number;
  /** Layers from the surface down. */
  readonly layers: readonly ResolvedFastLayer[];
  /** Core levels that can be in the window. */
  readonly levels: readonly ResolvedLevel[];
}

/** Rows of the length tables, eV: mean free paths change by less than 1 % from one to the next above 200 eV. */
const ROW_EV = 4;
/** Below this energy no formula for fast electrons holds, eV. */
const LEAST_ENERGY_EV = 50;
/** Losses are normalized up to here, eV; larger ones are too rare to matter. */
const FULL_LOSS_EV = 1000;
/** C 1s at Al K-alpha, nm^2: 13 600 barn (J. Scofield, UCRL-51326 (1973), from memory). */
const CARBON_CROSS_SECTION_NM2 = 1.36e-6;
const AVOGADRO_PER_MOL = 6.02214076e23;
/** Oscillators disperse like free electrons: energy rises by the recoil energy (chosen; D. Penn, Phys. Rev. B 35, 482 (1987)). */
const DISPERSION = 1;

/**
 * Looks up what fast electrons need.
 *
 * Emission per depth is `n sigma / cos(incidence)` with the density n of formula units and the tabulated cross-section;
 * X-rays reach much deeper than electrons come from, so their attenuation is left out. The angular distribution of
 * electrons that do not scatter is `1 + beta/4 (3 cos^2 psi - 1)` for unpolarized light (J. Cooper, R. Zare, J. Chem. Phys.
 * 48, 942 (1968)), psi between light and analyzer, which stand on opposite sides of the normal.
 *
 * @param scenario The scenario.
 * @param materials Materials from the surface down.
 * @param tables The user's tables.
 * @param resolutionFwhmEv Resolution, eV.
 * @param kineticEnergyShiftEv Recorded kinetic energy minus energy above the Fermi level, eV.
 * @returns The resolved part and its warnings.
 * @throws {InputError} If no core level can be in the window.
 */
export function resolveFast(
  scenario: Scenario,
  materials: readonly Material[],
  tables: UserTables,
  resolutionFwhmEv: number,
  kineticEnergyShiftEv: number,
): { readonly fast: ResolvedFast; readonly warnings: readonly Notice[] } {
  const { acquisition, simulation, sample, geometry } = scenario;
  const light = fastLight(scenario.light);
  if (light.length === 0) {
    throw new InputError([{
      place: "/light/kind",
      message: cannot(
        "simulate photon energies above 60 eV",
        "the source must be an anode, monochromatedAluminum or a band",
        scenario.light.kind,
      ),
    }]);
  }
  const photonEnergyEv = mainPhotonEnergyEv(light);
  const stepEv = Math.min(0.1, Math.max(0.02, resolutionFwhmEv / 4));
  const { maxLossEv } = simulation;
  const thicknesses = [...sample.layers.map((layer) => layer.thicknessNm), Infinity];
  const angle = ((geometry.incidenceAngleDeg + geometry.emissionAngleDeg) * Math.PI) / 180;
  // Recorded energies of a level plus the reach of the source's lines must meet the window or its losses must.
  const lowEv = acquisition.startEv - kineticEnergyShiftEv;
  const highEv = acquisition.endEv - kineticEnergyShiftEv;
  const reachEv = Math.max(...light.map((point) => point.energyEv)) - photonEnergyEv + 10;
  const levels = materials.flatMap((chosen, layer) => {
    const perNm3 = (chosen.bulk.densityGPerCm3.value * AVOGADRO_PER_MOL) /
      (chosen.bulk.molarMassGPerMol.value * 1e21);
    return chosen.coreLevels.flatMap((level): ResolvedLevel[] => {
      const energyEv = photonEnergyEv - level.bindingEnergyEv.value;
      if (energyEv - maxLossEv > highEv || energyEv + reachEv < lowEv || energyEv < LEAST_ENERGY_EV) {
        return [];
      }
      const crossSection = CARBON_CROSS_SECTION_NM2 * level.relativeCrossSection.value;
      return [{
        name: level.name,
        layer,
        bindingEnergyEv: level.bindingEnergyEv.value,
        lorentzFwhmEv: level.lorentzFwhmEv.value,
        asymmetry: level.asymmetry.value,
        perNm: (perNm3 * crossSection) / Math.cos((geometry.incidenceAngleDeg * Math.PI) / 180),
        surfaceExcitations: sample.surfaceExcitationFactor === null ? 0 : surfaceExcitationParameter(
          energyEv,
          geometry.emissionAngleDeg,
          sample.surfaceExcitationFactor,
        ),
        directWeight: Math.max(0, 1 + 0.25 * level.beta.value * (3 * Math.cos(angle) ** 2 - 1)),
      }];
    });
  });
  if (levels.length === 0) {
    throw new InputError([{
      place: "/acquisition",
      message: cannot(
        "simulate core levels",
        `the window must hold a line or its losses of ${
          materials.flatMap((chosen) => chosen.coreLevels.map((level) => level.name)).join(", ") ||
          "the sample"
        }`,
        `${acquisition.startEv}..${acquisition.endEv} eV`,
      ),
    }]);
  }
  const energies = levels.map((level) => photonEnergyEv - level.bindingEnergyEv);
  const highest = Math.max(...energies);
  const lowest = Math.max(LEAST_ENERGY_EV, Math.min(...energies) - maxLossEv);
  const rows = Math.floor(highest / ROW_EV) + 2;
  const warnings: Notice[] = [];
  const layers = materials.map((chosen, l): ResolvedFastLayer => {
    const isSubstrate = l === materials.length - 1;
    const law = lawOf(chosen, scenario, isSubstrate ? tables : {});
    warnings.push(...meanFreePathNotices(law, lowest, highest, `/sample (${chosen.id})`));
    return {
      thicknessNm: thicknesses[l],
      inelasticMeanFreePathNm: Array.from(
        { length: rows },
        (_, row) => law.lengthNm(Math.max(LEAST_ENERGY_EV / 2, (row + 0.5) * ROW_EV)),
      ),
      transportMeanFreePathNm: isSubstrate
        ? sample.transportMeanFreePathNm
        : sample.layers[l].transportMeanFreePathNm,
      losses: Array.from(
        lossDistribution(lossModel(chosen, isSubstrate ? tables : {}), {
          primaryEnergyEv: highest,
          maxLossEv: Math.min(highest, FULL_LOSS_EV),
          stepEv,
        }).probabilities,
      ),
    };
  });
  return {
    fast: {
      light,
      photonEnergyEv,
      photonFluxPerS: scenario.light.photonFluxPerS,
      rowEv: ROW_EV,
      stepEv,
      maxLossEv,
      layers,
      levels,
    },
    warnings,
  };
}

function bulkOf({ bulk }: Material): BulkNumbers {
  return {
    densityGPerCm3: bulk.densityGPerCm3.value,
    molarMassGPerMol: bulk.molarMassGPerMol.value,
    valenceElectrons: bulk.valenceElectrons.value,
    gapEv: bulk.gapEv.value,
  };
}

function lawOf(chosen: Material, scenario: Scenario, tables: UserTables): MeanFreePathLaw {
  if (tables.meanFreePath) {
    const { energiesEv, values } = tables.meanFreePath;
    return meanFreePathLaw({ kind: "table", energiesEv, lengthsNm: values });
  }
  if (scenario.sample.fastMeanFreePath === "TPP-2M") {
    return meanFreePathLaw({ kind: "tpp2m", relativistic: true, bulk: bulkOf(chosen) });
  }
  return meanFreePathLaw({
    kind: "seah-dench",
    substance: chosen.bulk.gapEv.value > 3 ? "inorganic" : "element",
  });
}

function lossModel({ loss }: Material, tables: UserTables): LossModel {
  if (tables.loss) return { kind: "table", lossesEv: tables.loss.energiesEv, densities: tables.loss.values };
  if (loss.kind === "tougaard") {
    return {
      kind: "tougaard",
      bEv2: loss.bEv2.value,
      cEv2: loss.cEv2.value,
      dEv2: loss.dEv2?.value ?? null,
      onsetEv: loss.onsetEv.value,
    };
  }
  return {
    kind: "oscillators",
    terms: loss.terms.map((term) => ({
      energyEv: term.energyEv.value,
      fwhmEv: term.fwhmEv.value,
      strength: term.strength.value,
    })),
    dispersion: DISPERSION,
    onsetEv: loss.onsetEv.value,
  };
}
