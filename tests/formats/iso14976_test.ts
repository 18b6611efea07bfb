import assert from "node:assert/strict";
import { InputError } from "../../src/base/mod.ts";
import { readIso14976 } from "../../src/formats/mod.ts";
import { type IsoItem, isoItems, type IsoSampleOptions, isoText } from "../support/iso14976_sample.ts";

Deno.test("readIso14976() reads every block when there are several", () => {
  const { format, regions } = readIso14976(isoText(), "s.vms");
  assert.equal(format, "ISO 14976");
  assert.deepEqual(regions.map((r) => [r.label, r.species, r.energyKind]), [
    ["survey", "wide", "kinetic"],
    ["cutoff", "HeI SECO", "kinetic"],
    ["valence", "VB edge", "binding"],
  ]);
  const [survey, cutoff] = regions;
  assert.deepEqual([...survey.energiesEv], [100, 100.5, 101, 101.5, 102, 102.5]);
  assert.deepEqual([...survey.counts], [40, 55, 71, 12, 9, 3]);
  assert.deepEqual([...cutoff.columns.Transmission], [2, 2.125, 2.25, 2.375, 2.5]);
  assert.deepEqual(Object.keys(cutoff.columns), ["Transmission"]);
  assert.deepEqual(
    [
      cutoff.photonEnergyEv,
      cutoff.biasV,
      cutoff.analyzerWorkFunctionEv,
      cutoff.passEnergyEv,
      cutoff.dwellS,
      cutoff.sweeps,
    ],
    [21.2, -9.5, -4.41, 5, 0.2, 3],
  );
  assert.deepEqual(cutoff.comments, [
    "all numbers invented",
    "later still",
    "sputtered before",
    "",
    "later",
  ]);
  assert.equal(cutoff.asRecorded, false);
});

Deno.test("readIso14976() keeps items as metadata when the file knows them", () => {
  const { metadata } = readIso14976(isoText(), "s.vms").regions[1];
  const expected = {
    institution: "Universität Nirgendwo",
    sample: "gold foil 3",
    date: "2031-04-05 06:07:08",
    technique: "XPS",
    "experimental variable tilt stage": "12.5 degree",
    "tilt polar angle": "10 degree",
    "parameter pressure": "30 nPa",
    "counts units": "d",
  };
  for (const [key, value] of Object.entries(expected)) assert.equal(metadata[key], value, key);
  for (const key of ["operator", "source strength", "tilt azimuth"]) assert.ok(!(key in metadata), key);
});

Deno.test("readIso14976() gives null when a number is 1E37, or 0 where 0 cannot be", () => {
  const [survey, , valence] = readIso14976(isoText(), "s.vms").regions;
  assert.equal(survey.biasV, null);
  assert.equal(valence.photonEnergyEv, null);
  assert.equal(valence.passEnergyEv, null);
  assert.equal(valence.biasV, 0);
});

Deno.test("readIso14976() reverses a block when its energies descend", () => {
  const { energiesEv, counts, columns } = readIso14976(isoText(), "s.vms").regions[2];
  assert.deepEqual([...energiesEv], [-0.5, 0, 0.5, 1, 1.5, 2]);
  assert.deepEqual([...counts], [0, 1, 15, 29, 31, 30]);
  assert.deepEqual([...columns.Transmission], [2.625, 2.5, 2.375, 2.25, 2.125, 2]);
});

const VARIANTS: IsoSampleOptions[] = [
  { mode: "SDP" },
  { mode: "MAP" },
  { mode: "MAPDP" },
  { technique: "AES diff" },
  { scan: "IRREGULAR" },
];
for (const variant of VARIANTS) {
  Deno.test(`readIso14976() reads the same spectra when the file has ${JSON.stringify(variant)}`, () => {
    const spectra = (options: IsoSampleOptions) =>
      readIso14976(isoText(isoItems(options)), "s.vms").regions.map((r) => [
        r.label,
        r.species,
        r.energyKind,
        r.energiesEv,
        r.counts,
        r.columns.Transmission,
        r.biasV,
        r.dwellS,
      ]);
    assert.deepEqual(spectra(variant), spectra({}));
  });
}

Deno.test("readIso14976() gives no photon energy when the source is an electron gun", () => {
  assert.equal(
    readIso14976(isoText(isoItems({ technique: "AES diff" })), "s.vms").regions[1].photonEnergyEv,
    null,
  );
});

Deno.test("readIso14976() reads LF, blank lines at the end and no last line end when files differ in these", () => {
  const whole = readIso14976(isoText(), "s.vms");
  const text = isoText(isoItems(), "\n");
  for (const same of [text, text + "\n  \n", text.slice(0, -1)]) {
    assert.deepEqual(readIso14976(same, "s.vms"), whole);
  }
});

Deno.test("readIso14976() takes minimum and maximum as not stated when both are 0 or unknown", () => {
  for (const line of ["0", "1E37"]) {
    const items = isoItems().map(([item, old]): IsoItem => [item, /^(min|max)imum/.test(item) ? line : old]);
    assert.equal(readIso14976(isoText(items), "s.vms").regions.length, 3);
  }
});

/** Each row: item of the sample to change (its first occurrence), new line, rule in the message. */
const BROKEN: [item: string, line: string, rule: string][] = [
  ["format identifier", "VAMAS data", 'it must be "VAMAS Surface Chemical'],
  ["number of experiment comment lines", "one", "it must be a decimal number"],
  ["number of experiment comment lines", "-1", "it must be a whole number >= 0"],
  ["number of experiment comment lines", "1.5", "it must be a whole number >= 0"],
  ["number of experiment comment lines", "1E37", "it must be known"],
  ["experiment mode", "SEM", "others are not supported yet"],
  ["scan mode", "MAPPING", "others are not supported yet"],
  [
    "number of entries in the inclusion or exclusion list",
    "2",
    "inclusion and exclusion lists are not supported",
  ],
  [
    "number of entries in the inclusion or exclusion list",
    "-2",
    "inclusion and exclusion lists are not supported",
  ],
  ["number of blocks", "0", "there must be at least one block"],
  ["technique", "SIMS", "others are not supported yet"],
  ["source energy", "-21.2", "it must be > 0, or 0 where it is not known"],
  ["number of scans", "2.5", "it must be a whole number"],
  ["signal collection time", "-1", "it must be > 0, or 0 where it is not known"],
  ["target bias", "-9,5", "decimal commas must become points"],
  ["target bias", "", "it must not be empty"],
  ["analyzer work function", "NaN", "it must be finite"],
  ["analyzer work function", "0x10", "not a hexadecimal one"],
  ["abscissa units", "meV", 'the energies must be in "eV"'],
  ["abscissa start", "1E37", "it must be known"],
  ["abscissa increment", "0", "it must not be 0"],
  ["number of ordinate values", "11", "it must be a multiple of the 2 corresponding variables"],
  ["number of ordinate values", "2000002", "there must be at most 1000000 points"],
  ["number of ordinate values", "0", "it must be a multiple of the 2 corresponding variables"],
  ['minimum of "Intensity"', "2.99", "it must agree with the ordinates, where it is 3"],
  ['maximum of "Intensity"', "71.01", "it must agree with the ordinates, where it is 71"],
  ['minimum of "Transmission"', "2.0003", "it must agree with the ordinates, where it is 2"],
  ['maximum of "Transmission"', "2.7", "it must agree with the ordinates, where it is 2.625"],
  ['ordinate of "Intensity"', "1E37", "counts must be known and >= 0"],
  ['ordinate of "Intensity"', "4O", "it must be a decimal number"],
  ["experiment terminator", "end of file", 'it must be "end of experiment"'],
];
for (const [item, line, rule] of BROKEN) {
  Deno.test(`readIso14976() names line, item, rule and value when "${item}" is "${line}"`, () => {
    const items = isoItems();
    const index = items.findIndex(([name]) => name === item);
    items[index] = [item, line];
    assertInputError(() => readIso14976(isoText(items), "s.vms"), [
      `at s.vms:${index + 1})`,
      `Cannot read ${item} `,
      rule,
    ]);
  });
}

Deno.test("readIso14976() accepts stated extremes when they are rounded within 1e-4", () => {
  const items = isoItems();
  const index = items.findIndex(([item]) => item === 'maximum of "Transmission"');
  items[index] = [items[index][0], "2.6252"];
  assert.equal(readIso14976(isoText(items), "s.vms").regions.length, 3);
});

Deno.test("readIso14976() names the line of the ordinate when a count is negative", () => {
  const items = isoItems();
  const blockStart = items.findIndex(([, line]) => line === "cutoff");
  const minimum = items.findIndex(([item], i) => i > blockStart && item === 'minimum of "Intensity"');
  const index = items.findIndex(([item], i) => i > blockStart && item === 'ordinate of "Intensity"') + 2;
  items[minimum] = [items[minimum][0], "-1"];
  items[index] = [items[index][0], "-1"];
  assertInputError(() => readIso14976(isoText(items), "s.vms"), [
    `at s.vms:${index + 1})`,
    "counts must be known and >= 0",
    "is -1",
  ]);
});

Deno.test("readIso14976() names the line when irregular energies are not sorted", () => {
  const items = isoItems({ scan: "IRREGULAR" });
  const index = items.findIndex(([item]) => item === 'ordinate of "Kinetic Energy"') + 6;
  items[index] = [items[index][0], "100.5"];
  assertInputError(() => readIso14976(isoText(items), "s.vms"), [
    `at s.vms:${index + 1})`,
    "energies must all ascend or all descend",
    "100.5 after 100.5",
  ]);
});

Deno.test("readIso14976() refuses corresponding variables when two labels are the same or none holds counts", () => {
  const same = isoItems().map((
    [item, line],
  ): IsoItem => [item, line === "Transmission" ? "Intensity" : line]);
  assertInputError(() => readIso14976(isoText(same), "s.vms"), [
    "every variable must have its own label",
    "s.vms:",
  ]);
  const none = isoItems();
  const index = none.findIndex(([item]) => item === "number of corresponding variables");
  none[index] = [none[index][0], "0"];
  assertInputError(() => readIso14976(isoText(none), "s.vms"), [
    `at s.vms:${index + 1})`,
    "there must be more than 0",
  ]);
});

Deno.test("readIso14976() refuses a text when something follows its end", () => {
  const { length } = isoItems();
  assertInputError(() => readIso14976(isoText() + "\r\nmore\r\n", "s.vms"), [
    `at s.vms:${length + 2})`,
    'nothing may follow "end of experiment"',
    '"more"',
  ]);
});

Deno.test("readIso14976() names the last line and the item wanted when the text ends after any line", () => {
  const items = isoItems();
  for (let kept = 1; kept < items.length; kept++) {
    // All ordinates of a block are asked for at once.
    const wanted = items[kept][0].startsWith("ordinate of") ? "ordinate value " : items[kept][0];
    assertInputError(() => readIso14976(isoText(items.slice(0, kept)), "s.vms"), [
      `Cannot read ${wanted}`,
      "the file must not end before it",
      `end of file after line ${kept}`,
      `at s.vms:${kept})`,
    ]);
  }
});

Deno.test("readIso14976() throws InputError when the text is cut at any character", () => {
  const text = isoText();
  for (let length = 0; length < text.length - 2; length++) {
    assertInputError(() => readIso14976(text.slice(0, length), "s.vms"), ["s.vms:"]);
  }
});

Deno.test("readIso14976() throws InputError when any one line is lost or doubled", () => {
  const items = isoItems();
  items.forEach((item, i) => {
    assertInputError(() => readIso14976(isoText(items.toSpliced(i, 1)), "s.vms"), ["s.vms:"]);
    assertInputError(() => readIso14976(isoText(items.toSpliced(i, 0, item)), "s.vms"), ["s.vms:"]);
  });
});

function assertInputError(run: () => unknown, parts: readonly string[]): void {
  assert.throws(run, (error) => {
    assert.ok(error instanceof InputError, String(error));
    for (const part of parts) {
      assert.ok(error.message.includes(part), `"${part}" is not in: ${error.message}`);
    }
    return true;
  });
}
