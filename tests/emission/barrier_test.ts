import assert from "node:assert/strict";
import {
  helmholtzDipoleEv,
  quinnFerrellLifetimeFs,
  richardsonDushmanAPerM2,
  schottkyLoweringEv,
  schottkyMaximumNm,
} from "../../src/emission/mod.ts";
import { assertClose } from "../support/assert_close.ts";

// Worked values below: computed outside the project from CODATA 2022 unless a check says otherwise.

Deno.test("schottkyLoweringEv() gives the worked values over five decades of field", () => {
  const table = [
    [1e4, 3.79468648e-3],
    [1e5, 11.99985228e-3],
    [1e6, 37.9468648e-3],
    [1e7, 0.119998523],
    [1e8, 0.379468648],
    [1e9, 1.19998523],
  ];
  for (const [field, expected] of table) {
    assertClose(schottkyLoweringEv(field), expected, { relative: 3e-9 }, `${field} V/m`);
  }
  assert.throws(() => schottkyLoweringEv(-1), {
    message: "Cannot compute the image-force barrier as fieldVPerM must be >= 0 V/m: current value is -1",
  });
});

Deno.test("schottkyMaximumNm() lies where image force and field balance", () => {
  assertClose(schottkyMaximumNm(1e6), 18.9734, { relative: 3e-6 }, "worked value");
  // At the maximum both parts of the barrier are equal (exact): F x is half of the lowering.
  assertClose(1e6 * schottkyMaximumNm(1e6) * 1e-9, schottkyLoweringEv(1e6) / 2, { relative: 1e-12 });
  assert.equal(schottkyMaximumNm(0), Infinity);
});

Deno.test("helmholtzDipoleEv() gives the worked values and the sign of the dipole", () => {
  assertClose(helmholtzDipoleEv(1e18, 1), 0.376730314, { relative: 2e-9 });
  assertClose(helmholtzDipoleEv(1e19, -1), -3.7673031, { relative: 2e-8 });
  assert.throws(() => helmholtzDipoleEv(-1, 1), RangeError);
});

Deno.test("richardsonDushmanAPerM2() gives the worked values", () => {
  const table = [
    [4.5, 2000, 21.9971697],
    [4.5, 2500, 6369.23120],
    [4.55, 2400, 1930.41524],
    [2.0, 1200, 6895.08959],
  ];
  for (const [workFunctionEv, temperatureK, expected] of table) {
    const label = `${workFunctionEv} eV, ${temperatureK} K`;
    assertClose(richardsonDushmanAPerM2(workFunctionEv, temperatureK), expected, { relative: 3e-9 }, label);
  }
  assert.equal(richardsonDushmanAPerM2(4.5, 0), 0);
  assert.throws(() => richardsonDushmanAPerM2(0, 300), RangeError);
});

Deno.test("quinnFerrellLifetimeFs() gives the published constant and the values of four metals", () => {
  // Published as 263 r_s^(-5/2) (E - E_F)^-2 fs eV^2: J. J. Quinn, R. A. Ferrell, Phys. Rev. 112, 812 (1958).
  assertClose(quinnFerrellLifetimeFs(1, 1), 263, { relative: 0.003 }, "constant");
  // 263 r_s^(-5/2) at 1 eV; the constant evaluates to 262.6.
  const metals = [[2.07, 42.66], [2.67, 22.58], [3.01, 16.73], [3.02, 16.59]];
  for (const [radius, expected] of metals) {
    assertClose(quinnFerrellLifetimeFs(radius, 1), expected, { relative: 0.0018 }, `r_s ${radius}`);
  }
  assertClose(quinnFerrellLifetimeFs(2.07, 2), quinnFerrellLifetimeFs(2.07, 1) / 4, { relative: 1e-12 });
});
