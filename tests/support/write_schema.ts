/** Writes the schema files that editors use; run as `deno task schema`. Tests compare them with the code. */
import { scenarioJsonSchema } from "../../src/scenario/mod.ts";
import { sweepJsonSchema } from "../../src/sweep/mod.ts";

const SCHEMAS = {
  "scenarios/scenario.schema.json": scenarioJsonSchema(),
  "scenarios/sweeps/sweep.schema.json": sweepJsonSchema(),
};
for (const [path, schema] of Object.entries(SCHEMAS)) {
  await Deno.writeTextFile(new URL(`../../${path}`, import.meta.url), `${JSON.stringify(schema, null, 2)}\n`);
}
