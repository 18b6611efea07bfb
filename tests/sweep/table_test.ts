import assert from "node:assert/strict";
import { parse } from "csv-parse/sync";
import { csvLine, parseSweep, tableColumns } from "../../src/sweep/mod.ts";
import { sweepText } from "../support/sweep_text.ts";

Deno.test("csvLine() writes what an independent reader reads back", () => {
  const cells = ["plain", 'a "quoted" word', "comma, here", "two\nlines", "", "5.1"];
  assert.deepEqual(parse(csvLine(cells)), [cells]);
  assert.equal(csvLine([null, 1.5, true, { a: 1 }]), ',1.5,true,"{""a"":1}"\n');
});

Deno.test("tableColumns() puts a verdict before fitted values, and the uncertainty after each", () => {
  const record = { values: ["truth.cutoffEv", "fit.cutoffEv"] };
  const columns = tableColumns(parseSweep(sweepText({ record }), "sweep.json"));
  assert.deepEqual(columns.map(({ name }) => name), [
    ...[
      "point",
      "status",
      "reason",
      "id",
      "scenarioHash",
      "seed",
      "replicate",
      "biasV",
      "sample.temperatureK",
    ],
    ...["warnings", "fit.verdict", "truth.cutoffEv", "fit.cutoffEv", "fit.cutoffStandardUncertaintyEv"],
  ]);
});

Deno.test("tableColumns() says missing where there is no record", () => {
  const columns = tableColumns(parseSweep(sweepText(), "sweep.json"));
  const cells = columns.map(({ cell }) => cell(2, { biasV: -8, "sample.temperatureK": 100 }, null));
  assert.equal(csvLine(cells), "2,missing,,,,,,-8,100,,\n");
});
