import fc from "fast-check";
import { accelerationEv, kineticEnergyShiftEv } from "../../src/instrument/mod.ts";
import { assertClose } from "../support/assert_close.ts";

// E_kin,meas = E - W_A - e U with a common Fermi level (definition of the energy scale of a grounded spectrometer): the
// Fermi edge at h nu - W_A - e U.
Deno.test.each([
  [21.218, 4.4, 0, 16.818],
  [21.218, 4.4, -9, 25.818],
  [21.218, 4.4, 2, 14.818],
  [6.2, 4.7, -5.5, 7.0],
])(
  "kineticEnergyShiftEv() puts the Fermi edge of %s eV, W_A %s eV, %s V at %s eV",
  (photonEv, analyzerEv, biasV, edgeEv) => {
    assertClose(photonEv + kineticEnergyShiftEv(analyzerEv, biasV), edgeEv, { absolute: 1e-12 });
  },
);

Deno.test("the work function is the photon energy less the distance of the edges, whatever analyzer and bias", () => {
  // Definition; the cutoff is at the vacuum level, E = W, so it gains accelerationEv from rest.
  fc.assert(
    fc.property(
      fc.double({ min: 3, max: 6, noNaN: true }),
      fc.double({ min: 3, max: 6, noNaN: true }),
      fc.double({ min: -30, max: 5, noNaN: true }),
      (workFunctionEv, analyzerEv, biasV) => {
        const fermi = 21.218 + kineticEnergyShiftEv(analyzerEv, biasV);
        const cutoff = accelerationEv(workFunctionEv, analyzerEv, biasV);
        assertClose(21.218 - (fermi - cutoff), workFunctionEv, { absolute: 1e-12 });
      },
    ),
    { seed: 1 },
  );
});

Deno.test("accelerationEv() is zero for equal work functions without bias and negative for a hidden cutoff", () => {
  // Contact potential: A = -e U + W - W_A.
  assertClose(accelerationEv(4.5, 4.5, 0), 0, { absolute: 0 });
  assertClose(accelerationEv(4.2, 4.5, 0), -0.3, { absolute: 1e-12 });
  assertClose(accelerationEv(5.1, 4.4, -9), 9.7, { absolute: 1e-12 });
});
