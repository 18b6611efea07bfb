import assert from "node:assert/strict";
import fc from "fast-check";
import { InputError } from "../../src/base/mod.ts";
import { type CsvOptions, readSpectrumCsv, writeRegionCsv, writeSpectrumCsv } from "../../src/formats/mod.ts";

const ROWS = "5.0,3\n5.1,4\n5.2,9\n5.3,8\n5.4,7\n";
const GOOD = "kinetic_energy_ev,counts\n" + ROWS;

Deno.test("readSpectrumCsv() fills fields from metadata lines when keys are known", () => {
  const head =
    "# Region: cutoff\n# photon_energy_ev: 21.22\n# BIAS_V: -9\n# analyzer_work_function_ev: 4.4\n" +
    "# pass_energy_ev: 5\n# dwell_s: 0.1\n# sweeps: 2\n# sample: Au: foil\n# a plain comment at 10:30\n#\n";
  const tail = '# later: yes\n# Species: Au\n## verbatim: no key\n# "a: b": c\n';
  const [region] = readSpectrumCsv(head + GOOD + tail, "a.csv").regions;
  assert.deepEqual(region, {
    label: "cutoff",
    species: "Au",
    energyKind: "kinetic",
    energiesEv: Float64Array.of(5, 5.1, 5.2, 5.3, 5.4),
    counts: Float64Array.of(3, 4, 9, 8, 7),
    photonEnergyEv: 21.22,
    biasV: -9,
    asRecorded: true,
    analyzerWorkFunctionEv: 4.4,
    passEnergyEv: 5,
    dwellS: 0.1,
    sweeps: 2,
    comments: ["a plain comment at 10:30", "verbatim: no key"],
    metadata: { sample: "Au: foil", later: "yes", "a: b": "c" },
    columns: {},
  });
});

Deno.test("readSpectrumCsv() takes a bias for one of energies as recorded unless as_recorded says otherwise", () => {
  const asRecorded = (head: string) => readSpectrumCsv(head + GOOD, "a.csv").regions[0].asRecorded;
  assert.deepEqual(
    ["", "# bias_v: -9\n", "# bias_v: 9\n# as_recorded: false\n", "# as_recorded: true\n"].map(asRecorded),
    [false, true, false, true],
  );
});

Deno.test("readSpectrumCsv() refuses a misspelled key, and takes one in quotes or with a number behind it", () => {
  const cases = [
    ["bais_v", "bias_v"],
    ["Bias_mV", "bias_v"],
    ["temprature_k", "temperature_k"],
    ["photon_enery_ev", "photon_energy_ev"],
    ["resolution_fhwm_ev", "resolution_fwhm_ev"],
    ["sweep", "sweeps"],
  ];
  for (const [key, meant] of cases) {
    assert.throws(() => readSpectrumCsv(`# sample: Au\n# ${key}: 3\n${GOOD}`, "a.csv"), {
      name: "InputError",
      message:
        `Cannot read the key as it must be a known one (did you mean ${meant}?) or stand in quotes if it is ` +
        `meant as it is: current value is "${key}" (at a.csv:2)`,
    });
    const [region] = readSpectrumCsv(`# "${key}": 3\n${GOOD}`, "a.csv").regions;
    assert.deepEqual(region.metadata, { [key]: "3" });
    // What a converter writes reads back the same.
    assert.deepEqual(readSpectrumCsv(writeRegionCsv(region), "a.csv").regions, [region]);
  }
  const others = { "bias_v (2)": "3", seed: "1", title: "a", version: "b", bias: "c", sample: "d" };
  const head = Object.entries(others).map(([key, value]) => `# ${key}: ${value}\n`).join("");
  assert.deepEqual(readSpectrumCsv(head + GOOD, "a.csv").regions[0].metadata, others);
});

Deno.test("readSpectrumCsv() gives null when the file says nothing", () => {
  const [region] = readSpectrumCsv(GOOD, "a.csv").regions;
  assert.deepEqual([region.label, region.photonEnergyEv, region.biasV, region.sweeps], [
    "",
    null,
    null,
    null,
  ]);
});

const SAME: [what: string, text: string][] = [
  ["CR LF line ends", GOOD.replaceAll("\n", "\r\n")],
  ["CR line ends", GOOD.replaceAll("\n", "\r")],
  ["semicolons", GOOD.replaceAll(",", ";")],
  ["tabs", GOOD.replaceAll(",", "\t")],
  ["blanks around cells", GOOD.replaceAll(",", " , ")],
  ["upper-case names", GOOD.toUpperCase()],
  ["quoted cells", GOOD.replace("counts", '"counts"').replace("5.1,", '"5.1",')],
  ["blank lines", "\n \n" + GOOD.replaceAll("\n", "\n\n")],
  ["no last line end", GOOD.trimEnd()],
  ["exponents and signs", GOOD.replace("5.0,3", "+.5e1,3.E0")],
];
for (const [what, text] of SAME) {
  Deno.test(`readSpectrumCsv() reads the same numbers when the file has ${what}`, () => {
    const [region] = readSpectrumCsv(text, "a.csv").regions;
    assert.deepEqual([...region.energiesEv], [5, 5.1, 5.2, 5.3, 5.4]);
    assert.deepEqual([...region.counts], [3, 4, 9, 8, 7]);
    assert.equal(region.energyKind, "kinetic");
  });
}

Deno.test("readSpectrumCsv() reverses every column when energies descend", () => {
  const text = "binding_energy_ev,counts,mesh\n3,1,10\n2,2,20\n1,3,30\n0,4,40\n-1,5,50\n";
  const [region] = readSpectrumCsv(text, "a.csv").regions;
  assert.equal(region.energyKind, "binding");
  assert.deepEqual([...region.energiesEv], [-1, 0, 1, 2, 3]);
  assert.deepEqual([...region.counts], [5, 4, 3, 2, 1]);
  assert.deepEqual([...region.columns.mesh], [50, 40, 30, 20, 10]);
});

Deno.test("readSpectrumCsv() keeps a further column only when all its cells are numbers or empty", () => {
  const rows = ROWS.trimEnd().split("\n").map((row, i) => `${row},${i},ok,${i === 2 ? "" : i}`).join("\n");
  const [region] = readSpectrumCsv("kinetic_energy_ev,counts,mesh,remark,partly\n" + rows, "a.csv").regions;
  assert.deepEqual(region.columns, {
    mesh: Float64Array.of(0, 1, 2, 3, 4),
    partly: Float64Array.of(0, 1, NaN, 3, 4),
  });
});

Deno.test("readSpectrumCsv() takes the named columns when --columns gives them", () => {
  const text = "Kinetic (eV),I0,signal\n" + ROWS.replaceAll(",", ",1,");
  const kindFor = (name: string) =>
    readSpectrumCsv(text.replace("Kinetic (eV)", name), "a.csv", { columns: [name, "SIGNAL"] }).regions[0];
  assert.deepEqual([...kindFor("Kinetic (eV)").counts], [3, 4, 9, 8, 7]);
  assert.deepEqual(["Kinetic (eV)", "Binding", "x"].map((name) => kindFor(name).energyKind), [
    "kinetic",
    "binding",
    "unknown",
  ]);
  assert.deepEqual(kindFor("x").metadata, { "abscissa label": "x", "counts label": "signal" });
  assert.deepEqual(Object.keys(kindFor("x").columns), ["I0"]);
});

Deno.test("readSpectrumCsv() leaves the kind of axis open when the energy column is energy_ev", () => {
  const [region] = readSpectrumCsv(GOOD.replace("kinetic_", ""), "a.csv").regions;
  assert.deepEqual([region.energyKind, region.metadata], ["unknown", {}]);
});

const H = "kinetic_energy_ev,counts\n";
const row = (text: string) => H + "5.0,3\n" + text + "\n5.2,9\n5.3,8\n5.4,7\n";
const BROKEN: [what: string, text: string, parts: string[], options?: CsvOptions][] = [
  ["no header", ROWS, [
    "kinetic_energy_ev or binding_energy_ev or energy_ev, and counts",
    "--columns",
    '"5.0,3"',
    "a.csv:1)",
  ]],
  ["no rows at all", "# a: b\n", ["there must be a header row", "no rows"]],
  ["other names", "energy,count\n" + ROWS, ["there must be a header row", '"energy,count"', "a.csv:1)"]],
  ["one column", "counts\n1\n2\n3\n4\n5\n", ["at least two columns", '"counts"', "a.csv:1)"]],
  ["both energies", "kinetic_energy_ev,binding_energy_ev,counts\n1,2,3\n", [
    "--columns must say which energy",
    "a.csv:1)",
  ]],
  ["a name twice", "counts,Counts,kinetic_energy_ev\n1,2,3\n", ["its own name", '"Counts"', "a.csv:1)"]],
  ["a blank name", "kinetic_energy_ev,counts,\n1,2,3\n", ["must have a name", "a.csv:1)"]],
  ["text for a number", row("5.1,abc"), ['column "counts"', "must be a decimal number", '"abc"', "a.csv:3)"]],
  ["trailing words", row("5.1 eV,3"), [
    'column "kinetic_energy_ev"',
    "must be a decimal number",
    '"5.1 eV"',
    "a.csv:3)",
  ]],
  ["an empty cell", row("5.1,"), ["must not be empty", '""', "a.csv:3)"]],
  ["NaN", row("5.1,NaN"), ["must be finite", '"NaN"', "a.csv:3)"]],
  ["Infinity", row("-Infinity,3"), ["must be finite", '"-Infinity"', "a.csv:3)"]],
  ["too large a number", row("5.1,1e999"), ["must be finite", '"1e999"', "a.csv:3)"]],
  ["hexadecimal", row("5.1,0x10"), ["not a hexadecimal one", '"0x10"', "a.csv:3)"]],
  ["a quoted decimal comma", row('"5,1",3'), ["decimal commas must become points", '"5,1"', "a.csv:3)"]],
  ["a bare decimal comma", row("5,1,3"), [
    "must have 2 cells",
    "decimal commas must become points",
    "5,1,3",
    "a.csv:3)",
  ]],
  ["a decimal comma and semicolon", row("5,10;3"), [
    "decimal commas must become points",
    '"10;3"',
    "a.csv:3)",
  ]],
  [
    "decimal commas with semicolons",
    H.replace(",", ";") + "5,00;3\n5,10;4\n",
    ["decimal commas must become points", '"5,10"', "a.csv:3)"],
  ],
  ["unsorted energies", row("5.25,4"), ["energies must be sorted", "5.2 after 5.25", "a.csv:4)"]],
  ["repeated energies", row("5.0,4"), ["energies must not be repeated", "5 after 5", "a.csv:3)"]],
  ["negative counts", row("5.1,-4"), ["counts must be >= 0", "is -4", "a.csv:3)"]],
  ["two header rows", H + "eV,1/s\n" + ROWS, ["there must be one header row", '"eV,1/s"', "a.csv:2)"]],
  ["a short row", row("5.1"), ["every row must have 2 cells", "1 cells: 5.1", "a.csv:3)"]],
  ["four rows", H + ROWS.slice(0, -6), ["at least 5 rows", "is 4"]],
  ["an open quote", H + '5.0,"3\n5.1,4\n', ["quotes must come in pairs", "CSV_QUOTE_NOT_CLOSED", "a.csv:"]],
  ["a quote inside a cell", row('5.1,3"'), ["quotes must come in pairs", "a.csv:3)"]],
  ["a non-numeric key", "\n# bias_v: nine\n" + GOOD, [
    'read "bias_v"',
    "must be a decimal number",
    '"nine"',
    "a.csv:2)",
  ]],
  ["an empty key", "# dwell_s:\n" + GOOD, ['read "dwell_s"', "must not be empty", "a.csv:1)"]],
  ["zero photon energy", "# photon_energy_ev: 0\n" + GOOD, ["must be > 0 eV", "a.csv:1)"]],
  ["a strange statement", "# as_recorded: maybe\n" + GOOD, [
    "it must be true or false",
    '"maybe"',
    "a.csv:1)",
  ]],
  ["half a sweep", "# sweeps: 1.5\n" + GOOD, ["must be a whole number >= 1", "a.csv:1)"]],
  ["a key twice", "# bias_v: 1\n# Bias_V: 2\n" + GOOD, ["every key must be given once", "a.csv:2)"]],
  ["an unknown energy column", GOOD, [
    "--columns must name columns",
    'perhaps "counts"',
    '"count"',
    "a.csv:1)",
  ], {
    columns: ["kinetic_energy_ev", "count"],
  }],
  ["one column named twice", GOOD, ["two different columns", "a.csv:1)"], { columns: ["counts", "Counts"] }],
];
for (const [what, text, parts, options] of BROKEN) {
  Deno.test(`readSpectrumCsv() names line, rule and value when the file has ${what}`, () => {
    assert.throws(() => readSpectrumCsv(text, "a.csv", options), (error) => {
      assert.ok(error instanceof InputError, String(error));
      for (const part of parts) {
        assert.ok(error.message.includes(part), `${part} is not in: ${error.message}`);
      }
      return true;
    });
  });
}

Deno.test("readSpectrumCsv() reports every problem of a file when there are several", () => {
  assert.throws(
    () => readSpectrumCsv("# bias_v: x\n" + H + "1,a\n2,-1\n3\n", "a.csv"),
    (error: InputError) => {
      assert.deepEqual(error.problems.map((p) => p.place), [
        "a.csv:1",
        "a.csv:3",
        "a.csv:4",
        "a.csv:5",
        "a.csv",
      ]);
      return true;
    },
  );
});

Deno.test("readSpectrumCsv() reports ten problems and the number of the others when there are more", () => {
  const text = H + Array.from({ length: 25 }, (_, i) => `${i},x\n`).join("");
  assert.throws(() => readSpectrumCsv(text, "a.csv"), (error: InputError) => {
    assert.equal(error.problems.length, 11);
    assert.equal(error.problems[10].message, "and 15 more");
    return true;
  });
});

Deno.test("readSpectrumCsv() refuses a file before parsing it when it has more than 1 000 000 rows", () => {
  // Rows that the parser would refuse too, so that only a check that comes first gives this message.
  const text = "# comments do not count\n" + H + "x\n".repeat(1_000_001);
  assert.throws(() => readSpectrumCsv(text, "a.csv"), {
    name: "InputError",
    message: "Cannot read the table as there must be at most 1000000 rows of numbers: " +
      'current value is "more than 1000000" (at a.csv:1000003)',
  });
});

Deno.test("writeSpectrumCsv() writes metadata, header and rows when names need quotes", () => {
  const columns = [{ name: "e", values: [0.1, 1e-7] }, {
    name: 'n, "raw"',
    values: Float64Array.of(3, 1e21),
  }];
  assert.equal(
    writeSpectrumCsv([["sample", "Au, clean"], ["note", ""]], columns),
    '# sample: Au, clean\n# note:\ne,"n, ""raw"""\n0.1,3\n1e-7,1e+21\n',
  );
});

Deno.test("writeSpectrumCsv() throws RangeError when the reader could not give the same back", () => {
  const e = { name: "e", values: [1, 2] };
  assert.throws(() => writeSpectrumCsv([["note", "two\nlines"]], [e]), RangeError);
  assert.throws(() => writeSpectrumCsv([["a:b", ""]], [e]), RangeError);
  assert.throws(() => writeSpectrumCsv([["a", ""], ["A", ""]], [e]), RangeError);
  assert.throws(() => writeSpectrumCsv([], [e, { name: " n", values: [1, 2] }]), RangeError);
  assert.throws(() => writeSpectrumCsv([], [e, { name: "n", values: [1] }]), RangeError);
  assert.throws(() => writeSpectrumCsv([], [e, { name: "n", values: [1, NaN] }]), RangeError);
});

const finite = fc.double({ noNaN: true, noDefaultInfinity: true }).map((x) => x + 0);
const plain = fc.string({ unit: "binary", maxLength: 12 }).map((s) => s.replace(/[\r\n]/g, "").trim());
const uniqueNames = (word: fc.Arbitrary<string>, maxLength: number) =>
  fc.uniqueArray(word, { maxLength, selector: (s) => s.toLowerCase() });

Deno.test("readSpectrumCsv() gives back what writeSpectrumCsv() wrote when anything allowed is written", () => {
  const anyFile = fc.record({
    keys: uniqueNames(plain.map((s) => `k${s.replaceAll(":", "")}`), 4),
    value: plain,
    names: uniqueNames(plain.map((s) => `${s}n`), 3),
    rows: fc.uniqueArray(fc.tuple(finite, finite.map(Math.abs), finite), {
      minLength: 5,
      maxLength: 12,
      selector: ([e]) => e,
    }),
  });
  fc.assert(
    fc.property(anyFile, ({ keys, value, names, rows }) => {
      rows.sort((a, b) => a[0] - b[0]);
      const [energies, counts, others] = [0, 1, 2].map((i) => Float64Array.from(rows, (r) => r[i]));
      const columns = [
        ...names.map((name) => ({ name, values: others })),
        { name: "binding_energy_ev", values: energies },
        { name: "counts", values: counts },
      ];
      const metadata = keys.map((key) => [key, value] as const);
      const [region] = readSpectrumCsv(writeSpectrumCsv(metadata, columns), "a.csv").regions;
      assert.deepEqual(region.energiesEv, energies);
      assert.deepEqual(region.counts, counts);
      assert.deepEqual(region.columns, Object.fromEntries(names.map((name) => [name, others])));
      assert.deepEqual(region.metadata, Object.fromEntries(metadata));
    }),
    { seed: 20250114, numRuns: 200 },
  );
});
