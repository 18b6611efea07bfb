import assert from "node:assert/strict";
import { parseScenario, type ResolvedScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { problemsOf } from "../support/input_problems.ts";
import { SCENARIO_TEXT } from "../support/scenario_text.ts";

const resolve = (...overrides: string[]): ResolvedScenario =>
  resolveScenario(parseScenario(SCENARIO_TEXT, "a.json", overrides));
const warningsOf = (...overrides: string[]): string[] =>
  resolve(...overrides).warnings.map(({ code, place, message }) => `${code} ${place}: ${message}`);
const codesOf = (...overrides: string[]): string[] => resolve(...overrides).warnings.map(({ code }) => code);

Deno.test("resolveScenario() turns names into numbers", () => {
  const r = resolve();
  assert.equal(r.workFunctionEv, 5.1); // H. Michaelson, J. Appl. Phys. 48, 4729 (1977)
  assert.match(r.workFunctionSource, /Michaelson/);
  assertClose(r.thermalEnergyEv, 0.02585199979, { absolute: 1e-11 }); // CODATA 2022
  assertClose(r.photonEnergyEv, 21.21802, { absolute: 1e-5 }); // NIST Atomic Spectra Database
  // Hemisphere of 10 eV, 1 mm, 150 mm and 3 degrees: 33.3333 + 6.8539 meV, by hand; degrees become radians once.
  assertClose(r.resolutionFwhmEv, 0.0401872, { absolute: 6e-8 });
  assertClose(r.kineticEnergyShiftEv, 4.6, { absolute: 1e-12 }); // -4.4 - (-9)
  assert.deepEqual([r.biasV, r.seed, r.histories, r.title], [-9, 1, 20000, "gold"]);
  assert.deepEqual(r.warnings, []);
  assert.equal(resolve('analyzer.resolution={"kind":"fwhm","fwhmEv":0.123}').resolutionFwhmEv, 0.123);
});

Deno.test("resolveScenario() gives each line its absorbed share and its depth along the normal", () => {
  const lines = resolve().lines;
  assert.deepEqual(lines.map(({ name }) => name), ["He I alpha", "He I beta", "He I gamma"]);
  // Gold (Hagemann 1975, DESY Table 6) at 45 degrees: 4.72 nm; see tests/data for the source.
  assertClose(lines[0].absorbed[0].depthNm, 4.72, { absolute: 0.006 });
  // At normal incidence R = ((n - 1)^2 + k^2)/((n + 1)^2 + k^2) with n 1.2478, k 0.8829 (Fresnel).
  const [main] = resolve("geometry.incidenceAngleDeg=0", "light.satellites=false").lines;
  assertClose(main.absorbedWeight, 1 - (0.2478 ** 2 + 0.8829 ** 2) / (2.2478 ** 2 + 0.8829 ** 2), {
    absolute: 1e-4,
  });
  assertClose(main.absorbed[0].depthNm, 5.27, { absolute: 0.006 });
});

Deno.test("resolveScenario() absorbs twice the photons from twice the light", () => {
  const once = resolve("light.satellites=false");
  const twice = resolve("light.satellites=false", "light.photonFluxPerS=1e10");
  assertClose(twice.absorbedPhotonsPerS, 2 * once.absorbedPhotonsPerS, { relative: 1e-14 });
  assertClose(once.absorbedPhotonsPerS, 5e9 * once.lines[0].absorbedWeight, { relative: 1e-14 });
  assert.equal(once.lines.length, 1);
});

Deno.test("resolveScenario() takes the work function of the face, or the one given", () => {
  assert.equal(resolve('sample.face="111"').workFunctionEv, 5.31); // Michaelson 1977, Au(111)
  const given = resolve("sample.workFunctionEv=4.75");
  assert.deepEqual([given.workFunctionEv, given.workFunctionSource], [4.75, "scenario"]);
});

Deno.test("resolveScenario() makes a monochromator band one line of its width", () => {
  const r = resolve('light={"kind":"band","centerEv":21.218,"fwhmEv":0.05,"photonFluxPerS":1e9}');
  assert.equal(r.lines.length, 1);
  assert.deepEqual([r.lines[0].energyEv, r.photonEnergyEv], [21.218, 21.218]);
  assertClose(r.lines[0].absorbed[0].depthNm, 4.72, { absolute: 0.006 });
});

Deno.test("resolveScenario() uses the user's tables and insists on those that are named", () => {
  const scenario = parseScenario(SCENARIO_TEXT, "a", [
    "sample.densityOfStatesFile=d.csv",
    "sample.meanFreePathFile=l.csv",
  ]);
  const densityOfStates = { energiesEv: [-5, 30], values: [1, 2] };
  const meanFreePath = { energiesEv: [1, 30], values: [5, 0.5] };
  const r = resolveScenario(scenario, { densityOfStates, meanFreePath });
  assert.deepEqual(r.layers[0].states, { kind: "table", ...densityOfStates });
  assert.deepEqual(r.layers[0].meanFreePath, { kind: "table", ...meanFreePath });
  assert.deepEqual(problemsOf(() => resolveScenario(scenario, { meanFreePath })), [{
    place: "/sample/densityOfStatesFile",
    message: 'Cannot use scenario as the file must be readable: current value is "d.csv"',
  }]);
});

Deno.test("resolveScenario() reports every problem at once with its pointer", () => {
  const problems = problemsOf(() =>
    resolve('sample.face="11O"', "sample.material=W", "light.lamp=He II", "sample.meanFreePathFile=l.csv")
  );
  assert.deepEqual([...new Set(problems.map(({ place }) => place))], [
    "/sample/face",
    "/light/lamp",
    "/sample/meanFreePathFile",
  ]);
  assert.equal(
    problems[0].message,
    'Cannot look up work function as face must be one of 100, 110, 111, polycrystalline for W (did you mean 110?): current value is "11O"',
  );
  // Tungsten's optical constants end at 28 eV, below the ionized helium line; nothing is extrapolated.
  assert.match(
    problems[1].message,
    /optical constants of W as the photon energy must be in 1\.981\.\.27\.994 eV: .*40\.81/,
  );
});

Deno.test("resolveScenario() refuses photon energies outside the optical table and grids too fine for memory", () => {
  const far = problemsOf(() => resolve('light={"kind":"band","centerEv":55}'));
  assert.deepEqual(far.map(({ place }) => place), ["/light/centerEv"]);
  const fine = problemsOf(() => resolve("simulation.energyStepEv=0.002"));
  assert.deepEqual(fine.map(({ place }) => place), ["/simulation/energyStepEv"]);
  // 4000 bins to 23.742 eV, the highest line: 5.9 meV.
  assert.match(fine[0].message, /energyStepEv must be >= 0\.0059 eV/);
});

// Cutoff recorded at W - W_A - e U, hidden when that is not above 0 (definition of the energy scale).
Deno.test.each([
  ["biasV=0", "analyzer.workFunctionEv=5.3", "-0.200 eV", "-0.20 V"],
  ["biasV=2", "analyzer.workFunctionEv=4.4", "-1.300 eV", "0.70 V"],
  ["biasV=0", "analyzer.workFunctionEv=5.1", "0.000 eV", "0.00 V"],
])("resolveScenario() warns of a cutoff hidden by %s, %s", (bias, analyzer, place, remedy) => {
  const found = warningsOf(bias, analyzer, "acquisition.startEv=-5");
  assert.equal(
    found[0],
    `cutoff-hidden /biasV: the cutoff would be recorded at ${place}, below the analyzer's own limit at 0 eV: apply a bias below ${remedy}`,
  );
  assert.deepEqual(codesOf("biasV=-0.25", analyzer, "acquisition.startEv=-5"), []);
});

// One change that brings a warning and one just short of it. Cutoff at 9.7 eV, Fermi edge at 25.818 eV, FWHM 0.0402 eV.
Deno.test.each([
  ["cutoff-outside", "acquisition.startEv=9.67", "acquisition.startEv=9.65"],
  ["fermi-edge-outside", "acquisition.endEv=25.85", "acquisition.endEv=25.87"],
  ["step-coarse", "acquisition.stepEv=0.025", "acquisition.stepEv=0.024"],
  ["grid-coarse", "simulation.energyStepEv=0.021", "simulation.energyStepEv=0.02"],
  ["bias-retards", "biasV=0.1", "biasV=0"],
  ["below-threshold", "sample.workFunctionEv=5", "sample.workFunctionEv=4.8"],
  ["cutoff-displaced", "geometry.emissionAngleDeg=4.1", "geometry.emissionAngleDeg=4"],
])("resolveScenario() warns of %s with %s and not with %s", (code, with_, without) => {
  const others: Readonly<Record<string, string[]>> = {
    "bias-retards": ["acquisition.startEv=-5"],
    "below-threshold": ['light={"kind":"band","centerEv":4.9}', "acquisition.startEv=8"],
  };
  assert.deepEqual(codesOf(with_, ...(others[code] ?? [])), [code]);
  assert.deepEqual(codesOf(without, ...(others[code] ?? [])), []);
});

Deno.test("resolveScenario() says by how much the cutoff is displaced off normal", () => {
  // Parallel momentum is kept: E_out sin^2 <= E_out, so E_out >= A tan^2(20 - 4 degrees), A = 9.7 eV: 0.798 eV.
  assert.deepEqual(warningsOf("geometry.emissionAngleDeg=20"), [
    "cutoff-displaced /geometry/emissionAngleDeg: off normal the slowest electrons miss the analyzer: the cutoff appears 0.798 eV too high",
  ]);
});

Deno.test("resolveScenario() warns of a satellite that puts d states under the Fermi edge", () => {
  // Copper, He I gamma, by hand from the listed bands: 0.005 x 5.21/0.172 states = 15 %; gold's d band lies too deep.
  assert.deepEqual(warningsOf("sample.material=Cu"), [
    "satellite-under-edge /light: He I gamma puts its copy of the states at 2.524 eV binding energy under the Fermi edge, 15 % of its step",
  ]);
  assert.deepEqual(codesOf("sample.material=Cu", "light.satellites=false"), []);
});

// Second lines of the resonance doublets, 0.177 and 0.204 eV below (NIST level energies; see tests/data).
Deno.test.each([["Ne I", "0.177 eV"], ["Ar I", "0.204 eV"]])(
  "resolveScenario() warns of the second Fermi edge of %s",
  (lamp, shift) => {
    assert.deepEqual(warningsOf(`light.lamp=${lamp}`), [
      `satellite-edge-below /light: ${lamp} (second) makes a second Fermi edge ${shift} below the main one`,
    ]);
    assert.deepEqual(codesOf(`light.lamp=${lamp}`, "light.satellites=false"), []);
  },
);
