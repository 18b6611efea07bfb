import assert from "node:assert/strict";
import { applyResponse, hemisphereResolutionEv, responseMatrix, windowEv } from "../../src/instrument/mod.ts";
import { FWHM_PER_SIGMA } from "../../src/math/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { crossing, gaussian, integrate } from "../support/integrate.ts";

// E_p (w/(2 R0) + alpha^2/4): 33.3333 + 6.8539 and 6.25 + 0.3808 meV, worked by hand from the textbook formula.
Deno.test.each([
  [10, 1, 150, 3, 40.1872],
  [5, 0.5, 200, 1, 6.6308],
])(
  "hemisphereResolutionEv() at %s eV, slit %s mm, radius %s mm, %s degrees is %s meV",
  (pass, slit, radius, angleDeg, meV) => {
    const resolution = hemisphereResolutionEv(pass, slit, radius, (angleDeg * Math.PI) / 180);
    assertClose(1000 * resolution, meV, { absolute: 6e-5 });
  },
);

Deno.test("FWHM_PER_SIGMA and windowEv() are those of a Gaussian", () => {
  // 2 sqrt(2 ln 2) = 2.354820045 to ten digits; the area under a Gaussian of height 1.
  assertClose(FWHM_PER_SIGMA, 2.354820045, { absolute: 5e-10 });
  const sigma = 0.1 / 2.354820045;
  const area = integrate((x) => gaussian(x, sigma) / gaussian(0, sigma), [-1, 1]);
  assertClose(windowEv(0.1), area, { relative: 1e-8 });
});

const BINS = { startEv: -0.3, stepEv: 0.02, count: 400 };
const grid = (start: number, step: number, count: number): Float64Array =>
  Float64Array.from({ length: count }, (_, i) => start + i * step);

Deno.test("responseMatrix() conserves counts", () => {
  // Channels closer than half a standard deviation sum a Gaussian exactly to 1e-15 and more (Poisson's summation formula).
  const contents = grid(0, 1, BINS.count).map((i) => (i % 7) + 100 * Math.exp(-i / 60));
  const total = contents.reduce((a, b) => a + b);
  for (const fwhmEv of [0.03, 0.1, 0.6]) {
    const step = fwhmEv / 6;
    const channels = grid(-3, step, Math.ceil(14 / step));
    const density = applyResponse(responseMatrix(channels, BINS, fwhmEv), contents);
    assertClose(density.reduce((a, b) => a + b) * step, total, { relative: 1e-9 }, `fwhm ${fwhmEv}`);
  }
});

Deno.test("responseMatrix() spreads one narrow bin into a Gaussian of the given width about its middle", () => {
  const fine = { startEv: 2, stepEv: 1e-4, count: 1 };
  const densityAt = (energyEv: number): number =>
    applyResponse(responseMatrix(Float64Array.of(energyEv), fine, 0.1), Float64Array.of(1))[0];
  const middle = 2.00005;
  const half = densityAt(middle) / 2;
  assertClose(
    crossing(densityAt, half, middle, middle + 0.2) - middle,
    0.05,
    { absolute: 1e-6 },
    "upper half",
  );
  assertClose(
    crossing(densityAt, half, middle, middle - 0.2) - middle,
    -0.05,
    { absolute: 1e-6 },
    "lower half",
  );
});

Deno.test("responseMatrix() equals the convolution integral of uniform bins", () => {
  const contents = Float64Array.of(3, 0, 8, 1);
  const bins = { startEv: 1, stepEv: 0.05, count: 4 };
  const channels = grid(0.8, 0.03, 20);
  const density = applyResponse(responseMatrix(channels, bins, 0.09), contents);
  channels.forEach((channel, c) => {
    const exact = contents.reduce((sum, content, b) => {
      const low = 1 + b * 0.05;
      return sum +
        (content / 0.05) * integrate((e) => gaussian(e - channel, 0.09 / 2.354820045), [low, low + 0.05]);
    }, 0);
    assertClose(density[c], exact, { absolute: 1e-6 }, `channel ${c}`);
  });
});

Deno.test("responseMatrix() gives zero to channels out of reach of the bins", () => {
  const density = applyResponse(
    responseMatrix(Float64Array.of(-50, 3, 90), BINS, 0.1),
    new Float64Array(BINS.count).fill(0.02),
  );
  assert.equal(density[0], 0);
  assertClose(density[1], 1, { absolute: 1e-9 }, "density of one electron per eV");
  assert.equal(density[2], 0);
});
