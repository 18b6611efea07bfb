import assert from "node:assert/strict";
import { LAMP_NAMES, lampLines, nearestLine } from "../../src/data/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { problemsOf } from "../support/input_problems.ts";

// Photon energies, eV, by a source other than our wavelengths: He I and Ar I from the level energies of the NIST Atomic
// Spectra Database (171134.8970, 186209.3650, 191492.7120; 95399.8278, 93750.5978 cm^-1; from memory) times
// 1.239841984e-4 eV cm; He II from the Dirac levels with reduced mass, weighted mean of the two fine-structure lines, less
// the Lamb shift of 1s, 0.00045 eV (computed independently); Ne I nominal energies of the textbooks.
Deno.test.each([
  ["He I", 0, 21.21802, 2e-5],
  ["He I", 1, 23.08702, 2e-5],
  ["He I", 2, 23.74207, 2e-5],
  ["He II", 0, 40.8135, 2e-4],
  ["He II", 1, 48.3714, 2e-4],
  ["He II", 2, 51.0167, 2e-4],
  ["Ne I", 0, 16.848, 1e-3],
  ["Ne I", 1, 16.671, 1e-3],
  ["Ar I", 0, 11.82807, 2e-5],
  ["Ar I", 1, 11.62359, 2e-5],
])("lampLines() of %s, line %s, is %s eV", (lamp, index, energyEv, tolerance) => {
  assertClose(lampLines(lamp)[index].energyEv, energyEv, {
    absolute: tolerance,
  });
});

Deno.test("lampLines() puts the helium satellites 1.869 and 2.524 eV above the main line", () => {
  // Differences of the level energies above.
  const [main, beta, gamma] = lampLines("He I");
  assertClose(beta.energyEv - main.energyEv, 1.8690, { absolute: 1e-4 });
  assertClose(gamma.energyEv - main.energyEv, 2.5241, { absolute: 1e-4 });
});

Deno.test("the lines of the hydrogen-like ion obey Rydberg's formula", () => {
  // (1 - 1/n^2) 4 R_He with R_He = 13.60383 eV (R infinity 13.605693 eV x reduced mass 0.99986293); the relativistic
  // shift of the levels, 0.002 eV, is left out.
  lampLines("He II").forEach((line, i) =>
    assertClose(line.energyEv, 4 * 13.603828 * (1 - 1 / (i + 2) ** 2), { absolute: 3e-3 }, line.name)
  );
});

Deno.test("every lamp line has its main line at 1, a source and a confidence", () => {
  assert.ok(LAMP_NAMES.length >= 4);
  for (const lamp of LAMP_NAMES) {
    const lines = lampLines(lamp);
    assert.equal(lines[0].relativeIntensity, 1);
    for (const line of lines) {
      assert.ok(line.relativeIntensity > 0 && line.relativeIntensity <= 1, line.name);
      assert.ok(line.wavelengthNm.source.length > 10 && line.wavelengthNm.confidence.length > 0, line.name);
      assert.equal(line.wavelengthNm.unit, "nm");
    }
  }
});

Deno.test("lampLines() refuses an unknown lamp and names the nearest", () => {
  assert.deepEqual(problemsOf(() => lampLines("He1")), [{
    place: "",
    message: `Cannot look up lamp as lamp must be one of ${
      LAMP_NAMES.join(", ")
    } (did you mean He I?): current value is "He1"`,
  }]);
});

// Energies as people round them.
Deno.test.each([
  [21.2, "He I alpha", 2],
  [21.22, "He I alpha", 2],
  [21.24, "He I alpha", 2],
  [40.8, "He II alpha", 2],
  [16.85, "Ne I", 1],
  [11.83, "Ar I", 1],
])("nearestLine() of %s eV is %s with %s weaker lines", (photonEnergyEv, name, satellites) => {
  const line = nearestLine(photonEnergyEv);
  assert.equal(line?.name, name);
  assert.equal(line?.satellites.length, satellites);
});

Deno.test.each([6.2, 14, 21.15, 21.26, 23.087, 30, NaN])(
  "nearestLine() of %s eV is none",
  (photonEnergyEv) => {
    assert.equal(nearestLine(photonEnergyEv), null);
  },
);

Deno.test("nearestLine() gives satellites as distances from the main line with their intensities", () => {
  const line = nearestLine(11.83)!;
  // 11.62359 - 11.82807 eV, from the level energies above.
  assertClose(line.satellites[0].shiftEv, -0.20448, { absolute: 3e-5 });
  assert.equal(line.satellites[0].relativeIntensity, lampLines("Ar I")[1].relativeIntensity);
});
