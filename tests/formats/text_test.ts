import assert from "node:assert/strict";
import { decodeText } from "../../src/formats/mod.ts";
import { isoText } from "../support/iso14976_sample.ts";

const utf8 = (text: string) => new TextEncoder().encode(text);
const latin1 = (text: string) => Uint8Array.from(text, (char) => char.charCodeAt(0));

Deno.test("decodeText() gives the text when it is UTF-8 with or without byte order mark", () => {
  assert.equal(decodeText(utf8("µ = 1 Å\n"), "a.csv"), "µ = 1 Å\n");
  assert.equal(decodeText(utf8("\uFEFFµ\n"), "a.csv"), "µ\n");
});

Deno.test("decodeText() takes Latin-1 when the text begins with the ISO 14976 identifier", () => {
  assert.equal(decodeText(latin1(isoText()), "s.vms"), isoText());
  assert.equal(decodeText(utf8(isoText()), "s.vms"), isoText());
});

const BROKEN: [what: string, bytes: Uint8Array, message: string][] = [
  ["empty", new Uint8Array(), 'as it must not be empty: current value is "0 bytes without text" (at f)'],
  ["blank", utf8(" \n\n"), 'as it must not be empty: current value is "3 bytes without text" (at f)'],
  ["gzip", Uint8Array.of(0x1f, 0x8b, 8, 0), 'not a binary file: current value is "a gzip archive" (at f)'],
  ["zip", latin1("PK\x03\x04\x14\0data.csv"), 'not a binary file: current value is "a zip archive" (at f)'],
  [
    "xlsx",
    latin1("PK\x03\x04\x14\0[Content_Types].xml"),
    'not a binary file: current value is "an Excel workbook (xlsx)" (at f)',
  ],
  [
    "xls",
    latin1("\xd0\xcf\x11\xe0\xa1"),
    'not a binary file: current value is "an old Excel workbook" (at f)',
  ],
  ["PNG", latin1("\x89PNG\r\n\x1a\n"), 'not a binary file: current value is "a PNG picture" (at f)'],
  ["HDF5", latin1("\x89HDF\r\n\x1a\n"), 'not a binary file: current value is "an HDF5 file" (at f)'],
  ["PDF", latin1("%PDF-1.7\n"), 'not a binary file: current value is "a PDF document" (at f)'],
  [
    "with a NUL byte",
    latin1("a,b\n1,\0"),
    'not a binary file: current value is "a binary file (NUL byte at offset 6)" (at f)',
  ],
  [
    "UTF-16 LE",
    latin1("\xff\xfea\0"),
    'as its text must be saved as UTF-8: current value is "UTF-16" (at f)',
  ],
  [
    "UTF-16 BE",
    latin1("\xfe\xff\0a"),
    'as its text must be saved as UTF-8: current value is "UTF-16" (at f)',
  ],
  [
    "Latin-1",
    latin1("a,b\n# \xe9t\xe9\n"),
    'as its text must be saved as UTF-8: current value is "byte 0xE9 at offset 6" (at f:2)',
  ],
  [
    "cut inside a character",
    utf8("a\nb\n€").subarray(0, 6),
    'as its text must be saved as UTF-8: current value is "byte 0xE2 at offset 4" (at f:3)',
  ],
  [
    "too large",
    new Uint8Array(2 ** 28 + 1),
    'as it must have at most 256 MiB: current value is "268435457 bytes" (at f)',
  ],
];
for (const [what, bytes, message] of BROKEN) {
  Deno.test(`decodeText() says what is wrong when the file is ${what}`, () => {
    assert.throws(() => decodeText(bytes, "f"), (error: Error) => {
      assert.equal(error.name, "InputError");
      assert.ok(
        error.message.startsWith("Cannot read the file as ") && error.message.endsWith(message),
        error.message,
      );
      return true;
    });
  });
}
