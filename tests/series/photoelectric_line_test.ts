import assert from "node:assert/strict";
import { fitPhotoelectricLine, PLANCK_EV_S } from "../../src/series/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { normalDraws, pullsAreNormal } from "../support/normal.ts";

/** R. A. Millikan, Phys. Rev. 7, 355 (1916), sodium: lines of mercury, angstrom, and intercepts read from Fig. 6, V. */
const MILLIKAN_ANGSTROM = [5461, 4339, 4047, 3650, 3126];
const MILLIKAN_V = [-2.050, -1.492, -1.300, -0.919, -0.380];
const READ_V = 0.007;

function millikan(speedOfLight: number) {
  return fitPhotoelectricLine({
    frequenciesHz: MILLIKAN_ANGSTROM.map((wavelength) => speedOfLight / (wavelength * 1e-10)),
    frequencyUncertaintiesHz: MILLIKAN_ANGSTROM.map(() => 0),
    energiesEv: MILLIKAN_V,
    energyUncertaintiesEv: MILLIKAN_V.map(() => READ_V),
    quantity: "stopping potential",
  });
}

Deno.test("PLANCK_EV_S is h/e of the International System of Units", () => {
  assertClose(PLANCK_EV_S, 4.13566769692386e-15, { relative: 1e-14 });
});

Deno.test("fitPhotoelectricLine() finds h/e within 1 % from Millikan's sodium line of 1916", () => {
  const line = millikan(299792458);
  // An ordinary least-squares line through the same points, computed outside the project: 4.1059e-15 V s, -4.3167 V.
  assertClose(line.planckEvS.value, 4.1059e-15, { relative: 2e-5 }, "slope");
  assertClose(line.workFunctionFromInterceptEv.value, 4.3167, { absolute: 1e-4 }, "intercept");
  assertClose(millikan(3e8).planckEvS.value, 4.1031e-15, { relative: 2e-5 }, "slope with c = 3e10 cm/s");
  assertClose(line.planckEvS.value, PLANCK_EV_S, { relative: 0.01 }, "h/e");
  assert.equal(line.workFunctionOf, "collector");
  // Millikan's printed slope is 4.124e-15 V s, "about 0.5 per cent".
  assertClose(line.planckEvS.value, 4.124e-15, { relative: 0.005 }, "printed slope");
});

const FREQUENCIES_HZ = [6.9, 7.4, 8.2, 9.6, 10.3, 11.8].map((value) => value * 1e14);

function replicate(normal: () => number, scale = 1) {
  return fitPhotoelectricLine({
    frequenciesHz: FREQUENCIES_HZ.map((frequency) => frequency * (1 + 0.002 * normal())),
    frequencyUncertaintiesHz: FREQUENCIES_HZ.map((frequency) => 0.002 * frequency),
    energiesEv: FREQUENCIES_HZ.map((frequency) => scale * (PLANCK_EV_S * frequency - 2.3) + 0.01 * normal()),
    energyUncertaintiesEv: FREQUENCIES_HZ.map(() => 0.01),
    quantity: "maximum kinetic energy",
  });
}

Deno.test("fitPhotoelectricLine() covers h/e and the work function as promised", () => {
  // 1000 replicates; false alarm: see pullsAreNormal(), three calls. Up to 5 % doubtful verdicts, 3 % are expected.
  const normal = normalDraws(21);
  const lines = Array.from({ length: 1000 }, () => replicate(normal));
  assert.ok(pullsAreNormal(lines.map((line) => line.planckDeviation)), "h/e");
  for (const key of ["workFunctionEv", "workFunctionFromInterceptEv"] as const) {
    const pulls = lines.map((line) => (line[key].value - 2.3) / line[key].standardUncertainty);
    assert.ok(pullsAreNormal(pulls), key);
    assert.ok(!pullsAreNormal(pulls.map((pull) => 2 * pull)), `${key} with half the uncertainty`);
  }
  const doubtful = lines.filter(({ verdict }) => verdict !== "good").length;
  assert.ok(doubtful <= 50, `${doubtful} of 1000`);
  assert.equal(lines[0].workFunctionOf, "emitter");
  assertClose(lines[0].thresholdHz, 2.3 / PLANCK_EV_S, { relative: 0.02 }, "threshold");
  assert.ok(
    lines[0].workFunctionEv.standardUncertainty < lines[0].workFunctionFromInterceptEv.standardUncertainty,
  );
});

Deno.test("fitPhotoelectricLine() doubts an energy scale whose gain is 8 % off", () => {
  // 100 replicates; at least 95 % must be doubtful.
  const normal = normalDraws(22);
  const lines = Array.from({ length: 100 }, () => replicate(normal, 1.08));
  const doubtful = lines.filter(({ verdict }) => verdict === "doubtful");
  assert.ok(doubtful.length >= 95, `${doubtful.length} of 100`);
  assert.match(doubtful[0].reasons[0], /the slope differs from h\/e by \d+\.\d+ %/);
});

Deno.test("fitPhotoelectricLine() refuses a frequency that is none", () => {
  assert.throws(
    () =>
      fitPhotoelectricLine({
        frequenciesHz: [1e15, 0, 2e15],
        frequencyUncertaintiesHz: [0, 0, 0],
        energiesEv: [1, 2, 3],
        energyUncertaintiesEv: [1, 1, 1],
        quantity: "stopping potential",
      }),
    { message: "Cannot fit a photoelectric line as frequenciesHz[1] must be > 0 Hz: current value is 0" },
  );
});
