import { z } from "zod";
import { cannot, InputError, suggest } from "../base/mod.ts";
import { type Cited, cited, type Confidence, confidence } from "./cited.ts";
import { HC_EV_NM } from "./constants.ts";
import Ag from "./materials/Ag.json" with { type: "json" };
import Al from "./materials/Al.json" with { type: "json" };
import Al2O3 from "./materials/Al2O3.json" with { type: "json" };
import Au from "./materials/Au.json" with { type: "json" };
import contamination from "./materials/C_contamination.json" with { type: "json" };
import graphite from "./materials/C_graphite.json" with { type: "json" };
import Cs from "./materials/Cs.json" with { type: "json" };
import Cu from "./materials/Cu.json" with { type: "json" };
import Fe from "./materials/Fe.json" with { type: "json" };
import ITO from "./materials/ITO.json" with { type: "json" };
import K from "./materials/K.json" with { type: "json" };
import Mg from "./materials/Mg.json" with { type: "json" };
import Mo from "./materials/Mo.json" with { type: "json" };
import Na from "./materials/Na.json" with { type: "json" };
import Ni from "./materials/Ni.json" with { type: "json" };
import Pt from "./materials/Pt.json" with { type: "json" };
import Si from "./materials/Si.json" with { type: "json" };
import SiO2 from "./materials/SiO2.json" with { type: "json" };
import Ta from "./materials/Ta.json" with { type: "json" };
import Ti from "./materials/Ti.json" with { type: "json" };
import W from "./materials/W.json" with { type: "json" };
import Zn from "./materials/Zn.json" with { type: "json" };

/** A Gaussian group of bands with sources. */
export interface CitedLobe {
  /** Center below the Fermi level, eV; negative for empty states. */
  readonly centerBindingEv: Cited;
  /** Full width at half maximum, eV. */
  readonly fwhmEv: Cited;
  /** States per atom. */
  readonly electrons: Cited;
}

/** A core level, one spin-orbit component, with sources. */
export interface CitedCoreLevel {
  /** Element and subshell, such as `Au 4f7/2`. */
  readonly name: string;
  /** Binding energy below the Fermi level, eV. */
  readonly bindingEnergyEv: Cited;
  /** Natural full width at half maximum (Lorentzian), eV. */
  readonly lorentzFwhmEv: Cited;
  /** Asymmetry of Doniach and Sunjic, 0 for a symmetric line. */
  readonly asymmetry: Cited;
  /** Photoionization cross-section of the component relative to C 1s, per formula unit, at Al K-alpha. */
  readonly relativeCrossSection: Cited;
  /** Angular asymmetry parameter beta, -1..2. */
  readonly beta: Cited;
}

/** Energy-loss cross-section of Tougaard: two parameters, or three when `dEv2` is given. */
export interface CitedTougaardLoss {
  /** Kind. */
  readonly kind: "tougaard";
  /** B, eV^2. */
  readonly bEv2: Cited;
  /** C, eV^2. */
  readonly cEv2: Cited;
  /** D, eV^2; null for the two-parameter form. */
  readonly dEv2: Cited | null;
  /** No losses below this energy, eV. */
  readonly onsetEv: Cited;
}

/** Energy losses as a sum of Drude-Lindhard oscillators. */
export interface CitedOscillatorLoss {
  /** Kind. */
  readonly kind: "oscillators";
  /** Oscillators of the energy-loss function. */
  readonly terms: readonly { readonly energyEv: Cited; readonly fwhmEv: Cited; readonly strength: Cited }[];
  /** No losses below this energy, eV. */
  readonly onsetEv: Cited;
}

/** What a formula for the mean free path of fast electrons needs, per formula unit. */
export interface CitedBulk {
  /** Density, g/cm^3. */
  readonly densityGPerCm3: Cited;
  /** Molar mass, g/mol. */
  readonly molarMassGPerMol: Cited;
  /** Valence electrons. */
  readonly valenceElectrons: Cited;
  /** Band gap, eV; 0 for a metal. */
  readonly gapEv: Cited;
}

/** A material with the source of every number. */
export interface Material {
  /** Short name, such as `Au`. */
  readonly id: string;
  /** Name in words. */
  readonly name: string;
  /** What to know about the model of it. */
  readonly note: string;
  /** Work functions by face, eV; `polycrystalline` is always there. */
  readonly workFunctions: Readonly<Record<string, Cited>>;
  /** Valence-band maximum below the Fermi level in the undoped or usual state, eV; null for a metal. */
  readonly valenceMaximumBelowFermiEv: Cited | null;
  /** Depth of the band bottom below the Fermi level, eV. */
  readonly bandBottomBelowFermiEv: Cited;
  /** Electrons per atom in the free-electron-like band. */
  readonly spElectrons: Cited;
  /** Groups of d bands. */
  readonly dLobes: readonly CitedLobe[];
  /** One inelastic mean free path, which fixes the scattering rate of the pair kernel. */
  readonly lowEnergyMeanFreePath: { readonly energyAboveFermiEv: Cited; readonly lengthNm: Cited };
  /** Refractive index n + ik; rows of vacuum wavelength (micrometers, ascending), n, k. */
  readonly opticalConstants: {
    readonly source: string;
    readonly confidence: Confidence;
    readonly columns: readonly string[];
    readonly rows: readonly (readonly [number, number, number])[];
  };
  /** Bulk numbers for fast electrons. */
  readonly bulk: CitedBulk;
  /** Energy losses of fast electrons. */
  readonly loss: CitedTougaardLoss | CitedOscillatorLoss;
  /** Core levels within reach of Al K-alpha that users look at. */
  readonly coreLevels: readonly CitedCoreLevel[];
}

const schema = z.strictObject({
  id: z.string().min(1),
  name: z.string().min(1),
  note: z.string(),
  workFunctions: z.record(z.string(), cited("eV", 0.5, 10)).refine(
    (faces) => Object.hasOwn(faces, "polycrystalline"),
    {
      message: "polycrystalline must be given",
    },
  ),
  valenceMaximumBelowFermiEv: cited("eV", 0, 15).nullable(),
  bandBottomBelowFermiEv: cited("eV", 0.1, 50),
  spElectrons: cited("1", 0.01, 30),
  dLobes: z.array(z.strictObject({
    centerBindingEv: cited("eV", -30, 50),
    fwhmEv: cited("eV", 0.05, 20),
    electrons: cited("1", 0.01, 20),
  })),
  lowEnergyMeanFreePath: z.strictObject({
    energyAboveFermiEv: cited("eV", 1, 100),
    lengthNm: cited("nm", 0.05, 100),
  }),
  opticalConstants: z.strictObject({
    source: z.string().min(5),
    confidence,
    columns: z.tuple([z.literal("wavelengthUm"), z.literal("n"), z.literal("k")]),
    rows: z.array(z.tuple([z.number().positive(), z.number().positive(), z.number().min(0)])).min(2).refine(
      (rows) => rows.every((row, i) => i === 0 || row[0] > rows[i - 1][0]),
      { message: "wavelengths must ascend" },
    ),
  }),
  bulk: z.strictObject({
    densityGPerCm3: cited("g/cm^3", 0.1, 30),
    molarMassGPerMol: cited("g/mol", 1, 1000),
    valenceElectrons: cited("1", 1, 100),
    gapEv: cited("eV", 0, 15),
  }),
  loss: z.discriminatedUnion("kind", [
    z.strictObject({
      kind: z.literal("tougaard"),
      bEv2: cited("eV^2", 0.1, 1e5),
      cEv2: cited("eV^2", 0.1, 1e5),
      dEv2: cited("eV^2", 0.1, 1e5).nullable(),
      onsetEv: cited("eV", 0, 30),
    }),
    z.strictObject({
      kind: z.literal("oscillators"),
      terms: z.array(z.strictObject({
        energyEv: cited("eV", 0.1, 200),
        fwhmEv: cited("eV", 0.05, 200),
        strength: cited("1", 1e-6, 10),
      })).min(1),
      onsetEv: cited("eV", 0, 30),
    }),
  ]),
  coreLevels: z.array(z.strictObject({
    name: z.string().regex(/^[A-Z][a-z]? [1-6][spdf](?:[1357]\/2)?$/),
    bindingEnergyEv: cited("eV", 1, 1480),
    lorentzFwhmEv: cited("eV", 0.01, 10),
    asymmetry: cited("1", 0, 0.4),
    relativeCrossSection: cited("1", 1e-3, 100),
    beta: cited("1", -1, 2),
  })),
});

/**
 * Checks a material: every number in range, with its unit and a source.
 *
 * @param value Parsed JSON.
 * @returns The material.
 * @throws {InputError} With a JSON pointer for each problem.
 */
export function parseMaterial(value: unknown): Material {
  const checked = schema.safeParse(value, { reportInput: true });
  if (checked.success) return checked.data;
  throw new InputError(checked.error.issues.map((issue) => ({
    place: issue.path.map((key) => `/${String(key)}`).join("") || "/",
    message: cannot(
      "read material",
      `it must be valid (${issue.message})`,
      JSON.stringify(issue.input) ?? "nothing",
    ),
  })));
}

const materials: ReadonlyMap<string, Material> = new Map(
  [
    Au,
    Ag,
    Cu,
    Al,
    W,
    Ni,
    Pt,
    Mo,
    Ta,
    Na,
    K,
    Cs,
    Mg,
    Zn,
    Ti,
    Fe,
    graphite,
    Si,
    SiO2,
    Al2O3,
    contamination,
    ITO,
  ].map((entry) => [entry.id, parseMaterial(entry)]),
);

/** Short names of the built-in materials. */
export const MATERIAL_IDS: readonly string[] = [...materials.keys()];

/**
 * A built-in material.
 *
 * @param id One of {@link MATERIAL_IDS}.
 * @returns The material with all sources.
 * @throws {InputError} If there is none of that name.
 */
export function material(id: string): Material {
  const found = materials.get(id);
  if (found !== undefined) return found;
  const near = suggest(id, MATERIAL_IDS);
  const rule = `material must be one of ${MATERIAL_IDS.join(", ")}${near ? ` (did you mean ${near}?)` : ""}`;
  throw new InputError([{ place: "", message: cannot("look up material", rule, id) }]);
}

/**
 * Refractive index by linear interpolation in photon energy between the nodes of the table.
 *
 * @param chosen The material.
 * @param photonEnergyEv Photon energy, eV.
 * @returns n and k.
 * @throws {RangeError} If the photon energy is outside the table.
 * @example Gold absorbs the helium line within 5.3 nm
 * ```ts
 * import { HC_EV_NM, material, opticalConstantsAt } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const { k } = opticalConstantsAt(material("Au"), 21.218);
 * assert.equal((HC_EV_NM / 21.218 / (4 * Math.PI * k)).toFixed(2), "5.27");
 * ```
 */
export function opticalConstantsAt(chosen: Material, photonEnergyEv: number): { n: number; k: number } {
  const { rows } = chosen.opticalConstants;
  const energyOf = (row: number): number => HC_EV_NM / (1000 * rows[row][0]);
  const last = rows.length - 1;
  if (!(photonEnergyEv >= energyOf(last) && photonEnergyEv <= energyOf(0))) {
    throw new RangeError(cannot(
      `look up optical constants of ${chosen.id}`,
      `the photon energy must be in ${energyOf(last).toFixed(3)}..${energyOf(0).toFixed(3)} eV`,
      `${photonEnergyEv} eV`,
    ));
  }
  const above = Math.max(0, rows.findIndex((_, i) => i < last && energyOf(i + 1) <= photonEnergyEv));
  const share = (photonEnergyEv - energyOf(above + 1)) / (energyOf(above) - energyOf(above + 1));
  const mix = (column: 1 | 2): number =>
    rows[above + 1][column] + share * (rows[above][column] - rows[above + 1][column]);
  return { n: mix(1), k: mix(2) };
}

/** One number of a material, for listing. */
export interface MaterialValue {
  /** What it is. */
  readonly quantity: string;
  /** The number, or a description of a table. */
  readonly value: number | string;
  /** Unit. */
  readonly unit: string;
  /** Source. */
  readonly source: string;
  /** How sure it is. */
  readonly confidence: Confidence;
}

/**
 * Every number of a material with its source.
 *
 * @param chosen The material.
 * @returns One row per number; the optical table is one row per node.
 */
export function listMaterialValues(chosen: Material): readonly MaterialValue[] {
  const row = (quantity: string, { value, unit, source, confidence }: Cited): MaterialValue => ({
    quantity,
    value,
    unit,
    source,
    confidence,
  });
  const { opticalConstants: optics, lowEnergyMeanFreePath: path } = chosen;
  return [
    ...Object.entries(chosen.workFunctions).map(([face, number]) => row(`work function, ${face}`, number)),
    ...(chosen.valenceMaximumBelowFermiEv === null
      ? []
      : [row("valence-band maximum below the Fermi level", chosen.valenceMaximumBelowFermiEv)]),
    row("band bottom below the Fermi level", chosen.bandBottomBelowFermiEv),
    row("electrons in the sp band", chosen.spElectrons),
    ...chosen.dLobes.flatMap((lobe, i) => [
      row(`d lobe ${i + 1}, center below the Fermi level`, lobe.centerBindingEv),
      row(`d lobe ${i + 1}, full width at half maximum`, lobe.fwhmEv),
      row(`d lobe ${i + 1}, states`, lobe.electrons),
    ]),
    row("mean free path, at energy above the Fermi level", path.energyAboveFermiEv),
    row("mean free path, inelastic", path.lengthNm),
    ...optics.rows.map(([wavelengthUm, n, k]) => ({
      quantity: `refractive index at ${
        (HC_EV_NM / (1000 * wavelengthUm)).toFixed(3)
      } eV (${wavelengthUm} um)`,
      value: `${n} + ${k} i`,
      unit: "1",
      source: optics.source,
      confidence: optics.confidence,
    })),
    row("density", chosen.bulk.densityGPerCm3),
    row("molar mass", chosen.bulk.molarMassGPerMol),
    row("valence electrons per formula unit", chosen.bulk.valenceElectrons),
    row("band gap", chosen.bulk.gapEv),
    row("no energy loss below", chosen.loss.onsetEv),
    ...(chosen.loss.kind === "tougaard"
      ? [
        row("energy loss, B", chosen.loss.bEv2),
        row("energy loss, C", chosen.loss.cEv2),
        ...(chosen.loss.dEv2 === null ? [] : [row("energy loss, D", chosen.loss.dEv2)]),
      ]
      : chosen.loss.terms.flatMap((term, i) => [
        row(`loss oscillator ${i + 1}, energy`, term.energyEv),
        row(`loss oscillator ${i + 1}, full width at half maximum`, term.fwhmEv),
        row(`loss oscillator ${i + 1}, strength`, term.strength),
      ])),
    ...chosen.coreLevels.flatMap((level) => [
      row(`${level.name}, binding energy`, level.bindingEnergyEv),
      row(`${level.name}, Lorentzian full width at half maximum`, level.lorentzFwhmEv),
      row(`${level.name}, asymmetry`, level.asymmetry),
      row(`${level.name}, cross-section relative to C 1s`, level.relativeCrossSection),
      row(`${level.name}, beta`, level.beta),
    ]),
  ];
}
