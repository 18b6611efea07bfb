import assert from "node:assert/strict";
import { GOLD, inFolder, namesIn, twoedge } from "../support/twoedge.ts";

const utf8 = (text: string): Uint8Array => new TextEncoder().encode(text);
const latin1 = (text: string): Uint8Array => Uint8Array.from(text, (char) => char.charCodeAt(0));
const utf16 = (text: string): Uint8Array => latin1("\xff\xfe" + text.replaceAll(/./gs, "$&\0"));

const HEADER = "kinetic_energy_ev,counts\n";
const HEAD = `# photon_energy_ev: 21.218\n# bias_v: -9\n${HEADER}`;
const ROWS = ["9.0,3", "9.1,4", "9.2,9", "9.3,8", "9.4,7", "9.5,8"];
const table = (rows: readonly string[]): Uint8Array => utf8(`${HEAD}${rows.join("\n")}\n`);
/** The good rows with another one in the third place, line 6 of the file. */
const withRow = (row: string): Uint8Array => table(ROWS.with(2, row));

/** What is wrong with `bad.csv`, its bytes, the place and the rule that the message must name. */
const SPECTRA: readonly (readonly [string, Uint8Array, string, RegExp])[] = [
  ["empty", utf8(""), "bad.csv", /must not be empty/],
  ["blank", utf8(" \n\n \n"), "bad.csv", /must not be empty/],
  ["binary", Uint8Array.of(1, 2, 0, 3, 255), "bad.csv", /must be a text file.*NUL byte at offset 2/],
  ["a picture", latin1("\x89PNG\r\n\x1a\n"), "bad.csv", /must be a text file.*a PNG picture/],
  ["UTF-16", utf16(HEAD + ROWS.join("\n")), "bad.csv", /must be saved as UTF-8.*UTF-16/],
  [
    "Latin-1",
    latin1(`# sample: caf\xe9\n${HEAD}${ROWS.join("\n")}`),
    "bad.csv:1",
    /must be saved as UTF-8.*0xE9/,
  ],
  ["only metadata", utf8("# bias_v: -9\n"), "bad.csv", /must be a header row/],
  ["without a header row", utf8(ROWS.join("\n")), "bad.csv:1", /must be a header row/],
  ["without rows", utf8(HEAD), "bad.csv", /at least 5 rows/],
  [
    "one column",
    utf8(`kinetic_energy_ev\n${[1, 2, 3, 4, 5, 6].join("\n")}`),
    "bad.csv:1",
    /at least two columns/,
  ],
  [
    "of two energy columns",
    utf8("kinetic_energy_ev,binding_energy_ev,counts\n"),
    "bad.csv:1",
    /which energy column/,
  ],
  [
    "of text in numbers",
    withRow("9.2,many"),
    "bad.csv:6",
    /must be a decimal number: current value is "many"/,
  ],
  ["of an empty cell", withRow("9.2,"), "bad.csv:6", /must not be empty/],
  ["of a missing cell", withRow("9.2"), "bad.csv:6", /must have 2 cells like the header: .*1 cells/],
  ["of NaN", withRow("9.2,NaN"), "bad.csv:6", /must be finite: current value is "NaN"/],
  ["of infinity", withRow("-inf,9"), "bad.csv:6", /must be finite: current value is "-inf"/],
  ["of a number too large", withRow("9.2,1e999"), "bad.csv:6", /must be finite/],
  ["of hexadecimal numbers", withRow("9.2,0x10"), "bad.csv:6", /not a hexadecimal one/],
  [
    "unsorted",
    withRow("9.9,9"),
    "bad.csv:7",
    /must be sorted, all ascending or all descending.*"9\.3 after 9\.9"/,
  ],
  ["of repeated energies", withRow("9.1,9"), "bad.csv:6", /must not be repeated.*"9\.1 after 9\.1"/],
  ["of negative counts", withRow("9.2,-9"), "bad.csv:6", /counts must be >= 0: current value is -9/],
  ["of decimal commas", table(ROWS.with(2, "9,2,9")), "bad.csv:6", /decimal commas must become points/],
  [
    "of decimal commas between semicolons",
    utf8(`kinetic_energy_ev;counts\n${ROWS.join("\n").replaceAll(",", ";").replaceAll(".", ",")}\n`),
    "bad.csv:2",
    /decimal commas must become points/,
  ],
  [
    "of two header rows",
    utf8(`${HEAD}eV,1\n`.replace("1\n", "number\n") + ROWS.join("\n")),
    "bad.csv:4",
    /one header row/,
  ],
  [
    "of metadata that is no number",
    utf8(`# bias_v: -9 V\n${HEADER}`),
    "bad.csv:1",
    /must be a decimal number.*"-9 V"/,
  ],
  [
    "of impossible metadata",
    utf8(`# photon_energy_ev: -21\n${HEADER}`),
    "bad.csv:1",
    /must be > 0 eV.*"-21"/,
  ],
  [
    "of metadata given twice",
    utf8(`# bias_v: -9\n# bias_v: -5\n${HEADER}`),
    "bad.csv:2",
    /must be given once/,
  ],
  ["of an open quote", withRow('"9.2,9'), "bad.csv:9", /quotes must come in pairs/],
];
for (const [what, bytes, place, rule] of SPECTRA) {
  Deno.test(`fit refuses a file that is ${what}`.replace("is of", "has"), async () => {
    await inFolder({ "bad.csv": bytes }, async (folder) => {
      const { code, stdout, stderr } = await twoedge(folder, "fit", "bad.csv", "--json", "--out", "o");
      assert.deepEqual([code, stdout], [2, ""], stderr);
      const line = stderr.split("\n").find((text) => rule.test(text));
      assert.ok(line !== undefined, `no line has ${rule}: ${stderr}`);
      assert.match(line, /^Cannot read .* as .*: current value is /);
      assert.ok(line.endsWith(` (at ${place})`), line);
      assert.deepEqual(namesIn(folder), ["bad.csv"]);
    });
  });
}

Deno.test("fit refuses a file of 10 million rows with the line where it has read enough", async () => {
  const bytes = new Uint8Array(HEADER.length + 4e7);
  bytes.set(utf8(HEADER));
  for (let at = HEADER.length; at < bytes.length; at += 4) bytes.set([0x31, 0x2c, 0x31, 0x0a], at);
  await inFolder({ "bad.csv": bytes }, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "fit", "bad.csv", "--json");
    assert.deepEqual([code, stdout], [2, ""]);
    assert.match(
      stderr,
      /^Cannot read the table as there must be at most 1000000 rows.* \(at bad\.csv:1000002\)\n$/,
    );
  });
});

Deno.test("fit reports all problems of a file at once, and how many more there are", async () => {
  const rows = Array.from({ length: 30 }, (_, i) => `${i},x`);
  await inFolder({ "bad.csv": utf8(HEADER + rows.join("\n")) }, async (folder) => {
    const { code, stderr } = await twoedge(folder, "fit", "bad.csv");
    assert.equal(code, 2);
    const lines = stderr.trimEnd().split("\n");
    assert.equal(lines.length, 11);
    assert.match(lines[9], /\(at bad\.csv:11\)$/);
    assert.match(lines[10], /20 more/);
  });
});

Deno.test("fit reads nothing more and writes nothing when one of several files is bad", async () => {
  const files = { "good.csv": table(ROWS), "bad.csv": withRow("9.2,x") };
  await inFolder(files, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "fit", "good.csv", "bad.csv", "--out", "o");
    assert.deepEqual([code, stdout], [2, ""]);
    assert.match(stderr, /\(at bad\.csv:6\)\n$/);
    assert.deepEqual(namesIn(folder), ["bad.csv", "good.csv"]);
  });
});

for (const command of [["fit"], ["simulate"], ["validate"]]) {
  Deno.test(`${command} ends with exit code 3 when the file is missing or a folder`, async () => {
    await inFolder({}, async (folder) => {
      const missing = await twoedge(folder, ...command, "none.csv");
      assert.deepEqual(missing, { code: 3, stdout: "", stderr: "Cannot read none.csv: it does not exist\n" });
      const isFolder = await twoedge(folder, ...command, ".");
      assert.deepEqual(isFolder, { code: 3, stdout: "", stderr: "Cannot read .: it is a folder\n" });
      assert.deepEqual(namesIn(folder), []);
    });
  });
}

Deno.test("simulate refuses a bad scenario as validate does and writes nothing", async () => {
  await inFolder({ "bad.json": "[1, 2]" }, async (folder) => {
    const outcome = await twoedge(folder, "simulate", "bad.json", "--json");
    assert.deepEqual([outcome.code, outcome.stdout], [2, ""]);
    assert.deepEqual(await twoedge(folder, "validate", "bad.json", "--json"), outcome);
    assert.deepEqual(namesIn(folder), ["bad.json"]);
  });
});

const GOLD_TEXT = Deno.readTextFileSync(GOLD);

/** What is wrong with `bad.json`, its bytes, the places and the rule that the message must name. */
const SCENARIOS: readonly (readonly [string, Uint8Array, readonly string[], RegExp])[] = [
  ["empty", utf8(""), ["bad.json"], /must not be empty/],
  ["binary", Uint8Array.of(123, 0, 125), ["bad.json"], /must be a text file/],
  ["UTF-16", utf16(GOLD_TEXT), ["bad.json"], /must be saved as UTF-8.*UTF-16/],
  ["Latin-1", latin1('{\n"title": "\xe9"\n}'), ["bad.json:2"], /must be saved as UTF-8.*0xE9/],
  ["cut", utf8(GOLD_TEXT.slice(0, 700)), ["bad.json:17"], /the file must be JSON/],
  ["a comment only", utf8("// nothing\n"), ["bad.json:2"], /the file must be JSON/],
  ["a list", utf8("[1, 2]"), ["/"], /must be an object/],
  ["of another key twice", utf8(GOLD_TEXT.replace('"endEv": 29', '"endEv": 29, "startEv": 3')), [
    "/acquisition/startEv",
  ], /each key may be given once/],
  [
    "of a wrong type",
    utf8(GOLD_TEXT.replace('"biasV": -9', '"biasV": "-9"')),
    ["/biasV"],
    /must be a number in V/,
  ],
  ["of an impossible window", utf8(GOLD_TEXT.replace('"stepEv": 0.02', '"stepEv": 5')), [
    "/acquisition/stepEv",
  ], /10\.\.100000 channels/],
  [
    "of two mistakes",
    utf8(GOLD_TEXT.replace('"Au"', '"Unobtainium"').replace('"dwellS"', '"dwell"')),
    ["/acquisition/dwell", "/acquisition/dwellS", "/sample/material"],
    /material must be one of Au, /,
  ],
];
for (const [what, bytes, places, rule] of SCENARIOS) {
  Deno.test(`validate refuses a scenario that is ${what}`.replace("is of", "has"), async () => {
    await inFolder({ "bad.json": bytes }, async (folder) => {
      const outcome = await twoedge(folder, "validate", "bad.json", "--json");
      assert.deepEqual([outcome.code, outcome.stdout], [2, ""]);
      assert.match(outcome.stderr, rule);
      const lines = outcome.stderr.trimEnd().split("\n");
      assert.deepEqual(lines.map((line) => /\(at ([^()]+)\)$/.exec(line)?.[1]).sort(), places);
      assert.ok(lines.every((line) => /^Cannot (read|use) .* as .*: current value is /.test(line)));
      assert.deepEqual(namesIn(folder), ["bad.json"]);
    });
  });
}
