import assert from "node:assert/strict";
import { broadenedHinge, broadenedRampStep, broadenedTopStep } from "../../src/spectrum/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { gaussian, integrate } from "../support/integrate.ts";

/** Folds a function with kinks at the given energies with a Gaussian, by Simpson's rule between the kinks. */
function fold(f: (energyEv: number) => number, x: number, sigma: number, kinks: readonly number[]): number {
  const breaks = [x - 9 * sigma, ...kinks.filter((kink) => Math.abs(kink - x) < 9 * sigma), x + 9 * sigma];
  return integrate((y) => f(y) * gaussian(x - y, sigma), breaks, 600);
}

const PLACES = [-5, -2.2, -1, -0.3, 0, 0.4, 1.3, 3, 7];

// sigma and decay, eV; the response is narrower than, like and wider than the decay.
Deno.test.each([[0.03, 2], [0.03, 0.3], [0.1, 0.1], [0.3, 0.05], [0.02, 50]])(
  "broadenedTopStep() of sigma %s and decay %s eV equals the convolution integral",
  (sigma, decay) => {
    for (const x of PLACES.map((sigmas) => sigmas * sigma)) {
      // The step starts inside the integral, so that only its upper side is folded.
      const low = Math.max(0, x - 9 * sigma);
      const top = (y: number): number => Math.exp(-y / decay) * gaussian(x - y, sigma);
      const exact = integrate(top, [low, x + 9 * sigma], 2000);
      assertClose(broadenedTopStep(x, sigma, decay), exact, { absolute: 1e-9 }, `at ${x}`);
    }
  },
);

Deno.test("broadenedTopStep() neither overflows nor turns NaN far from the step", () => {
  for (
    const [x, sigma, decay] of [[-100, 0.01, 1], [100, 0.01, 1], [1e4, 1, 0.01], [-1e4, 1, 0.01], [
      0,
      5,
      1e-3,
    ]]
  ) {
    const height = broadenedTopStep(x, sigma, decay);
    assert.ok(height >= 0 && height <= 1, `${height} at ${x}, ${sigma}, ${decay}`);
  }
});

Deno.test("broadenedHinge() equals the convolution integral and signals 0.398942 sigma at the onset", () => {
  // 1/sqrt(2 pi), Abramowitz & Stegun, Table 26.1 at x = 0.
  assertClose(broadenedHinge(0, 0.07), 0.3989422804 * 0.07, { absolute: 1e-11 });
  for (const x of PLACES.map((sigmas) => sigmas * 0.07)) {
    assertClose(
      broadenedHinge(x, 0.07),
      fold((y) => Math.max(0, y), x, 0.07, [0]),
      { absolute: 1e-10 },
      `at ${x}`,
    );
  }
  // Far above the onset the line goes through the true onset: no resolution shift for a ramp.
  assertClose(broadenedHinge(1, 0.07), 1, { absolute: 1e-12 });
});

// sigma, ramp, decay (eV) and decaying share; the last three change method (ramp below sigma/1000), rise and have no ramp.
Deno.test.each([
  [0.03, 0.05, 2, 0.6],
  [0.03, 0.4, 1, 1],
  [0.03, 0.4, 1, 0],
  [0.1, 0.001, 0.5, 0.5],
  [0.03, 2e-5, 0.5, 0.7],
  [0.03, 0.05, 1, -0.8],
  [0.03, 0, 1, 0.3],
])(
  "broadenedRampStep() of sigma %s, ramp %s, decay %s eV, share %s equals the convolution integral",
  (sigma, ramp, decay, share) => {
    // A step averaged over positions 0..ramp: the decaying part from its start to the nearer of y and ramp, in closed form.
    const edge = (y: number): number => {
      if (y <= 0) return 0;
      if (ramp === 0) return share * Math.exp(-y / decay) + 1 - share;
      const last = Math.min(y, ramp);
      const falling = decay * (Math.exp(-(y - last) / decay) - Math.exp(-y / decay)) / ramp;
      return share * falling + (1 - share) * last / ramp;
    };
    for (const x of PLACES.map((sigmas) => sigmas * sigma)) {
      // Simpson's rule sees a jump at 0 from above only when it starts there.
      const low = Math.max(0, x - 9 * sigma);
      const exact = x + 9 * sigma <= 0
        ? 0
        : integrate((y) => edge(Math.max(y, 1e-300)) * gaussian(x - y, sigma), [
          low,
          ...[ramp].filter((kink) => kink > low && kink < x + 9 * sigma),
          x + 9 * sigma,
        ], 2000);
      assertClose(broadenedRampStep(x, sigma, ramp, decay, share), exact, { absolute: 2e-6 }, `at ${x}`);
    }
  },
);

Deno.test("broadenedRampStep() changes little where its method changes", () => {
  const just = (ramp: number): number => broadenedRampStep(0.01, 0.02, ramp, 1, 0.5);
  assertClose(just(2.0001e-5), just(1.9999e-5), { absolute: 1e-6 });
});

Deno.test("the steepest tangent of a resolved step meets the base line 0.532234 FWHM below the step", () => {
  // Closed form sqrt(pi/2) sigma: half the height over the slope 1/(sigma sqrt(2 pi)) of an error-function edge.
  const fwhm = 0.1;
  const sigma = fwhm / 2.354820045;
  const step = (x: number): number => broadenedRampStep(x, sigma, 0, 1, 0);
  const h = 1e-5;
  const slope = (x: number): number => (step(x + h) - step(x - h)) / (2 * h);
  let steepest = -fwhm;
  for (let x = -fwhm; x <= fwhm; x += 1e-4) if (slope(x) > slope(steepest)) steepest = x;
  assertClose(steepest, 0, { absolute: 1e-4 }, "steepest point");
  assertClose((steepest - step(steepest) / slope(steepest)) / fwhm, -0.532234, { absolute: 1e-5 });
});
