import assert from "node:assert/strict";
import fc from "fast-check";
import { broadenedFermiEdge } from "../../src/spectrum/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { crossing, gaussian, integrate } from "../support/integrate.ts";

const KT_300_EV = 0.02585199979;
/** Full width at half maximum of a Gaussian in standard deviations, 2 sqrt(2 ln 2) to ten digits. */
const FWHM = 2.354820045;

type Shape = Parameters<ReturnType<typeof broadenedFermiEdge>>[1];

function shapeAt(thermalEv: number, sigmaEv: number, energyEv: number): Shape {
  const out = { occupation: 0, slopeEv: 0, curveEv2: 0 };
  broadenedFermiEdge(thermalEv, sigmaEv)(energyEv, out);
  return out;
}

function widthBetween(high: number, low: number, thermalEv: number, sigmaEv: number): number {
  const occupation = (energyEv: number): number => shapeAt(thermalEv, sigmaEv, energyEv).occupation;
  const reach = 20 * thermalEv + 5 * sigmaEv;
  return crossing(occupation, low, -reach, reach) - crossing(occupation, high, -reach, reach);
}

// f(E) = 1/(exp(E/kT) + 1) solved for the levels: 2 ln 9, 2 ln 4, 2 ln(84/16).
Deno.test.each([
  [0.9, 0.1, 4.394449155],
  [0.8, 0.2, 2.772588722],
  [0.84, 0.16, 3.316456153],
])("broadenedFermiEdge() without broadening falls from %s to %s within %s kT", (high, low, width) => {
  assertClose(widthBetween(high, low, 1, 1e-4), width, { absolute: 1e-7 });
});

// Gaussian edge at 0 K: inverse error function, 1.0884496828 and 0.84461 FWHM.
Deno.test.each([[0.9, 0.1, 1.0884496828, 1e-8], [0.84, 0.16, 0.84461, 1e-5]])(
  "broadenedFermiEdge() at 0 K falls from %s to %s within %s FWHM",
  (high, low, width, tolerance) => {
    assertClose(widthBetween(high, low, 0, 1 / FWHM), width, { absolute: tolerance });
  },
);

// Width from 90 to 10 % of the exact convolution, meV, by an independent program; T in K, resolution in meV.
Deno.test.each([
  [300, 20, 115.8159],
  [300, 50, 126.7516],
  [300, 100, 159.2044],
  [300, 150, 201.1654],
  [300, 300, 347.6229],
  [77, 20, 36.7657],
  [77, 100, 113.0900],
])("broadenedFermiEdge() at %s K and %s meV falls within %s meV", (temperatureK, fwhmMeV, width) => {
  const found = 1000 * widthBetween(0.9, 0.1, KT_300_EV * temperatureK / 300, fwhmMeV / 1000 / FWHM);
  assertClose(found, width, { absolute: 1e-4 });
  // The usual sum of squares is not the exact width: these digits would not pass.
  const squares = Math.hypot(4.394449155 * KT_300_EV * temperatureK / 0.3, 1.08844968 * fwhmMeV);
  assert.throws(() => assertClose(squares, width, { absolute: 1e-4 }));
});

Deno.test("the slope of the thermal edge is 3.525494348 kT wide at half maximum", () => {
  // -df/dE = 1/(4 kT cosh^2(E/2kT)): 4 ln(1 + sqrt 2) kT.
  const h = 1e-3;
  const slope = (e: number): number =>
    (shapeAt(1, 1e-4, e - h).occupation - shapeAt(1, 1e-4, e + h).occupation) / (2 * h);
  assertClose(2 * crossing(slope, slope(0) / 2, 0, 6), 3.525494348, { absolute: 1e-5 });
});

// kT and sigma, eV: warm, cold, both sides of the change of method at kT = sigma/20, and the lowest temperatures.
Deno.test.each([
  [KT_300_EV, 0.0085, 1e-7],
  [KT_300_EV, 0.05, 1e-7],
  [KT_300_EV, 0.2, 1e-7],
  [0.0066, 0.05, 1e-7],
  [0.0051, 0.1, 1e-7],
  [0.0049, 0.1, 3e-5],
  [0.00036, 0.05, 1e-7],
])(
  "broadenedFermiEdge() of kT %s and sigma %s eV equals the convolution integrals to %s",
  (kT, sigma, tolerance) => {
    // Simpson's rule over the Gaussian, in steps of at most kT/6 so that the Fermi function is resolved.
    const steps = Math.ceil((8 * sigma) / (kT / 6));
    const fold = (power: number, energyEv: number): number =>
      integrate(
        (y) => (energyEv - y) ** power * gaussian(y, sigma) / (1 + Math.exp((energyEv - y) / kT)),
        [-8 * sigma, 8 * sigma],
        steps,
      );
    const width = Math.hypot(kT, sigma);
    for (
      const energyEv of [-10, -6, -2.1, -1, -0.3, 0, 0.2, 0.9, 2.5, 6, 10].map((widths) => widths * width)
    ) {
      const shape = shapeAt(kT, sigma, energyEv);
      assertClose(shape.occupation, fold(0, energyEv), { absolute: tolerance }, `occupation at ${energyEv}`);
      assertClose(
        shape.slopeEv / width,
        fold(1, energyEv) / width,
        { absolute: 4 * tolerance },
        `slope at ${energyEv}`,
      );
      assertClose(
        shape.curveEv2 / width ** 2,
        fold(2, energyEv) / width ** 2,
        { absolute: 16 * tolerance },
        `curve at ${energyEv}`,
      );
    }
  },
);

Deno.test("broadenedFermiEdge() treats electrons and holes alike", () => {
  // f(E) + f(-E) = 1, folded with an even response: moments of 1, E and E^2 are 1, E and E^2 + sigma^2.
  fc.assert(
    fc.property(
      fc.double({ min: 0, max: 0.1, noNaN: true }),
      fc.double({ min: 0.002, max: 0.3, noNaN: true }),
      fc.double({ min: 0, max: 1, noNaN: true }),
      (kT, sigma, energyEv) => {
        const above = shapeAt(kT, sigma, energyEv);
        const below = shapeAt(kT, sigma, -energyEv);
        assertClose(above.occupation + below.occupation, 1, { absolute: 1e-7 }, "occupation");
        assertClose(above.slopeEv - below.slopeEv, energyEv, { absolute: 1e-7 }, "slope");
        assertClose(above.curveEv2 + below.curveEv2, energyEv ** 2 + sigma ** 2, { absolute: 1e-7 }, "curve");
      },
    ),
    { seed: 1, numRuns: 200 },
  );
});

Deno.test("broadenedFermiEdge() ends in a full and an empty band", () => {
  for (const [kT, sigma] of [[KT_300_EV, 0.03], [0, 0.03]]) {
    const full = shapeAt(kT, sigma, -5);
    assert.equal(full.occupation, 1);
    assertClose(full.slopeEv, -5, { absolute: 1e-12 });
    assertClose(full.curveEv2, 25 + sigma ** 2, { absolute: 1e-12 });
    const empty = shapeAt(kT, sigma, 5);
    for (const value of [empty.occupation, empty.slopeEv, empty.curveEv2]) {
      assertClose(value, 0, { absolute: 1e-12 });
    }
  }
});
