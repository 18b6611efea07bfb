import assert from "node:assert/strict";
import {
  type CitedCoreLevel,
  HC_EV_NM,
  listMaterialValues,
  material,
  MATERIAL_IDS,
  materialFrom,
  opticalConstantsAt,
  parseMaterial,
} from "../../src/data/mod.ts";
import { meanFreePathLaw } from "../../src/losses/mod.ts";
import { absorption, densityOfStates } from "../../src/sample/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { problemsOf } from "../support/input_problems.ts";

const METALS = ["Au", "Ag", "Cu", "Al", "W", "Ni", "Pt", "Mo", "Ta", "Na", "K", "Cs", "Mg", "Zn", "Ti", "Fe"];
const GAPPED = ["Si", "SiO2", "Al2O3", "C_contamination", "ITO"];

Deno.test("MATERIAL_IDS holds every material, each of which parses and cites all its numbers", () => {
  assert.deepEqual(MATERIAL_IDS.toSorted(), [...METALS, "C_graphite", ...GAPPED].toSorted());
  for (const id of MATERIAL_IDS) {
    assert.equal(parseMaterial(structuredClone(material(id))).id, id);
    for (const { quantity, source, confidence } of listMaterialValues(material(id))) {
      assert.ok(source.length > 10, `${id} ${quantity}`);
      assert.ok(
        confidence !== "published" || !source.includes("from memory"),
        `${id} ${quantity}: ${source}`,
      );
    }
  }
});

Deno.test("exactly the materials with a gap have a valence maximum, and every optical table reaches 4 to 27 eV", () => {
  for (const id of MATERIAL_IDS) {
    const { valenceMaximumBelowFermiEv: maximum, bulk } = material(id);
    assert.equal(maximum !== null, GAPPED.includes(id), id);
    assert.equal(bulk.gapEv.value > 0, GAPPED.includes(id), id);
    opticalConstantsAt(material(id), 4);
    opticalConstantsAt(material(id), 27);
  }
});

// S. Tanuma, C. Powell, D. Penn, Surf. Interface Anal. 21, 165 (1994), evaluated by a program of its own; last column:
// the relativistic form of H. Shinotsuka et al., Surf. Interface Anal. 47, 871 (2015), at 1486.6 eV. Contamination carbon
// stands for polyethylene.
const ENERGIES_EV = [50, 100, 200, 500, 1000, 1486.6];
Deno.test.each([
  ["Au", [0.4857, 0.3857, 0.4611, 0.7644, 1.2298, 1.6476, 1.6422]],
  ["Ag", [0.4319, 0.4201, 0.5286, 0.9034, 1.4744, 1.9880, 1.9813]],
  ["Cu", [0.3387, 0.4049, 0.5381, 0.9403, 1.5450, 2.0884, 2.0813]],
  ["Al", [0.4155, 0.5275, 0.7573, 1.4024, 2.3663, 3.2352, 3.2239]],
  ["Si", [0.4161, 0.5305, 0.7614, 1.4118, 2.3857, 3.2646, 3.2531]],
  ["C_graphite", [0.6267, 0.6944, 0.9046, 1.6003, 2.6709, 3.6421, 3.6293]],
  ["SiO2", [0.7148, 0.7825, 1.0216, 1.8111, 3.0252, 4.1267, 4.1122]],
  ["Al2O3", [0.7055, 0.7130, 0.8869, 1.5271, 2.5195, 3.4189, 3.4071]],
  ["C_contamination", [0.7258, 0.8912, 1.2308, 2.2578, 3.8279, 5.2555, 5.2367]],
])("bulk numbers of %s give the TPP-2M mean free paths %s nm", (id, lengthsNm) => {
  const { densityGPerCm3, molarMassGPerMol, valenceElectrons, gapEv } = material(id).bulk;
  const bulk = {
    densityGPerCm3: densityGPerCm3.value,
    molarMassGPerMol: molarMassGPerMol.value,
    valenceElectrons: valenceElectrons.value,
    gapEv: gapEv.value,
  };
  const law = meanFreePathLaw({ kind: "tpp2m", relativistic: false, bulk });
  ENERGIES_EV.forEach((energyEv, i) =>
    assertClose(law.lengthNm(energyEv), lengthsNm[i], { absolute: 6e-5 }, `${energyEv} eV`)
  );
  const relativistic = meanFreePathLaw({ kind: "tpp2m", relativistic: true, bulk });
  assertClose(relativistic.lengthNm(1486.6), lengthsNm[6], { absolute: 6e-5 }, "relativistic");
  // One valence electron more would be seen.
  const wrong = meanFreePathLaw({
    kind: "tpp2m",
    relativistic: false,
    bulk: { ...bulk, valenceElectrons: bulk.valenceElectrons + 1 },
  });
  assert.ok(Math.abs(wrong.lengthNm(1000) - lengthsNm[4]) > 6e-4);
});

// H. Michaelson, J. Appl. Phys. 48, 4729 (1977), polycrystalline values as tabulated publicly.
Deno.test.each([
  ["Ag", 4.26],
  ["Al", 4.28],
  ["Au", 5.1],
  ["Cu", 4.65],
  ["Ni", 5.15],
  ["W", 4.55],
  ["Mo", 4.6],
  ["Pt", 5.65],
  ["Fe", 4.5],
  ["Zn", 4.33],
  ["K", 2.3],
  ["Mg", 3.66],
  ["Ti", 4.33],
])("work function of polycrystalline %s is Michaelson's %s eV", (id, valueEv) => {
  const { value, confidence } = material(id).workFunctions.polycrystalline;
  assert.equal(value, valueEv);
  assert.equal(confidence, "published");
});

// Range of all faces in the CRC Handbook 2008, as quoted by a public encyclopedia; compilations scatter by 0.3 eV.
Deno.test.each([
  ["Ni", 5.04, 5.35],
  ["Mo", 4.36, 4.95],
  ["Pt", 5.12, 5.93],
  ["Ta", 4.00, 4.80],
  ["Fe", 4.67, 4.81],
  ["Zn", 3.63, 4.9],
  ["Si", 4.60, 4.85],
  ["Na", 2.75, 2.75],
  ["Cs", 1.95, 2.14],
])("work functions of %s are within 0.2 eV of the range %s to %s eV", (id, lowEv, highEv) => {
  for (const [face, { value }] of Object.entries(material(id).workFunctions)) {
    assert.ok(value > lowEv - 0.2 && value < highEv + 0.2, `${face}: ${value}`);
  }
});

// n, k, depth at normal incidence and depth along the normal at 45 degrees, nm. Papers: Franta 2017 (Si), Djurisic 1999
// (graphite), Franta 2016 (SiO2), Hagemann 1975 (Al2O3), Werner 2009 (Ni), Weaver 1975 (W); read from the
// refractiveindex.info database (CC0, commit ff11b58) in full, interpolated in energy and turned into depths by a program
// of its own.
Deno.test.each([
  ["Si", 4.9, 1.6677, 3.7120, 5.42, 5.34],
  ["Si", 6.2, 0.9934, 2.7589, 5.77, 5.61],
  ["Si", 10, 0.4397, 1.4397, 6.85, 6.19],
  ["Si", 21.218, 0.6453, 0.0858, 54.2, 13.6],
  ["C_graphite", 4.9, 1.7376, 2.2624, 8.90, NaN],
  ["C_graphite", 6.2, 0.8285, 1.3097, 12.15, NaN],
  ["C_graphite", 10, 1.8014, 0.4024, 24.5, NaN],
  ["C_graphite", 21.218, 0.4960, 0.9714, 4.79, 3.98],
  ["SiO2", 10, 2.3079, 0.3062, 32.2, NaN],
  ["SiO2", 21.218, 0.8491, 0.4738, 9.81, 7.31],
  ["Al2O3", 6.2, 1.8038, 0.0034, 4679, NaN],
  ["Al2O3", 10, 2.5817, 0.5979, 16.5, NaN],
  ["Al2O3", 21.218, 0.8017, 0.7073, 6.57, 5.29],
  ["Ni", 4.9, 1.1958, 2.6070, 7.72, NaN],
  ["Ni", 6.2, 1.1086, 1.9247, 8.27, NaN],
  ["Ni", 10, 1.0723, 1.2328, 8.00, NaN],
  ["Ni", 21.218, 0.8601, 0.6468, 7.19, 5.76],
  ["W", 21.218, 0.4989, 0.8745, 5.32, 4.29],
])("%s at %s eV has n %s, k %s and depths %s and %s nm", (id, energyEv, n, k, depthNm, depth45Nm) => {
  const index = opticalConstantsAt(material(id), energyEv);
  const depthAt = (angleDeg: number): number => absorption(index, HC_EV_NM / energyEv, angleDeg).meanDepthNm;
  assertClose(index.n, n, { absolute: 6e-5 }, "n");
  assertClose(index.k, k, { absolute: 6e-5 }, "k");
  const lastDigit = depthNm > 1000 ? 0.6 : depthNm > 13 ? 0.06 : 0.006;
  assertClose(depthAt(0), depthNm, { absolute: lastDigit }, "depth");
  if (!Number.isNaN(depth45Nm)) {
    assertClose(depthAt(45), depth45Nm, { absolute: lastDigit }, "depth at 45");
  }
});

Deno.test("SiO2 is transparent below its gap and not above", () => {
  assert.ok(opticalConstantsAt(material("SiO2"), 6.2).k < 1e-6);
  assert.ok(opticalConstantsAt(material("SiO2"), 11).k > 0.1);
});

// An independent measurement at 21.219 eV: D. Windt et al., Appl. Opt. 27, 246 (1988). Such sources differ by 20 %.
Deno.test.each([["Pt", 0.952], ["Ta", 0.406], ["Mo", 0.570], ["Ti", 0.333]])(
  "%s absorbs the helium line as measured by others, k %s",
  (id, k) => assertClose(opticalConstantsAt(material(id), 21.219).k, k, { relative: 0.2 }),
);

// Lattice constants a (and c of hexagonal cells), nm, at room temperature, and atoms per cell: C. Kittel, Introduction to
// Solid State Physics, and handbooks (from memory, high confidence). Density = atoms x molar mass/(N_A x volume).
Deno.test.each([
  ["Au", 4, 0.4078, NaN],
  ["Ag", 4, 0.4086, NaN],
  ["Cu", 4, 0.3615, NaN],
  ["Al", 4, 0.4050, NaN],
  ["W", 2, 0.3165, NaN],
  ["Ni", 4, 0.3524, NaN],
  ["Pt", 4, 0.3924, NaN],
  ["Mo", 2, 0.3147, NaN],
  ["Ta", 2, 0.3303, NaN],
  ["Na", 2, 0.4291, NaN],
  ["K", 2, 0.5328, NaN],
  ["Cs", 2, 0.6141, NaN],
  ["Fe", 2, 0.2867, NaN],
  ["Si", 8, 0.5431, NaN],
  ["Mg", 2, 0.3209, 0.5211],
  ["Zn", 2, 0.2665, 0.4947],
  ["Ti", 2, 0.2951, 0.4684],
  ["C_graphite", 4, 0.2461, 0.6708],
])("density of %s is that of its crystal, %s atoms in a cell of %s nm", (id, atoms, aNm, cNm) => {
  const { densityGPerCm3, molarMassGPerMol } = material(id).bulk;
  const volumeNm3 = Number.isNaN(cNm) ? aNm ** 3 : aNm ** 2 * cNm * Math.sqrt(3) / 2;
  const crystal = atoms * molarMassGPerMol.value / (602.214076 * volumeNm3);
  assertClose(densityGPerCm3.value, crystal, { relative: 0.02 });
});

Deno.test("band bottoms of simple metals are the free-electron Fermi energies of their densities", () => {
  // (hbar^2/2m) (3 pi^2 n)^(2/3), hbar^2/2m = 0.0380998 eV nm^2 (CODATA). Handbook values are for 5 K, where K and Cs
  // are up to 7 % denser.
  for (const id of ["Na", "K", "Cs", "Mg", "Al"]) {
    const { bulk, bandBottomBelowFermiEv, spElectrons } = material(id);
    const perNm3 = 602.214076 * spElectrons.value * bulk.densityGPerCm3.value / bulk.molarMassGPerMol.value;
    const fermiEv = 0.0380998 * (3 * Math.PI ** 2 * perNm3) ** (2 / 3);
    assertClose(bandBottomBelowFermiEv.value, fermiEv, { relative: 0.05 }, id);
  }
});

Deno.test("bands of metals hold as many electrons below the Fermi level as the periodic table gives", () => {
  const counts = {
    Ni: 10,
    Pt: 10,
    Mo: 6,
    Ta: 5,
    Na: 1,
    K: 1,
    Cs: 1,
    Mg: 2,
    Zn: 12,
    Ti: 4,
    Fe: 8,
    C_graphite: 4,
  };
  for (const [id, electrons] of Object.entries(counts)) {
    const { bandBottomBelowFermiEv: { value: bottom }, spElectrons, dLobes, bulk } = material(id);
    assert.equal(bulk.valenceElectrons.value, electrons, id);
    const states = densityOfStates({
      bandBottomBelowFermiEv: bottom,
      spElectrons: spElectrons.value,
      lobes: dLobes.map((lobe) => ({
        centerBindingEv: lobe.centerBindingEv.value,
        fwhmEv: lobe.fwhmEv.value,
        electrons: lobe.electrons.value,
      })),
      gap: null,
    });
    let held = 0;
    for (let i = 0; i < 2000; i++) held += states(-bottom * (i + 0.5) / 2000) * bottom / 2000;
    // Tails of the humps cross the Fermi level.
    assertClose(held, electrons, { absolute: 0.4 }, id);
    if (id !== "C_graphite" && dLobes.length > 0) {
      assertClose(dLobes.reduce((sum, lobe) => sum + lobe.electrons.value, 0), 10, { absolute: 1e-9 }, id);
    }
  }
});

Deno.test("lobes of materials with a gap hold the valence electrons, without O 2s, below the valence maximum", () => {
  // Si 4; C 4 + 2 H; six O 2p states per oxygen: SiO2 12, Al2O3 18, 3.093 O of indium tin oxide 18.6.
  const counts = { Si: 4, C_contamination: 6, SiO2: 12, Al2O3: 18, ITO: 18.6 };
  for (const [id, electrons] of Object.entries(counts)) {
    const { dLobes, valenceMaximumBelowFermiEv: maximum, bandBottomBelowFermiEv: bottom } = material(id);
    assertClose(
      dLobes.reduce((sum, lobe) => sum + lobe.electrons.value, 0),
      electrons,
      { absolute: 0.15 },
      id,
    );
    for (const { centerBindingEv, fwhmEv } of dLobes) {
      // At the maximum the uppermost lobe has fallen below a quarter of its height: exp(-4 ln 2 x^2), x = 0.72.
      assert.ok((centerBindingEv.value - maximum!.value) / fwhmEv.value > 0.72, id);
      assert.ok(centerBindingEv.value < bottom.value, id);
    }
  }
});

Deno.test("indium tin oxide has the carrier density of a transparent conductor", () => {
  // Degenerate films: 3e20 to 1.5e21 per cm^3 (typical value of handbooks, from memory). The integral of
  // 3n/(2 b^1.5) sqrt(E - E_c) up to the Fermi level is n (depth/b)^1.5.
  const { bulk, spElectrons, bandBottomBelowFermiEv, valenceMaximumBelowFermiEv } = material("ITO");
  const depthEv = valenceMaximumBelowFermiEv!.value - bulk.gapEv.value;
  const carriers = spElectrons.value * (depthEv / bandBottomBelowFermiEv.value) ** 1.5;
  const perCm3 = 6.02214076e23 * carriers * bulk.densityGPerCm3.value / bulk.molarMassGPerMol.value;
  assert.ok(perCm3 > 3e20 && perCm3 < 1.5e21, `${perCm3}`);
});

// Subshell, photoionization cross-section at 1486.6 eV per two electrons relative to C 1s, width and X-ray edge, eV, of the
// tables of T. Schoonjans et al., Spectrochim. Acta B 66, 776 (2011), version 4.0: cross-sections after L. Kissel, widths
// after J. Campbell, T. Papp (2001), edges after J. Bearden, A. Burr (1967). Edges are those of the elements, read from
// X-ray lines: handbooks differ by up to 5 eV.
const SUBSHELLS: readonly (readonly [string, number, number, number])[] = [
  ["Na 1s", 8.522, 0.28, 1072.1],
  ["Na 2s", 0.4222, 0.28, 63.3],
  ["Na 2p1/2", 0.06533, 0.02, 31.1],
  ["Na 2p3/2", 0.06436, 0.02, 31.1],
  ["Mg 1s", 11.16, 0.33, 1305],
  ["Mg 2s", 0.5749, 0.46, 89.4],
  ["Mg 2p1/2", 0.1124, 0.03, 51.4],
  ["Mg 2p3/2", 0.1106, 0.03, 51.4],
  ["Al 2s", 0.7533, 0.78, 117.7],
  ["Al 2p1/2", 0.181, 0.04, 73.2],
  ["Al 2p3/2", 0.1778, 0.04, 72.7],
  ["Si 2s", 0.9552, 0.9, 148.7],
  ["Si 2p1/2", 0.276, 0.05, 99.5],
  ["Si 2p3/2", 0.2708, 0.05, 98.9],
  ["K 2p1/2", 1.347, 0.18, 296.3],
  ["K 2p3/2", 1.311, 0.18, 293.6],
  ["Ti 2p1/2", 2.691, 0.52, 461.5],
  ["Ti 2p3/2", 2.61, 0.25, 455.5],
  ["Fe 2p1/2", 5.599, 1.14, 721.1],
  ["Fe 2p3/2", 5.41, 0.41, 708.1],
  ["Ni 2p1/2", 7.57, 0.98, 871.9],
  ["Ni 2p3/2", 7.308, 0.53, 854.7],
  ["Cu 2p1/2", 8.681, 1.04, 951],
  ["Cu 2p3/2", 8.38, 0.61, 931.1],
  ["Zn 2p1/2", 9.861, 1.06, 1042.8],
  ["Zn 2p3/2", 9.523, 0.68, 1019.7],
  ["Mo 3d3/2", 1.94, 0.22, 230.3],
  ["Mo 3d5/2", 1.876, 0.12, 227],
  ["Ag 3d3/2", 3.687, 0.3, 372.8],
  ["Ag 3d5/2", 3.557, 0.31, 366.7],
  ["In 3d3/2", 4.61, 0.38, 450.8],
  ["In 3d5/2", 4.443, 0.39, 443.1],
  ["Sn 3d3/2", 5.123, 0.43, 493.3],
  ["Sn 3d5/2", 4.936, 0.44, 484.8],
  ["Cs 3d3/2", 8.234, 0.63, 739.5],
  ["Cs 3d5/2", 7.926, 0.63, 725.5],
  ["Cs 4d3/2", 1.076, 0.08, 78.8],
  ["Cs 4d5/2", 1.034, 0.08, 76.5],
  ["Ta 4f5/2", 1.266, 0.08, 27.5],
  ["Ta 4f7/2", 1.205, 0.04, 25.6],
  ["W 4f5/2", 1.44, 0.1, 37.9],
  ["W 4f7/2", 1.372, 0.06, 35.8],
  ["Pt 4f5/2", 2.27, 0.35, 74.5],
  ["Pt 4f7/2", 2.165, 0.31, 71.1],
  ["Au 4f5/2", 2.513, 0.37, 87.8],
  ["Au 4f7/2", 2.397, 0.33, 84.1],
  ["O 1s", 2.931, NaN, 532],
  ["C 1s", 1, NaN, 283.8],
];

/** Atoms of an element per formula unit where it is not one. */
const ATOMS: Readonly<Record<string, number>> = {
  "SiO2 O": 2,
  "Al2O3 Al": 2,
  "Al2O3 O": 3,
  "ITO In": 1.814,
  "ITO Sn": 0.186,
  "ITO O": 3.093,
};

/** Total angular momentum j of a subshell's name, times two. */
const twiceJ = (name: string): number => name.endsWith("s") ? 1 : Number(/(\d)\/2$/.exec(name)?.[1]);

Deno.test("core levels agree with tables of X-ray physics: cross-section, width and edge", () => {
  const seen = new Set<string>();
  for (const id of MATERIAL_IDS) {
    for (const { name, relativeCrossSection, lorentzFwhmEv, bindingEnergyEv } of material(id).coreLevels) {
      const row = SUBSHELLS.find(([subshell]) => subshell === name);
      assert.ok(row !== undefined, `${id} ${name} is not in the table`);
      seen.add(name);
      const [, perPair, widthEv, edgeEv] = row;
      const atoms = ATOMS[`${id} ${name.split(" ")[0]}`] ?? 1;
      const expected = atoms * perPair * (twiceJ(name) + 1) / 2;
      assertClose(relativeCrossSection.value, expected, { relative: 0.01 }, `${id} ${name} cross-section`);
      if (!Number.isNaN(widthEv)) assert.equal(lorentzFwhmEv.value, widthEv, `${id} ${name} width`);
      // Oxides lie up to 4 eV deeper than the element.
      const shift = id.includes("O") && !name.startsWith("O") ? 5.5 : 5;
      assertClose(bindingEnergyEv.value, edgeEv, { absolute: shift }, `${id} ${name} edge`);
    }
  }
  assert.equal(seen.size, SUBSHELLS.length);
});

// Spin-orbit splittings, eV, typical values of handbooks (from memory, medium confidence).
Deno.test.each([
  ["Ni", "Ni 2p", 17.27],
  ["Pt", "Pt 4f", 3.33],
  ["Mo", "Mo 3d", 3.13],
  ["Ta", "Ta 4f", 1.91],
  ["K", "K 2p", 2.77],
  ["Cs", "Cs 3d", 13.95],
  ["Cs", "Cs 4d", 2.29],
  ["Mg", "Mg 2p", 0.28],
  ["Zn", "Zn 2p", 22.97],
  ["Ti", "Ti 2p", 6.17],
  ["Fe", "Fe 2p", 13.1],
  ["Si", "Si 2p", 0.61],
  ["SiO2", "Si 2p", 0.61],
  ["Al2O3", "Al 2p", 0.41],
  ["ITO", "In 3d", 7.54],
  ["ITO", "Sn 3d", 8.41],
])("in %s the pair %s is split by %s eV", (id, subshell, splitEv) => {
  const pair = pairs(id).find(([name]) => name === subshell)!;
  assertClose(pair[2].bindingEnergyEv.value - pair[1].bindingEnergyEv.value, splitEv, { absolute: 0.1 });
});

Deno.test("every spin-orbit pair is complete, the lower j deeper, with nearly statistical intensities", () => {
  // 2j + 1 states each: exact without spin-orbit change of the orbitals, which makes up to 5 %.
  for (const id of MATERIAL_IDS) {
    for (const [name, strong, weak] of pairs(id)) {
      assert.equal(twiceJ(strong.name), twiceJ(weak.name) + 2, `${id} ${name}`);
      assert.ok(weak.bindingEnergyEv.value > strong.bindingEnergyEv.value, `${id} ${name}`);
      const ratio = strong.relativeCrossSection.value / weak.relativeCrossSection.value;
      const states = (twiceJ(strong.name) + 1) / (twiceJ(weak.name) + 1);
      assertClose(ratio, states, { relative: 0.05 }, `${id} ${name}`);
      assert.equal(strong.beta.value, weak.beta.value, `${id} ${name}`);
    }
  }
});

/** Subshell and its two levels, higher j first, of every subshell but s. */
function pairs(id: string): (readonly [string, CitedCoreLevel, CitedCoreLevel])[] {
  const groups = Map.groupBy(
    material(id).coreLevels.filter(({ name }) => !name.endsWith("s")),
    ({ name }) => name.replace(/\d\/2$/, ""),
  );
  return [...groups].map(([subshell, levels]) => {
    assert.equal(levels.length, 2, `${id} ${subshell}`);
    const [weak, strong] = levels.toSorted((a, b) => twiceJ(a.name) - twiceJ(b.name));
    return [subshell, strong, weak] as const;
  });
}

const MINE = { ...material("Au"), id: "Au_foil", name: "our foil" };

Deno.test("materialFrom() reads a file with comments and trailing commas", () => {
  const text = `// our foil\n${JSON.stringify(MINE, null, 1).replace(/\n}$/, ",\n}")} /* end */`;
  assert.deepEqual(materialFrom(text, "foil.json"), MINE);
});

Deno.test("materialFrom() refuses text that is not JSON and gives the line", () => {
  assert.deepEqual(problemsOf(() => materialFrom('{\n  "id" "Au"\n}', "foil.json")), [{
    place: "foil.json:2",
    message: 'Cannot read material as the file must be JSON (ColonExpected): current value is "\\"Au\\""',
  }]);
  assert.match(problemsOf(() => materialFrom(" // nothing\n", "foil.json"))[0].message, /it is empty/);
});

Deno.test("materialFrom() reports all problems at once, each with its pointer", () => {
  const broken = structuredClone(MINE) as Record<string, unknown> & typeof MINE;
  const mutable = broken as unknown as {
    bulk: { gapEv: { unit: string }; densityGPerCm3: { value: number } };
    workFunctions: Record<string, unknown>;
    loss: Record<string, unknown>;
    coreLevels: { name: string; beta: { source?: string } }[];
    color: string;
  };
  mutable.bulk.gapEv.unit = "meV";
  mutable.bulk.densityGPerCm3.value = 19320;
  mutable.coreLevels[0].name = "gold";
  delete mutable.coreLevels[1].beta.source;
  delete mutable.workFunctions.polycrystalline;
  delete mutable.loss.kind;
  mutable.color = "yellow";
  const text = JSON.stringify(broken).replace(/^{/, '{"id":"first",');
  const problems = problemsOf(() => materialFrom(text, "foil.json"));
  assert.deepEqual(problems.map(({ place }) => place).toSorted(), [
    "foil.json#/",
    "foil.json#/bulk/densityGPerCm3/value",
    "foil.json#/bulk/gapEv/unit",
    "foil.json#/coreLevels/0/name",
    "foil.json#/coreLevels/1/beta/source",
    "foil.json#/id",
    "foil.json#/loss/kind",
    "foil.json#/workFunctions",
  ]);
  const at = (pointer: string) => problems.find(({ place }) => place === `foil.json#${pointer}`)!.message;
  assert.equal(at("/id"), 'Cannot read material as each key may be given once: current value is "id"');
  assert.match(at("/"), /color/);
  assert.match(at("/bulk/densityGPerCm3/value"), /<=30.*current value is "19320"$/);
});

Deno.test("materialFrom() refuses the name of a built-in material and a core level given twice", () => {
  const level = MINE.coreLevels[0];
  const clash = { ...MINE, id: "Au", coreLevels: [level, level] };
  assert.deepEqual(problemsOf(() => materialFrom(JSON.stringify(clash), "foil.json")), [
    {
      place: "foil.json#/id",
      message:
        'Cannot read material as it must not be the name of a built-in material: current value is "Au"',
    },
    {
      place: "foil.json#/coreLevels/1/name",
      message: 'Cannot read material as each core level may be given once: current value is "Au 4f7/2"',
    },
  ]);
});

Deno.test("materialFrom() throws InputError for anything that is not a material", () => {
  for (const text of ["null", "[]", "3", '"Au"', "{}", "[[{}]]", '{"coreLevels": {}}']) {
    assert.ok(problemsOf(() => materialFrom(text, "foil.json")).length > 0, text);
  }
});
