import assert from "node:assert/strict";
import { meanPhotonEnergyEv, planckPhotonDensity, thermalLight } from "../../src/light/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { crossing, integrate } from "../support/integrate.ts";

const KT_EV_PER_K = 8.617333262145e-5; // CODATA 2018 and 2022
const T = 2800;
const KT = KT_EV_PER_K * T;

Deno.test("planckPhotonDensity() is normalized with mean 3 zeta(4)/zeta(3) kT = 2.701 kT", () => {
  // Integrals of x^(s - 1)/(e^x - 1) are Gamma(s) zeta(s): Abramowitz & Stegun, eq. 23.2.7. zeta(4) = pi^4/90.
  const breaks = [1e-9, 1, 3, 10, 30, 60].map((x) => x * KT);
  assertClose(integrate((e) => planckPhotonDensity(e, T), breaks), 1, { absolute: 1e-9 });
  const mean = integrate((e) => e * planckPhotonDensity(e, T), breaks);
  assertClose(mean / KT, (3 * Math.PI ** 4 / 90) / 1.2020569031595942, { absolute: 1e-8 });
  assertClose(mean / KT, 2.701178, { absolute: 1e-6 });
});

Deno.test("planckPhotonDensity() has Wien's displacements in photon number", () => {
  // Per energy x^2/(e^x - 1): x = 2 + W(-2 e^-2) = 1.593624; per wavelength x^4/(e^x - 1): x = 4 + W(-4 e^-4) = 3.920690
  // (Lambert's W; the second is lambda T = 3669.70 um K).
  const peak = (power: number): number => {
    const f = (x: number): number => x ** power * planckPhotonDensity(x * KT, T);
    return crossing((x) => f(x * (1 + 1e-5)) - f(x * (1 - 1e-5)), 0, 0.5, 8);
  };
  assertClose(peak(0), 1.593624260, { absolute: 1e-6 });
  assertClose(peak(2), 3.920690395, { absolute: 1e-6 });
  assertClose(1239.841984332 / (peak(2) * KT) * T / 1000, 3669.70, { absolute: 0.01 });
});

Deno.test("thermalLight() over the whole spectrum has Planck's mean, and a narrow window its own", () => {
  const whole = thermalLight(T, { lowEv: 1e-6, highEv: 40 * KT, stepEv: 0.005 });
  assertClose(meanPhotonEnergyEv(whole) / KT, 2.701178, { relative: 1e-5 });
  // Far above kT the spectrum is E^2 exp(-E/kT) (W. Wien): mean over a window by quadrature.
  const wien = (e: number): number => e * e * Math.exp(-(e - 4) / KT);
  const breaks = [4, 4.5, 5, 6];
  const mean = integrate((e) => e * wien(e), breaks) / integrate(wien, breaks);
  assertClose(meanPhotonEnergyEv(thermalLight(T, { lowEv: 4, highEv: 6, stepEv: 0.005 })), mean, {
    relative: 1e-5,
  });
});

Deno.test("thermalLight() covers its window evenly, with weights of sum 1, also when the lamp is cold", () => {
  const points = thermalLight(30, { lowEv: 4, highEv: 5, stepEv: 0.3 });
  assert.equal(points.length, 4);
  assertClose(points[0].energyEv, 4.125, { absolute: 1e-12 });
  assertClose(points[3].energyEv, 4.875, { absolute: 1e-12 });
  assertClose(points.reduce((sum, { weight }) => sum + weight, 0), 1, { absolute: 1e-12 });
  assert.ok(points[0].weight > 1 - 1e-9);
});

Deno.test("thermalLight() refuses an impossible lamp or window", () => {
  const window = { lowEv: 4, highEv: 5, stepEv: 0.1 };
  const refuse = (temperatureK: number, change: Partial<typeof window>, message: string): void =>
    assert.throws(() => thermalLight(temperatureK, { ...window, ...change }), {
      name: "RangeError",
      message,
    });
  refuse(0, {}, 'Cannot use thermal light as temperatureK must be > 0 K: current value is "0 K"');
  refuse(2000, { lowEv: 0 }, 'Cannot use thermal light as lowEv must be > 0 eV: current value is "0 eV"');
  refuse(2000, { highEv: 4 }, 'Cannot use thermal light as highEv must be > 4 eV: current value is "4 eV"');
  refuse(
    2000,
    { stepEv: 0 },
    'Cannot use thermal light as stepEv must be > 0 eV and make at most 10000 points: current value is "0 eV"',
  );
  refuse(
    2000,
    { stepEv: NaN },
    'Cannot use thermal light as stepEv must be > 0 eV and make at most 10000 points: current value is "NaN eV"',
  );
});
