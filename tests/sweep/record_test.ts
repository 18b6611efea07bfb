import assert from "node:assert/strict";
import * as zlib from "node:zlib";
import { crc32, type PointRecord, readRecordLine, writeRecordLine } from "../../src/sweep/mod.ts";

Deno.test("crc32() gives the published check value, and what zlib gives", () => {
  const bytes = (text: string) => new TextEncoder().encode(text);
  // Check value of CRC-32 (ISO-HDLC) for the digits 1 to 9: catalogue of parametrised CRC algorithms, from memory.
  assert.equal(crc32(bytes("123456789")), "cbf43926");
  assert.equal(crc32(bytes("")), "00000000");
  const long = Uint8Array.from({ length: 5000 }, (_, i) => (i * i) % 251);
  assert.equal(crc32(long), zlib.crc32(long).toString(16).padStart(8, "0"));
});

const RECORD: PointRecord = {
  id: "0123456789abcdef",
  version: "0.1.0",
  settings: { "sample.face": "111", biasV: -9 },
  status: "done",
  reason: "",
  scenarioHash: "fedcba9876543210",
  seed: 3,
  replicate: 4,
  values: { peakCounts: 1234.5, "fit.verdict": "gut, groß", "fit.cutoffEv": null },
};

Deno.test("readRecordLine() reads what writeRecordLine() wrote", () => {
  const line = writeRecordLine(RECORD);
  assert.doesNotMatch(line, /\n/);
  assert.deepEqual(readRecordLine(line), RECORD);
  assert.deepEqual(JSON.parse(line).record, RECORD);
});

Deno.test("readRecordLine() gives null for a line torn at any byte or with any byte changed", () => {
  const line = writeRecordLine(RECORD);
  for (let end = 0; end < line.length; end++) {
    assert.equal(readRecordLine(line.slice(0, end)), null, `torn at ${end}`);
  }
  for (let i = 0; i < line.length; i++) {
    const changed = line.slice(0, i) + (line[i] === "7" ? "8" : "7") + line.slice(i + 1);
    assert.equal(readRecordLine(changed), null, `changed at ${i}`);
  }
});
