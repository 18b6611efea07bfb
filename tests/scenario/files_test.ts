import assert from "node:assert/strict";
import { parseScenario, resolveScenario, scenarioJsonSchema } from "../../src/scenario/mod.ts";

const FOLDER = new URL("../../scenarios/", import.meta.url);

Deno.test("scenario.schema.json is what the code writes (deno task schema)", async () => {
  const text = await Deno.readTextFile(new URL("scenario.schema.json", FOLDER));
  assert.equal(text, `${JSON.stringify(scenarioJsonSchema(), null, 2)}\n`);
});

/** Scenarios that show what a warning is for. */
const ON_PURPOSE: Readonly<Record<string, readonly string[]>> = {
  "patchy_gold_he1.json": ["several-work-functions"],
};

Deno.test("every shipped scenario parses and resolves without warnings but those it is there to show", async () => {
  const names = Array.from(Deno.readDirSync(FOLDER), ({ name }) => name)
    .filter((name) => name.endsWith(".json") && name !== "scenario.schema.json");
  assert.ok(names.length > 0);
  for (const name of names) {
    const scenario = parseScenario(await Deno.readTextFile(new URL(name, FOLDER)), name);
    assert.equal(scenario.$schema, "./scenario.schema.json", name);
    assert.deepEqual(
      resolveScenario(scenario).warnings.map(({ code }) => code),
      ON_PURPOSE[name] ?? [],
      name,
    );
  }
});

interface Schema {
  readonly default?: unknown;
  readonly properties?: Readonly<Record<string, Schema>>;
  readonly anyOf?: readonly Schema[];
  readonly oneOf?: readonly Schema[];
}

/** Every key of a schema that has a plain default, with it. */
function defaults(schema: Schema): string[] {
  return [
    ...Object.entries(schema.properties ?? {}).flatMap(([key, inner]) => [
      ...(inner.default === undefined || inner.default?.constructor === Object
        ? []
        : [`${key} = ${inner.default}`]),
      ...defaults(inner),
    ]),
    ...[...(schema.anyOf ?? []), ...(schema.oneOf ?? [])].flatMap(defaults),
  ];
}

Deno.test("the documented defaults of a scenario are those of the schema", async () => {
  const text = await Deno.readTextFile(new URL("../../src/scenario/types.ts", import.meta.url));
  // The first word after "Default:", without the back quotes of names and the full stop of the sentence.
  const documented = [
    ...text.matchAll(/Default:\s+(?:\* )?`?([^\s`]+)(?:(?!\*\/)[^])*\*\/\s+readonly (\w+)\??: /g),
  ].map(
    ([, word, key]) => {
      const value = word.replace(/\.$/, "");
      return `${key} = ${value === "empty" ? "" : /^\d/.test(value) ? Number(value) : value}`;
    },
  );
  assert.ok(documented.length >= 18);
  const unique = (lines: readonly string[]): string[] => [...new Set(lines)].toSorted();
  assert.deepEqual(unique(documented), unique(defaults(scenarioJsonSchema() as Schema)));
});
