/** Writes the schema file that editors use; run as `deno task schema`. A test compares it with the code. */
import { scenarioJsonSchema } from "../../src/scenario/mod.ts";

const target = new URL("../../scenarios/scenario.schema.json", import.meta.url);
await Deno.writeTextFile(target, `${JSON.stringify(scenarioJsonSchema(), null, 2)}\n`);
