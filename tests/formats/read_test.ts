import assert from "node:assert/strict";
import { readSpectrumFile } from "../../src/formats/mod.ts";
import { isoText } from "../support/iso14976_sample.ts";

const bytes = (text: string) => new TextEncoder().encode(text);

Deno.test("readSpectrumFile() finds the format by content when the name says otherwise", async () => {
  assert.equal((await readSpectrumFile(bytes(isoText()), "odd.csv")).format, "ISO 14976");
  const csv = await readSpectrumFile(bytes("e,n\n1,1\n2,2\n3,3\n4,4\n5,5\n"), "odd.vms", {
    columns: ["e", "n"],
  });
  assert.equal(csv.format, "csv");
  assert.deepEqual([...csv.regions[0].energiesEv], [1, 2, 3, 4, 5]);
});

Deno.test("readSpectrumFile() refuses --columns when the file is ISO 14976", async () => {
  await assert.rejects(readSpectrumFile(bytes(isoText()), "s.vms", { columns: ["e", "n"] }), {
    name: "InputError",
    message:
      'Cannot read "s.vms" as --columns must not be given for ISO 14976, which names its own columns: ' +
      'current value is "e,n" (at --columns)',
  });
});

Deno.test("readSpectrumFile() blames the identifier when a first line only begins like ISO 14976", async () => {
  await assert.rejects(
    readSpectrumFile(bytes("VAMAS 1988\n1\n"), "s.vms"),
    /Cannot read format identifier .* \(at s\.vms:1\)$/,
  );
});
