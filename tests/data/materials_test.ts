import assert from "node:assert/strict";
import {
  type CitedCoreLevel,
  HC_EV_NM,
  listMaterialValues,
  material,
  MATERIAL_IDS,
  opticalConstantsAt,
  parseMaterial,
} from "../../src/data/mod.ts";
import { absorption } from "../../src/sample/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { problemsOf } from "../support/input_problems.ts";

// n, k, depth at normal incidence and depth along the normal at 45 degrees, nm. Papers: Hagemann 1975 (Au: DESY Table 6),
// Rakic 1995, Weaver 1975; read from the refractiveindex.info database (CC0, commit ff11b58), interpolated linearly in
// energy and turned into depths by a program of its own: d = lambda/(4 pi k), d45 with Im sqrt((n + ik)^2 - 1/2).
Deno.test.each([
  ["Au", 4.9, 1.4696, 1.6979, 11.86, 11.29],
  ["Au", 6.2, 1.4203, 1.2783, 12.45, 11.62],
  ["Au", 10, 1.3189, 1.0899, 9.05, 8.30],
  ["Au", 21.218, 1.2478, 0.8829, 5.27, 4.72],
  ["Ag", 4.9, 1.5741, 1.3460, 14.96, 14.11],
  ["Ag", 6.2, 1.3052, 1.2403, 12.83, 11.88],
  ["Ag", 10, 1.4621, 0.5570, 17.71, 15.86],
  ["Ag", 21.218, 1.3556, 0.7695, 6.04, 5.42],
  ["Cu", 4.9, 1.5014, 1.7451, 11.54, 11.01],
  ["Cu", 6.2, 1.0050, 1.5026, 10.59, 9.83],
  ["Cu", 10, 1.0380, 0.8179, 12.06, 10.42],
  ["Cu", 21.218, 0.9014, 0.4045, 11.50, 8.52],
  ["Al", 4.9, 0.1912, 2.9834, 6.75, 6.57],
  ["Al", 6.2, 0.1203, 2.2754, 6.99, 6.68],
  ["Al", 10, 0.0463, 1.1554, 8.54, 7.28],
  ["Al", 21.218, 0.7123, 0.0208, 223.9, 42.9],
  ["W", 4.9, 3.3261, 2.7237, 7.39, NaN],
  ["W", 6.2, 1.4777, 3.2376, 4.92, NaN],
  ["W", 10, 1.1528, 1.3579, 7.27, NaN],
  ["W", 21.218, 0.4989, 0.8745, 5.32, 4.29],
])("%s at %s eV has n %s, k %s and depths %s and %s nm", (id, energyEv, n, k, depthNm, depth45Nm) => {
  const index = opticalConstantsAt(material(id), energyEv);
  const depthAt = (angleDeg: number): number => absorption(index, HC_EV_NM / energyEv, angleDeg).meanDepthNm;
  const lastDigit = depthNm > 100 ? 0.06 : 0.006;
  assertClose(index.n, n, { absolute: 6e-5 }, "n");
  assertClose(index.k, k, { absolute: 6e-5 }, "k");
  assertClose(depthAt(0), depthNm, { absolute: lastDigit }, "depth");
  if (!Number.isNaN(depth45Nm)) {
    assertClose(depthAt(45), depth45Nm, { absolute: lastDigit }, "depth at 45");
  }
});

// An independent measurement at 21.218 eV: D. Windt et al., Appl. Opt. 27, 246 (1988), Au k 0.8660, Ag k 0.6579 (the same
// database). The spread between such sources is 10 to 20 %.
Deno.test.each([["Au", 0.8660], ["Ag", 0.6579]])(
  "%s absorbs the helium line as measured by others, k %s",
  (id, k) => {
    assertClose(opticalConstantsAt(material(id), 21.218).k, k, { relative: 0.2 });
  },
);

Deno.test("opticalConstantsAt() passes through the nodes, ends included, and is linear between them", () => {
  for (const id of MATERIAL_IDS) {
    const chosen = material(id);
    const { rows } = chosen.opticalConstants;
    const energyOf = (row: number): number => HC_EV_NM / (1000 * rows[row][0]);
    rows.forEach(([, n, k], i) => {
      const at = opticalConstantsAt(chosen, energyOf(i));
      assertClose(at.n, n, { relative: 1e-12 }, `${id} n, row ${i}`);
      assertClose(at.k, k, { relative: 1e-12 }, `${id} k, row ${i}`);
      if (i === 0) return;
      const middle = opticalConstantsAt(chosen, 0.5 * (energyOf(i) + energyOf(i - 1)));
      assertClose(middle.k, 0.5 * (k + rows[i - 1][2]), { relative: 1e-12 }, `${id} k, above row ${i}`);
    });
  }
});

Deno.test("opticalConstantsAt() refuses to extrapolate", () => {
  for (const energyEv of [1.9, 51, -1, NaN]) {
    assert.throws(
      () => opticalConstantsAt(material("Au"), energyEv),
      (error: Error) =>
        error instanceof RangeError &&
        error.message.startsWith(
          "Cannot look up optical constants of Au as the photon energy must be in 2.000..49.994 eV",
        ),
    );
  }
});

// Polycrystalline: H. Michaelson, J. Appl. Phys. 48, 4729 (1977), as tabulated publicly. Ag faces: A. Dweydari, C. Mee
// (1975), as in the CRC Handbook 2008.
Deno.test.each([
  ["Au", "polycrystalline", 5.1],
  ["Ag", "polycrystalline", 4.26],
  ["Cu", "polycrystalline", 4.65],
  ["Al", "polycrystalline", 4.28],
  ["W", "polycrystalline", 4.55],
  ["Ag", "100", 4.64],
  ["Ag", "110", 4.52],
  ["Ag", "111", 4.74],
])("work function of %s, %s, is the published %s eV", (id, face, valueEv) => {
  assert.equal(material(id).workFunctions[face].value, valueEv);
});

// Faces in a second source: P. Gartland (1972) for Cu, the CRC Handbook for Al and W (both from memory, medium
// confidence), G. Derry et al. (2015) for Au(111) (from memory, low confidence). Compilations scatter by 0.1 to 0.3 eV.
Deno.test.each([
  ["Au", "111", 5.33],
  ["Cu", "100", 4.59],
  ["Cu", "110", 4.48],
  ["Cu", "111", 4.94],
  ["Al", "110", 4.06],
  ["Al", "111", 4.26],
  ["W", "100", 4.63],
  ["W", "110", 5.22],
  ["W", "111", 4.47],
])("work function of %s(%s) is within 0.1 eV of %s eV", (id, face, valueEv) => {
  assertClose(material(id).workFunctions[face].value, valueEv, {
    absolute: 0.1,
  });
});

Deno.test("the smoothest face has the highest work function: 111 of Ag and Cu, 110 of W", () => {
  // R. Smoluchowski, Phys. Rev. 60, 661 (1941): the smoother the face, the higher the work function.
  const face = (id: string, name: string): number => material(id).workFunctions[name].value;
  for (const id of ["Ag", "Cu"]) {
    assert.ok(face(id, "111") > face(id, "100") && face(id, "100") > face(id, "110"), id);
  }
  assert.ok(face("W", "110") > face("W", "100") && face("W", "100") > face("W", "111"));
});

// Periodic table: d10 s1 for Cu, Ag, Au; s2 p1 for Al; d4 s2 for W. A d shell has ten states.
Deno.test.each([["Au", 11, 10], ["Ag", 11, 10], ["Cu", 11, 10], ["Al", 3, 0], ["W", 6, 10]])(
  "the bands of %s hold its %s valence electrons and %s d states",
  (id, valence, states) => {
    const { spElectrons, dLobes } = material(id);
    const filled = dLobes.filter((lobe) => lobe.centerBindingEv.value > 0);
    const count = (lobes: typeof dLobes): number =>
      lobes.reduce((sum, lobe) => sum + lobe.electrons.value, 0);
    assertClose(spElectrons.value + count(filled), valence, { absolute: 1e-9 }, "electrons");
    assertClose(count(dLobes), states, { absolute: 1e-9 }, "d states");
  },
);

Deno.test("the low-energy mean free path of metals is that of Seah and Dench for elements", () => {
  // M. Seah, W. Dench, Surf. Interface Anal. 1, 2 (1979): 143/E^2 + 0.054 sqrt(E) nm (from memory, high confidence).
  for (const id of ["Au", "Ag", "Cu", "Al", "W"]) {
    const { energyAboveFermiEv: { value: energyEv }, lengthNm } = material(id).lowEnergyMeanFreePath;
    assertClose(lengthNm.value, 143 / energyEv ** 2 + 0.054 * Math.sqrt(energyEv), { absolute: 5e-4 }, id);
  }
});

// Free-electron plasmon energies in S. Tanuma, C. Powell, D. Penn, Surf. Interface Anal. 21, 165 (1994), recomputed from
// CODATA constants by a program of its own.
Deno.test.each([["Au", 29.93], ["Ag", 29.82], ["Cu", 35.89], ["Al", 15.79]])(
  "density, molar mass and valence electrons of %s make a free-electron plasmon of %s eV",
  (id, plasmonEv) => {
    const { densityGPerCm3, molarMassGPerMol, valenceElectrons, gapEv } = material(id).bulk;
    const perCm3 = valenceElectrons.value * densityGPerCm3.value / molarMassGPerMol.value;
    assertClose(28.816 * Math.sqrt(perCm3), plasmonEv, { absolute: 0.006 });
    assert.equal(gapEv.value, 0);
  },
);

// ISO 15472:2010, after M. Seah, I. Gilmore, G. Beamson, Surf. Interface Anal. 26, 642 (1998), monochromated Al K-alpha.
Deno.test.each([["Au", "4f7/2", 83.96], ["Ag", "3d5/2", 368.21], ["Cu", "2p3/2", 932.62]])(
  "%s %s has the standard's binding energy %s eV",
  (id, shell, bindingEv) => {
    assert.equal(coreLevel(id, shell).bindingEnergyEv.value, bindingEv);
  },
);

// Spin-orbit splittings of handbooks, eV (from memory, medium confidence).
Deno.test.each([
  ["Au", "4f7/2", "4f5/2", 3.67],
  ["Ag", "3d5/2", "3d3/2", 6.00],
  ["Cu", "2p3/2", "2p1/2", 19.80],
  ["Al", "2p3/2", "2p1/2", 0.41],
  ["W", "4f7/2", "4f5/2", 2.18],
])(
  "%s %s and %s are split by %s eV and share the intensity by their 2j + 1 states",
  (id, strong, weak, splitEv) => {
    const [a, b] = [coreLevel(id, strong), coreLevel(id, weak)];
    assertClose(b.bindingEnergyEv.value - a.bindingEnergyEv.value, splitEv, { absolute: 0.1 }, "splitting");
    // Statistical weights; calculated cross-sections differ from them by a few percent.
    const states = (shell: string): number => Number(shell[2]) + 1;
    const ratio = a.relativeCrossSection.value / b.relativeCrossSection.value;
    assertClose(ratio, states(strong) / states(weak), { relative: 0.06 }, "intensities");
  },
);

Deno.test("electrons from s shells have beta = 2, the exact value for dipole transitions", () => {
  // J. Cooper, R. Zare, J. Chem. Phys. 48, 942 (1968): from l = 0 only p waves leave.
  const shells = MATERIAL_IDS.flatMap((id) => material(id).coreLevels).filter(({ name }) => /s$/.test(name));
  assert.ok(shells.length > 0);
  for (const { name, beta } of shells) assert.equal(beta.value, 2, name);
});

function coreLevel(id: string, shell: string): CitedCoreLevel {
  const level = material(id).coreLevels.find(({ name }) => name === `${id} ${shell}`);
  assert.ok(level !== undefined, `${id} ${shell} is missing`);
  return level;
}

/** Every number in JSON data with the keys that lead to it. */
function numbersIn(
  value: unknown,
  path: readonly string[] = [],
): { path: readonly string[]; value: number }[] {
  if (typeof value === "number") return [{ path, value }];
  if (typeof value !== "object" || value === null) return [];
  return Object.entries(value).flatMap(([key, inner]) => numbersIn(inner, [...path, key]));
}

function at(data: unknown, path: readonly string[]): Record<string, unknown> {
  return path.reduce((inner, key) => (inner as Record<string, unknown>)[key], data) as Record<
    string,
    unknown
  >;
}

Deno.test("every number of every material stands beside a unit, a source and a confidence", () => {
  for (const id of MATERIAL_IDS) {
    for (const { path } of numbersIn(material(id))) {
      const holder = path[0] === "opticalConstants"
        ? at(material(id), ["opticalConstants"])
        : at(material(id), path.slice(0, -1));
      assert.match(String(holder.source), /\w{3}.*\w{3}/, `${id} ${path}`);
      assert.match(
        String(holder.confidence),
        /^(published|memory-(high|medium|low)|chosen)$/,
        `${id} ${path}`,
      );
      if (path[0] !== "opticalConstants") {
        assert.match(String(holder.unit), /^(eV|eV\^2|nm|g\/cm\^3|g\/mol|1)$/, `${id} ${path}`);
      }
    }
  }
});

Deno.test("parseMaterial() refuses a material in which any one number lost its source, confidence or unit", () => {
  for (const id of MATERIAL_IDS) {
    const holders = new Map(
      numbersIn(material(id)).map(({ path }) =>
        path[0] === "opticalConstants" ? [path[0]] : path.slice(0, -1)
      )
        .map((path) => [path.join("/"), path]),
    );
    for (const [pointer, path] of holders) {
      for (
        const key of path[0] === "opticalConstants"
          ? ["source", "confidence"]
          : ["source", "confidence", "unit"]
      ) {
        const data = structuredClone(material(id));
        delete at(data, path)[key];
        const places = problemsOf(() => parseMaterial(data)).map(({ place }) => place);
        assert.deepEqual(places, [`/${pointer}/${key}`]);
      }
    }
  }
});

Deno.test.each([
  [["workFunctions", "polycrystalline", "unit"], "J"],
  [["workFunctions", "polycrystalline", "value"], 51],
  [["workFunctions", "polycrystalline", "value"], "5.1"],
  [["workFunctions", "polycrystalline", "source"], "?"],
  [["workFunctions", "polycrystalline", "confidence"], "certain"],
  [["spElectrons", "value"], 0],
  [["lowEnergyMeanFreePath", "lengthNm", "unit"], "angstrom"],
  [["opticalConstants", "rows", "3", "2"], -0.1],
])("parseMaterial() refuses %s = %s and says where", (path, value) => {
  const data = structuredClone(material("Au"));
  at(data, path.slice(0, -1))[path.at(-1)!] = value;
  const [problem, ...others] = problemsOf(() => parseMaterial(data));
  assert.equal(problem.place, `/${path.join("/")}`);
  assert.ok(
    problem.message.endsWith(`current value is ${JSON.stringify(JSON.stringify(value))}`),
    problem.message,
  );
  assert.deepEqual(others, []);
});

Deno.test("parseMaterial() refuses wavelengths out of order, a missing polycrystalline value and unknown keys", () => {
  const mutable = (): Record<string, Record<string, unknown>> => JSON.parse(JSON.stringify(material("Au")));
  const unordered = mutable();
  (unordered.opticalConstants.rows as unknown[]).reverse();
  assert.equal(problemsOf(() => parseMaterial(unordered))[0].place, "/opticalConstants/rows");
  const faceless = mutable();
  delete faceless.workFunctions.polycrystalline;
  assert.equal(problemsOf(() => parseMaterial(faceless))[0].place, "/workFunctions");
  assert.match(problemsOf(() => parseMaterial({ ...mutable(), color: "yellow" }))[0].message, /color/);
  assert.equal(problemsOf(() => parseMaterial(null))[0].place, "/");
});

Deno.test("material() refuses an unknown name and gives the known ones", () => {
  assert.deepEqual(problemsOf(() => material("Unobtainium")), [{
    place: "",
    message: `Cannot look up material as material must be one of ${
      MATERIAL_IDS.join(", ")
    }: current value is "Unobtainium"`,
  }]);
  assert.match(problemsOf(() => material("AU"))[0].message, /\(did you mean Au\?\)/);
});

Deno.test("listMaterialValues() lists every number of every material with its source", () => {
  for (const id of MATERIAL_IDS) {
    const chosen = material(id);
    const rows = listMaterialValues(chosen);
    const numbers = numbersIn(chosen);
    const single = numbers.filter(({ path }) => path[0] !== "opticalConstants").map(({ value }) => value);
    const listed = rows.map(({ value }) => value).filter((value) => typeof value === "number");
    assert.deepEqual(listed.toSorted(), single.toSorted(), id);
    const optical = rows.filter(({ value }) => typeof value === "string");
    assert.equal(optical.length, chosen.opticalConstants.rows.length, id);
    chosen.opticalConstants.rows.forEach(([wavelengthUm, n, k], i) => {
      assert.ok(optical[i].quantity.includes(`${wavelengthUm} um`), optical[i].quantity);
      assert.equal(optical[i].value, `${n} + ${k} i`);
    });
    for (const row of rows) {
      assert.ok(row.source.length >= 5 && row.unit.length > 0 && row.confidence.length > 0, row.quantity);
    }
    assert.equal(
      new Set(rows.map(({ quantity }) => quantity)).size,
      rows.length,
      `${id} has two rows of one name`,
    );
  }
});
