import assert from "node:assert/strict";
import { createHash } from "node:crypto";
import fc from "fast-check";
import { parseScenario, resolveScenario, scenarioHash } from "../../src/scenario/mod.ts";
import { SCENARIO_TEXT } from "../support/scenario_text.ts";

Deno.test("scenarioHash() is the start of the SHA-256 of JSON with sorted keys", async () => {
  // The digest of {} is published as the empty descriptor of the OCI image specification (from memory); the others by an
  // independent implementation of FIPS 180-4.
  assert.equal(await scenarioHash({}), "44136fa355b3678a");
  const sha256 = (text: string): string => createHash("sha256").update(text).digest("hex").slice(0, 16);
  assert.equal(
    await scenarioHash({ b: [2, { d: "\u00e9", c: null }], a: 1.5 }),
    sha256('{"a":1.5,"b":[2,{"c":null,"d":"\u00e9"}]}'),
  );
});

Deno.test("scenarioHash() does not see the order of keys and sees the order of lists", async () => {
  const reversed = (value: unknown): unknown =>
    typeof value !== "object" || value === null || Array.isArray(value)
      ? value
      : Object.fromEntries(Object.entries(value).reverse().map(([key, inner]) => [key, reversed(inner)]));
  await fc.assert(
    fc.asyncProperty(fc.jsonValue(), async (value) => {
      assert.equal(await scenarioHash(reversed(value)), await scenarioHash(value));
    }),
    { seed: 1, numRuns: 100 },
  );
  assert.notEqual(await scenarioHash([1, 2]), await scenarioHash([2, 1]));
});

Deno.test("scenarioHash() of a resolved scenario ignores comments and spelled-out defaults, not values", async () => {
  const hash = (text: string, overrides: readonly string[] = []): Promise<string> =>
    scenarioHash(resolveScenario(parseScenario(text, "a", overrides)));
  const plain = await hash(SCENARIO_TEXT);
  assert.match(plain, /^[0-9a-f]{16}$/);
  assert.equal(await hash(SCENARIO_TEXT), plain);
  assert.equal(await hash(`// note\n${SCENARIO_TEXT}`), plain);
  assert.equal(await hash(SCENARIO_TEXT, ["sample.barrier=classical", "acquisition.sweeps=1"]), plain);
  const changes = [
    "biasV=-8.999999",
    "simulation.seed=2",
    "sample.barrier=quantum",
    "acquisition.sweeps=2",
    "light.satellites=false",
  ];
  const changed = await Promise.all(changes.map((change) => hash(SCENARIO_TEXT, [change])));
  assert.equal(new Set([plain, ...changed]).size, changes.length + 1);
});
