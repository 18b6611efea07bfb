import assert from "node:assert/strict";
import { doniachSunjic, lineProfile } from "../../src/spectrum/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { crossing, gaussian, integrate } from "../support/integrate.ts";

const FWHM_PER_SIGMA = 2 * Math.sqrt(2 * Math.LN2);

/** A Voigt line with Gaussian standard deviation 1. */
function voigt(gamma: number): (x: number) => number {
  return lineProfile({ lorentzFwhmEv: 2 * gamma, gaussFwhmEv: FWHM_PER_SIGMA, asymmetry: 0 });
}

Deno.test("lineProfile() gives the Voigt function of the Faddeeva function", () => {
  // Standard deviation 1, Lorentzian half-width gamma; computed outside the project by two libraries, agreeing to 4e-15.
  const offsets = [0, 1, 2, 5, 10];
  const table: readonly (readonly [number, readonly number[]])[] = [
    [0.1, [0.369004682480, 0.233232094278, 0.0621301067682, 1.47191634998e-3, 3.28338068894e-4]],
    [0.5, [0.278955470389, 0.200179637591, 0.0824240827886, 7.24562259517e-3, 1.63745538763e-3]],
    [1, [0.208709280520, 0.165795662689, 0.0907151994263, 1.38849212886e-2, 3.24873485977e-3]],
    [2, [0.134125991416, 0.118587983493, 0.0853927505897, 2.40159503659e-2, 6.29652775913e-3]],
  ];
  for (const [gamma, values] of table) {
    const line = voigt(gamma);
    offsets.forEach((x, i) => {
      assertClose(line(x), values[i], { relative: 2e-10, absolute: 1e-12 }, `gamma ${gamma}, x ${x}`);
      assert.ok(Math.abs(line(-x) - line(x)) < 1e-14, "symmetric");
    });
  }
});

Deno.test("lineProfile() has the full widths of the exact Voigt line", () => {
  // Computed outside the project; within 2e-4 of J. Olivero, R. Longbothum, JQSRT 17, 233 (1977).
  const table = [[0.1, 1.0543824121], [0.5, 1.2937759882], [1, 1.6375953596], [2, 2.4357306557]];
  for (const [lorentzFwhmEv, expected] of table) {
    const line = lineProfile({ lorentzFwhmEv, gaussFwhmEv: 1, asymmetry: 0 });
    const width = 2 * crossing(line, line(0) / 2, 0, 5);
    assertClose(width, expected, { relative: 1e-9 }, `f_L ${lorentzFwhmEv}`);
  }
});

Deno.test("lineProfile() is Gaussian or Lorentzian where the other width is zero", () => {
  const pure = lineProfile({ lorentzFwhmEv: 0, gaussFwhmEv: FWHM_PER_SIGMA, asymmetry: 0 });
  for (const x of [0, 0.5, 3, 7.9]) assertClose(pure(x), gaussian(x, 1), { absolute: 1e-11 }, `x ${x}`);
  const lorentz = lineProfile({ lorentzFwhmEv: 2, gaussFwhmEv: 0, asymmetry: 0 });
  for (const x of [0, 1, 40]) {
    assertClose(lorentz(x), 1 / (Math.PI * (1 + x * x)), { relative: 1e-12 }, `x ${x}`);
  }
});

Deno.test("doniachSunjic() gives the grid computed from its formula", () => {
  // Half-width 0.1; computed outside the project from the published formula.
  const offsets = [-1, -0.5, -0.1, 0, 0.1, 0.5, 1];
  const table: readonly (readonly [number, readonly number[]])[] = [
    [0, [.09900990099, .3846153846, 5, 10, 5, .3846153846, .09900990099]],
    [0.05, [.2557374283, .6607382193, 5.194039997, 9.164498916, 4.489548211, .3646278503, .09705769941]],
    [0.1, [.4180646891, .9252081370, 5.298209453, 8.383912975, 4.035596648, .3462436362, .09530171974]],
    [0.2, [.7541565626, 1.412204082, 5.294598186, 6.986264191, 3.272241636, .3138124430, .09236308351]],
  ];
  for (const [asymmetry, values] of table) {
    offsets.forEach((e, i) => {
      assertClose(doniachSunjic(e, 0.1, asymmetry), values[i], { relative: 1e-9 }, `a ${asymmetry}, e ${e}`);
    });
  }
});

Deno.test("doniachSunjic() has its maximum and width where the closed form and the table put them", () => {
  const table = [[0, 0, 2], [0.05, -0.0402986223658, 2.1241902856], [0.1, -0.0828623624508, 2.2745257761], [
    0.2,
    -0.176326980708,
    2.6885640963,
  ]];
  for (const [asymmetry, top, width] of table) {
    const line = (x: number): number => doniachSunjic(x, 1, asymmetry);
    assertClose(
      -Math.tan(Math.PI * asymmetry / (2 * (2 - asymmetry))),
      top,
      { absolute: 1e-12 },
      "closed form",
    );
    for (const step of [-1e-4, 1e-4]) assert.ok(line(top + step) < line(top), `maximum, a ${asymmetry}`);
    const half = line(top) / 2;
    const full = crossing(line, half, top, 20) - crossing(line, half, -20, top);
    assertClose(full, width, { relative: 1e-8 }, `width, a ${asymmetry}`);
  }
});

Deno.test("lineProfile() folds an asymmetric line with the Gaussian", () => {
  // Direct quadrature of the convolution, from the published formula of the sharp line.
  for (
    const [asymmetry, gamma, sigma] of [[0.1, 0.1, 0.2], [0.3, 0.02, 0.15], [0.2, 0.3, 0.05], [
      0.45,
      0.1,
      0.3,
    ]]
  ) {
    const line = lineProfile({ lorentzFwhmEv: 2 * gamma, gaussFwhmEv: sigma * FWHM_PER_SIGMA, asymmetry });
    for (const e of [-3, -1.2, -0.4, -0.05, 0, 0.2, 0.9, 2.5]) {
      const breaks = [-9, -2, -0.5, 0, 0.5, 2, 9].map((k) => e + k * sigma).concat([0, -gamma, gamma])
        .filter((x) => Math.abs(x - e) < 9.1 * sigma).sort((a, b) => a - b);
      const folded = integrate(
        (x) => doniachSunjic(x, gamma, asymmetry) / Math.PI * gaussian(e - x, sigma),
        breaks,
        400,
      );
      assertClose(line(e), folded, { relative: 1e-7, absolute: 1e-9 }, `a ${asymmetry}, e ${e}`);
    }
  }
});

Deno.test("lineProfile() is continuous where the tail series takes over", () => {
  for (const asymmetry of [0, 0.05, 0.3]) {
    const line = lineProfile({ lorentzFwhmEv: 0.2, gaussFwhmEv: FWHM_PER_SIGMA, asymmetry });
    const edge = Math.sqrt(64 - 0.01);
    for (const sign of [-1, 1]) {
      const [inside, outside] = [line(sign * (edge - 1e-9)), line(sign * (edge + 1e-9))];
      assert.ok(Math.abs(inside - outside) < 1e-10 * line(0), `a ${asymmetry}: ${inside - outside}`);
    }
  }
});

Deno.test("lineProfile() refuses shapes that are none", () => {
  const cases: [number, number, number, string][] = [
    [0, 0, 0, 'widths must be >= 0 eV and not both 0: current value is "0 eV, 0 eV"'],
    [-1, 1, 0, 'widths must be >= 0 eV and not both 0: current value is "-1 eV, 1 eV"'],
    [1, 1, 0.6, "asymmetry must be in 0..0.49: current value is 0.6"],
  ];
  for (const [lorentzFwhmEv, gaussFwhmEv, asymmetry, message] of cases) {
    assert.throws(() => lineProfile({ lorentzFwhmEv, gaussFwhmEv, asymmetry }), {
      name: "RangeError",
      message: `Cannot shape a line as ${message}`,
    });
  }
});
