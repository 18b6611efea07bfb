import assert from "node:assert/strict";
import fc from "fast-check";
import { InputError } from "../../src/base/mod.ts";
import { LAMP_NAMES, MATERIAL_IDS } from "../../src/data/mod.ts";
import { engineData, expectedSpectrum } from "../../src/model/mod.ts";
import { runSeries } from "../../src/run/mod.ts";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";

const number = (min: number, max: number) => fc.double({ min, max, noNaN: true });
const material = fc.constantFrom(...MATERIAL_IDS);

/** Scenarios of every kind, from sensible to absurd but of the right types. */
const scenario = fc.record({
  title: fc.constant("fuzz"),
  sample: fc.record({
    material,
    temperatureK: fc.oneof(fc.constant(0), number(0, 3000)),
    workFunctionEv: fc.oneof(fc.constant(null), number(0.5, 10)),
    barrier: fc.constantFrom("classical", "quantum"),
    transportMeanFreePathNm: fc.oneof(fc.constant(null), number(0.1, 1e6)),
    layers: fc.array(fc.record({ material, thicknessNm: number(0.01, 10_000) }), { maxLength: 3 }),
    surface: fc.record({
      patches: fc.constantFrom([], [
        { areaFraction: 0.5, workFunctionEv: 1 },
        { areaFraction: 0.5, workFunctionEv: 9 },
      ]),
      patchField: fc.constantFrom("strong", "weak"),
      workFunctionSpreadEv: fc.constantFrom(0, 0.05),
      facetTiltDeg: fc.constantFrom(0, 0, 0, 40),
      extractionFieldVPerM: fc.constantFrom(0, 1e9),
      dipoleDensityPerNm2: fc.constantFrom(0, 10),
      dipoleMomentDebye: number(-1, 2),
    }),
    bandBending: fc.constantFrom(null, { surfaceShiftEv: -2, widthNm: 1 }),
    charging: fc.record({ shiftEv: number(-20, 100), fwhmEv: number(0, 2) }),
  }),
  light: fc.oneof(
    fc.record({ kind: fc.constant("lamp"), lamp: fc.constantFrom(...LAMP_NAMES), satellites: fc.boolean() }),
    fc.record({ kind: fc.constant("band"), centerEv: number(1, 60), fwhmEv: number(0, 1) }),
    fc.record({
      kind: fc.constant("thermal"),
      temperatureK: number(500, 6000),
      lowEv: number(0.5, 8),
      highEv: number(0.5, 20),
    }),
    fc.record({ kind: fc.constant("laser"), photonEnergyEv: number(1, 12) }),
    fc.record({ kind: fc.constant("anode"), anode: fc.constantFrom("Mg", "Al") }),
  ),
  geometry: fc.record({
    incidenceAngleDeg: number(0, 89),
    emissionAngleDeg: fc.oneof(fc.constant(0), number(0, 89)),
  }),
  analyzer: fc.record({
    workFunctionEv: number(0.5, 10),
    acceptanceHalfAngleDeg: number(0.01, 90),
    resolution: fc.record({ kind: fc.constant("fwhm"), fwhmEv: number(0.05, 5) }),
    transmissionExponent: number(0, 2),
  }),
  biasV: number(-100, 10),
  acquisition: fc.record({
    startEv: number(-20, 20),
    endEv: fc.oneof({ weight: 4, arbitrary: number(15, 60) }, { weight: 1, arbitrary: number(1000, 1500) }),
    stepEv: number(0.2, 1.2),
    dwellS: number(1e-3, 100),
    deadTimeS: number(0, 1e-3),
  }),
  simulation: fc.record({
    histories: fc.constant(8192),
    energyStepEv: fc.constant(0.1),
    maxLossEv: fc.constant(40),
  }),
});

Deno.test("any scenario of the right types gives finite counts >= 0 or an InputError with places", () => {
  let simulated = 0;
  fc.assert(
    fc.property(scenario, (data) => {
      let spectrum;
      try {
        const resolved = resolveScenario(parseScenario(JSON.stringify(data), "fuzz.json"));
        const engine = engineData(resolved);
        spectrum = expectedSpectrum(resolved, engine, runSeries(engine, 1, 2));
      } catch (error) {
        assert.ok(error instanceof InputError, `${error}`);
        assert.ok(
          error.problems.every(({ place, message }) => place !== "" && /^Cannot .* as .*/.test(message)),
        );
        return;
      }
      simulated++;
      assert.ok(spectrum.counts.every((value) => Number.isFinite(value) && value >= 0), JSON.stringify(data));
      assert.ok(spectrum.standardErrors.every((value) => Number.isFinite(value) && value >= 0), "errors");
    }),
    { numRuns: 100, seed: 7, endOnFailure: true },
  );
  assert.ok(simulated >= 10, `only ${simulated} were simulated`);
});

Deno.test("any JSON at all is read or refused with an InputError", () => {
  fc.assert(
    fc.property(fc.json(), (text) => {
      try {
        parseScenario(text, "fuzz.json");
      } catch (error) {
        assert.ok(error instanceof InputError, `${error}`);
      }
    }),
    { numRuns: 300, seed: 8 },
  );
});
