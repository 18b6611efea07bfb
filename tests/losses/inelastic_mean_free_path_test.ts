import assert from "node:assert/strict";
import { type BulkNumbers, meanFreePathLaw, meanFreePathNotices } from "../../src/losses/mod.ts";
import { assertClose } from "../support/assert_close.ts";

function bulk(valenceElectrons: number, density: number, molarMass: number, gapEv: number): BulkNumbers {
  return { valenceElectrons, densityGPerCm3: density, molarMassGPerMol: molarMass, gapEv };
}

const SOLIDS = {
  Au: bulk(11, 19.32, 196.967, 0),
  Ag: bulk(11, 10.50, 107.868, 0),
  Cu: bulk(11, 8.96, 63.546, 0),
  Al: bulk(3, 2.70, 26.982, 0),
  Si: bulk(4, 2.33, 28.086, 1.1),
  graphite: bulk(4, 2.25, 12.011, 0),
  SiO2: bulk(16, 2.19, 60.084, 9.0),
  Al2O3: bulk(24, 3.97, 101.961, 9.0),
  polyethylene: bulk(6, 0.93, 14.027, 8.8),
} as const;

const ENERGIES_EV = [50, 100, 200, 500, 1000, 1486.6];

// The formula of the 1994 paper in angstroms, evaluated by an independent program, in nm; last the form of 2015 at 1486.6 eV.
Deno.test.each(
  [
    ["Au", [0.4857, 0.3857, 0.4611, 0.7644, 1.2298, 1.6476], 1.6422],
    ["Ag", [0.4319, 0.4201, 0.5286, 0.9034, 1.4744, 1.9880], 1.9813],
    ["Cu", [0.3387, 0.4049, 0.5381, 0.9403, 1.5450, 2.0884], 2.0813],
    ["Al", [0.4155, 0.5275, 0.7573, 1.4024, 2.3663, 3.2352], 3.2239],
    ["Si", [0.4161, 0.5305, 0.7614, 1.4118, 2.3857, 3.2646], 3.2531],
    ["graphite", [0.6267, 0.6944, 0.9046, 1.6003, 2.6709, 3.6421], 3.6293],
    ["SiO2", [0.7148, 0.7825, 1.0216, 1.8111, 3.0252, 4.1267], 4.1122],
    ["Al2O3", [0.7055, 0.7130, 0.8869, 1.5271, 2.5195, 3.4189], 3.4071],
    ["polyethylene", [0.7258, 0.8912, 1.2308, 2.2578, 3.8279, 5.2555], 5.2367],
  ] as const,
)("meanFreePathLaw() gives TPP-2M of %s", (solid, lengthsNm, relativisticNm) => {
  const law = meanFreePathLaw({ kind: "tpp2m", relativistic: false, bulk: SOLIDS[solid] });
  ENERGIES_EV.forEach((e, i) =>
    assertClose(law.lengthNm(e), lengthsNm[i], { absolute: 6e-5 }, `${solid} at ${e} eV`)
  );
  const modern = meanFreePathLaw({ kind: "tpp2m", relativistic: true, bulk: SOLIDS[solid] });
  assertClose(modern.lengthNm(1486.6), relativisticNm, { absolute: 6e-5 });
});

// Paths from optical data: S. Tanuma, C. Powell, D. Penn, Surf. Interface Anal. 43, 689 (2011), Table 4. The formula is said to
// be within about 10 % in the mean; single solids are off by up to twice that.
Deno.test.each(
  [
    ["Al", 992.3, 2.12],
    ["Al", 9897.1, 14.36],
    ["Si", 99.5, 0.525],
    ["Si", 992.3, 2.43],
    ["Si", 9897.1, 16.42],
    ["Cu", 200.3, 0.629],
    ["Cu", 492.7, 1.03],
    ["Cu", 992.3, 1.66],
    ["Cu", 9897.1, 10.48],
  ] as const,
)("meanFreePathLaw() of %s at %s eV is within 15 %% of %s nm from optical data", (solid, energyEv, nm) => {
  const law = meanFreePathLaw({ kind: "tpp2m", relativistic: true, bulk: SOLIDS[solid] });
  assertClose(law.lengthNm(energyEv), nm, { relative: 0.15 });
});

Deno.test("meanFreePathLaw() approaches its older form for slow electrons and falls behind it for fast ones", () => {
  // Exact limits of a(E) = (1 + E/2mc^2)/(1 + E/mc^2)^2: 1 - 3E/2mc^2 at first.
  const [old, modern] = [false, true].map((relativistic) =>
    meanFreePathLaw({ kind: "tpp2m", relativistic, bulk: SOLIDS.Cu })
  );
  assertClose(modern.lengthNm(50) / old.lengthNm(50), 1, { absolute: 2e-4 });
  const ratio = modern.lengthNm(2000) / old.lengthNm(2000);
  assert.ok(ratio < 1 - 0.7 * 1.5 * 2000 / 510999 && ratio > 1 - 1.5 * 2000 / 510999, String(ratio));
});

// M. Seah, W. Dench, Surf. Interface Anal. 1, 2 (1979), in nm (coefficients from memory), by an independent program.
Deno.test.each(
  [
    ["element", [5.8407, 1.6008, 0.5990, 0.4390, 0.5543, 0.7673, 1.2080, 1.7078, 2.0821]],
    ["inorganic", [25.8547, 6.7136, 2.0318, 0.9352, 1.0241, 1.3737, 2.1492, 3.0364, 3.7017]],
    ["organic", [1.4345, 0.5851, 0.4666, 0.6276, 0.8731, 1.2311, 1.9455, 2.7512, 3.3544]],
  ] as const,
)("meanFreePathLaw() gives the universal curve of an %s substance", (substance, lengthsNm) => {
  const law = meanFreePathLaw({ kind: "seah-dench", substance });
  [5, 10, 20, 50, 100, 200, 500, 1000, 1486.6].forEach((e, i) =>
    assertClose(law.lengthNm(e), lengthsNm[i], { absolute: 6e-5 }, `${e} eV`)
  );
});

// M. Seah, Surf. Interface Anal. 44, 497 (2012) (coefficients from memory), by an independent program.
Deno.test.each(
  [
    ["Au", 79, 1.3595],
    ["Ag", 47, 1.5675],
    ["Cu", 29, 1.4497],
    ["Al", 13, 2.2042],
    ["Si", 14, 2.4544],
  ] as const,
)("meanFreePathLaw() gives S1 of %s at 1000 eV", (solid, atomicNumber, nm) => {
  const law = meanFreePathLaw({
    kind: "seah-s1",
    atomicNumber,
    atomsPerFormula: 1,
    bulk: SOLIDS[solid],
  });
  assertClose(law.lengthNm(1000), nm, { relative: 2e-4 });
});

Deno.test("meanFreePathNotices() tells that TPP-2M of gold rises unphysically toward 50 eV", () => {
  // The published warning: errors of TPP-2M are largest below 200 eV; the rise of gold is visible in the table above.
  const law = meanFreePathLaw({ kind: "tpp2m", relativistic: true, bulk: SOLIDS.Au });
  const [notice, ...others] = meanFreePathNotices(law, 50, 1500, "/sample");
  assert.equal(others.length, 0);
  assert.equal(notice.code, "mean-free-path-rises");
  assert.equal(notice.place, "/sample");
  assert.match(
    notice.message,
    /^TPP-2M \(relativistic\) rises from 0\.385 nm at 9\d\.?\d* eV to 0\.486 nm at 50 eV/,
  );
});

Deno.test("meanFreePathNotices() is silent inside the range where nothing rises", () => {
  for (const solid of ["Cu", "Al", "Si", "graphite"] as const) {
    const law = meanFreePathLaw({ kind: "tpp2m", relativistic: false, bulk: SOLIDS[solid] });
    assert.deepEqual(meanFreePathNotices(law, 50, 2000, ""), [], solid);
  }
  const gold = meanFreePathLaw({ kind: "tpp2m", relativistic: false, bulk: SOLIDS.Au });
  assert.deepEqual(meanFreePathNotices(gold, 100, 2000, ""), []);
});

Deno.test("meanFreePathNotices() names formula, range and use outside the range", () => {
  const law = meanFreePathLaw({ kind: "tpp2m", relativistic: false, bulk: SOLIDS.Al });
  assert.deepEqual(meanFreePathNotices(law, 20, 1486.6, "/x"), [{
    code: "mean-free-path-outside-range",
    message:
      "TPP-2M holds for 50..2000 eV (S. Tanuma, C. Powell, D. Penn, Surf. Interface Anal. 21, 165 (1994)): it is used for 20..1487 eV",
    place: "/x",
  }]);
  const table = meanFreePathLaw({ kind: "table", energiesEv: [10, 20], lengthsNm: [1, 2] });
  assert.deepEqual(meanFreePathNotices(table, 10, 20, ""), []);
  assert.equal(meanFreePathNotices(table, 10, 21, "")[0].code, "mean-free-path-outside-range");
});

Deno.test("meanFreePathNotices() tells where the formula has no positive value", () => {
  // Twenty valence electrons in a light formula unit: beta = -1 + 9.44/30.5 + 0.69 < 0, so the logarithm wins at high energy.
  const law = meanFreePathLaw({ kind: "tpp2m", relativistic: false, bulk: bulk(20, 1, 18, 5) });
  assert.equal(law.lengthNm(1000), Infinity);
  assert.deepEqual(meanFreePathNotices(law, 60, 1000, "/y"), [{
    code: "mean-free-path-undefined",
    message: "TPP-2M has no positive value at some energies in 60..1000 eV",
    place: "/y",
  }]);
});

Deno.test("meanFreePathLaw() of a table passes its nodes and is linear between them", () => {
  const law = meanFreePathLaw({ kind: "table", energiesEv: [10, 20, 40], lengthsNm: [3, 1, 2] });
  assert.deepEqual([10, 15, 20, 30].map(law.lengthNm), [3, 2, 1, 1.5]);
});

Deno.test("meanFreePathLaw() refuses impossible numbers with the rule and the value", () => {
  const refuse = (make: () => unknown, message: string): void =>
    assert.throws(make, { name: "RangeError", message });
  refuse(
    () => meanFreePathLaw({ kind: "tpp2m", relativistic: true, bulk: bulk(11, -1, 197, 0) }),
    "Cannot use mean free path as densityGPerCm3 must be > 0: current value is -1",
  );
  refuse(
    () => meanFreePathLaw({ kind: "tpp2m", relativistic: true, bulk: bulk(11, 19, 197, NaN) }),
    "Cannot use mean free path as gapEv must be >= 0: current value is NaN",
  );
  refuse(
    () => meanFreePathLaw({ kind: "seah-s1", atomicNumber: 0, atomsPerFormula: 1, bulk: SOLIDS.Al }),
    "Cannot use mean free path as atomicNumber must be in 1..103: current value is 0",
  );
  refuse(
    () => meanFreePathLaw({ kind: "table", energiesEv: [10, 10], lengthsNm: [1, 2] }),
    'Cannot use mean free path as the table must have at least 2 rows with ascending energies > 0: current value is "2 energies, 2 lengths"',
  );
  refuse(
    () => meanFreePathLaw({ kind: "table", energiesEv: [10, 20], lengthsNm: [1, 0] }),
    'Cannot use mean free path as every length must be > 0 nm: current value is "0 nm"',
  );
  const law = meanFreePathLaw({ kind: "seah-dench", substance: "element" });
  refuse(
    () => law.lengthNm(0),
    'Cannot use mean free path as the energy must be > 0 eV: current value is "0 eV"',
  );
  refuse(
    () => meanFreePathNotices(law, 0, 10, ""),
    'Cannot use mean free path as energies must be > 0 eV and ascend: current value is "0..10 eV"',
  );
});
