import { BOLTZMANN_EV_PER_K, HC_EV_NM } from "../../src/data/mod.ts";
import { assertClose } from "../support/assert_close.ts";

// CODATA 2018 and 2022 (both exact): E. Tiesinga et al., Rev. Mod. Phys. 93, 025010 (2021); P. Mohr et al., Rev. Mod.
// Phys. 97, 025002 (2025), printed digits.
Deno.test("BOLTZMANN_EV_PER_K is the CODATA value", () => {
  assertClose(BOLTZMANN_EV_PER_K, 8.617333262e-5, { absolute: 0.5e-14 });
  // kT at 300 K, 77 K and 4.2 K, in meV, computed independently with 50 digits from the defining constants.
  assertClose(1000 * BOLTZMANN_EV_PER_K * 300, 25.85199979, { absolute: 0.5e-8 });
  assertClose(1000 * BOLTZMANN_EV_PER_K * 77, 6.635346612, { absolute: 0.5e-9 });
  assertClose(1000 * BOLTZMANN_EV_PER_K * 4.2, 0.361927997, { absolute: 0.5e-9 });
});

Deno.test("HC_EV_NM is the CODATA value", () => {
  assertClose(HC_EV_NM, 1239.841984, { absolute: 0.5e-6 });
  // One reciprocal centimeter is 1.239841984e-4 eV (the same tables, energy equivalents).
  assertClose(HC_EV_NM / 1e7, 1.239841984e-4, { absolute: 0.5e-13 });
});
