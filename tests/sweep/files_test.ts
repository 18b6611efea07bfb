import assert from "node:assert/strict";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";
import { checkSweepPaths, parseSweep, planPoint, sweepJsonSchema, sweepPoints } from "../../src/sweep/mod.ts";

const FOLDER = new URL("../../scenarios/sweeps/", import.meta.url);

Deno.test("sweep.schema.json is what the code writes (deno task schema)", async () => {
  const text = await Deno.readTextFile(new URL("sweep.schema.json", FOLDER));
  assert.equal(text, `${JSON.stringify(sweepJsonSchema(), null, 2)}\n`);
});

Deno.test("every point of every shipped sweep is a scenario without warnings", async () => {
  const names = Array.from(Deno.readDirSync(FOLDER), ({ name }) => name).filter((name) =>
    name !== "sweep.schema.json"
  );
  assert.ok(names.length > 0);
  for (const name of names) {
    const sweep = parseSweep(await Deno.readTextFile(new URL(name, FOLDER)), name);
    assert.equal(sweep.$schema, "./sweep.schema.json", name);
    assert.match(sweep.note, /^Invented/, name);
    const text = await Deno.readTextFile(new URL(sweep.scenario, FOLDER));
    checkSweepPaths(sweep, parseScenario(text, sweep.scenario));
    const points = sweepPoints(sweep);
    for (let i = 0; i < points.count; i++) {
      const resolve = (set: readonly string[]) => resolveScenario(parseScenario(text, sweep.scenario, set));
      const { job, reason } = await planPoint(sweep, i, points.at(i), resolve);
      assert.equal(reason, "", `${name} ${i}`);
      assert.deepEqual(job?.resolved.warnings, [], `${name} ${i}`);
    }
  }
});
