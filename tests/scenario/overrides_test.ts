import assert from "node:assert/strict";
import fc from "fast-check";
import { applyOverrides, parseScenario } from "../../src/scenario/mod.ts";
import { problemsOf } from "../support/input_problems.ts";
import { SCENARIO_TEXT } from "../support/scenario_text.ts";

Deno.test("applyOverrides() sets numbers as numbers, words as text and JSON as JSON", () => {
  const set = (override: string): unknown => (applyOverrides({}, [override]) as { a: unknown }).a;
  assert.equal(set("a=77"), 77);
  assert.equal(set("a=-9.5e-3"), -0.0095);
  assert.equal(set("a=true"), true);
  assert.equal(set("a=null"), null);
  assert.equal(set("a=He I"), "He I");
  assert.equal(set('a="77"'), "77");
  assert.equal(set("a="), "");
  assert.equal(set("a=b=c"), "b=c");
  assert.deepEqual(set('a={"kind":"fwhm","fwhmEv":0.1}'), { kind: "fwhm", fwhmEv: 0.1 });
});

Deno.test("applyOverrides() makes missing objects, takes the last of two and leaves its input alone", () => {
  const data = { sample: { material: "Au" } };
  assert.deepEqual(
    applyOverrides(data, ["sample.temperatureK=77", "geometry.emissionAngleDeg=5", "sample.temperatureK=4"]),
    {
      sample: { material: "Au", temperatureK: 4 },
      geometry: { emissionAngleDeg: 5 },
    },
  );
  assert.deepEqual(data, { sample: { material: "Au" } });
});

Deno.test("applyOverrides() does what editing the file does", () => {
  const edited = SCENARIO_TEXT.replace('"temperatureK": 300', '"temperatureK": 77').replace(
    '"He I"',
    '"Ne I"',
  )
    .replace('"biasV": -9', '"biasV": -5');
  const overrides = ["sample.temperatureK=77", "light.lamp=Ne I", "biasV=-5"];
  assert.deepEqual(parseScenario(SCENARIO_TEXT, "a", overrides), parseScenario(edited, "a"));
});

Deno.test("applyOverrides() refuses what is no PATH=VALUE and paths through plain values, all at once", () => {
  const overrides = ["biasV", "=3", "a..b=1", ".a=1", "biasV.x=3", "sample.material.x.y=1"];
  assert.deepEqual(problemsOf(() => applyOverrides({ biasV: -9, sample: { material: "Au" } }, overrides)), [
    ...["biasV", "=3", "a..b=1", ".a=1"].map((override) => ({
      place: "--set",
      message:
        `Cannot apply override as it must be PATH=VALUE such as sample.temperatureK=77: current value is "${override}"`,
    })),
    {
      place: "--set biasV.x",
      message:
        'Cannot apply override as every key but the last must be an object, or an element of an array that is there: current value is "-9"',
    },
    {
      place: "--set sample.material.x.y",
      message: String
        .raw`Cannot apply override as every key but the last must be an object, or an element of an array that is there: current value is "\"Au\""`,
    },
  ]);
});

Deno.test("applyOverrides() of an unknown path is refused by the check that follows, with a suggestion", () => {
  const problems = problemsOf(() => parseScenario(SCENARIO_TEXT, "a", ["sample.temperatur=77", "bias.v=3"]));
  assert.deepEqual(problems.map(({ place }) => place), ["/sample/temperatur", "/bias"]);
  assert.match(problems[0].message, /did you mean temperatureK\?/);
  assert.match(problems[1].message, /did you mean biasV\?/);
});

Deno.test("applyOverrides() reads back any JSON value at any path and pollutes no prototype", () => {
  const key = fc.oneof(fc.constantFrom("__proto__", "constructor", "a"), fc.stringMatching(/^[^.=]{1,8}$/));
  fc.assert(
    fc.property(fc.array(key, { minLength: 1, maxLength: 4 }), fc.jsonValue(), (keys, value) => {
      let inner = applyOverrides({}, [`${keys.join(".")}=${JSON.stringify(value)}`]);
      for (const step of keys) inner = Object.getOwnPropertyDescriptor(inner, step)!.value;
      assert.equal(JSON.stringify(inner), JSON.stringify(value));
      assert.equal(({} as Record<string, unknown>).a, undefined);
    }),
    { seed: 1, numRuns: 200 },
  );
});
