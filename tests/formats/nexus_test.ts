import assert from "node:assert/strict";
import { Buffer } from "node:buffer";
import h5wasm from "h5wasm";
import { InputError } from "../../src/base/mod.ts";
import {
  lostFacts,
  readNexus,
  readSpectrumCsv,
  readSpectrumFile,
  type SpectrumRegion,
  writeNexus,
} from "../../src/formats/mod.ts";
import { inFolder } from "../support/twoedge.ts";

// All names in this file are those of the NeXus definitions (NIAC): applications/NXmpes, base classes NXdata, NXsample
// (whose `type` has the value "simulated data"), NXbeam, NXenvironment.

const SIMULATED = readSpectrumCsv(
  "# title: gold\n# simulated: true\n# photon_energy_ev: 21.218\n# bias_v: -9\n# analyzer_work_function_ev: 4.4\n" +
    "# pass_energy_ev: 5\n# temperature_k: 300\n# dwell_s: 0.1\n# sweeps: 3\n# date: 2031-04-05 06:07:08\n" +
    "# hours ahead of GMT: -3.5\n# sample: Au µ\n## by hand\nkinetic_energy_ev,counts,mesh\n" +
    Array.from({ length: 40 }, (_, i) => `${(900 + 2 * i) / 100},${(i * i) % 23},${i / 3}`).join("\n"),
  "gold.csv",
).regions[0];

type Node = number | string | readonly string[] | Float64Array | { readonly [name: string]: Node };

/** Makes an HDF5 file as others write it: variable-length strings, scalars, no compression. Names with @ are attributes. */
async function hdf5(tree: { readonly [name: string]: Node }): Promise<Uint8Array> {
  const { FS } = await h5wasm.ready;
  const files = FS as unknown as { readFile(path: string): Uint8Array; unlink(path: string): void };
  const file = new h5wasm.File("/made.h5", "w");
  const fill = (group: InstanceType<typeof h5wasm.Group>, nodes: { readonly [name: string]: Node }): void => {
    for (const [name, node] of Object.entries(nodes)) {
      const [owner, attribute] = name.split("@");
      if (attribute !== undefined) {
        const target = owner === "" ? group : group.get(owner);
        (target as typeof group).create_attribute(attribute, node as string);
      } else if (typeof node === "number") group.create_dataset({ name, data: node, dtype: "<f" });
      else if (typeof node === "string") group.create_dataset({ name, data: node });
      else if (Array.isArray(node)) group.create_dataset({ name, data: [...node] });
      else if (node instanceof Float64Array) group.create_dataset({ name, data: node });
      else fill(group.create_group(name), node as { readonly [name: string]: Node });
    }
  };
  fill(file, tree);
  file.close();
  const bytes = files.readFile("/made.h5").slice();
  files.unlink("/made.h5");
  return bytes;
}

const ENERGIES = Float64Array.of(6, 5.5, 5, 4.5, 4, 3.5);
const COUNTS = Float64Array.of(1, 2, 3, 5, 8, 13);

const DATA = {
  "@NX_class": "NXdata",
  "@signal": "intensity",
  "@axes": "binding",
  intensity: COUNTS,
  "intensity@units": "counts_per_second",
  binding: ENERGIES,
  "binding@units": "eV",
  "binding@type": "binding",
};

/** What somebody else might write: other names and places that the definition allows. */
const FOREIGN = {
  "@NX_class": "NXentry",
  "@default": "spectrum",
  definition: "NXmpes",
  title: "valence\nband ",
  start_time: "2031-04-05T06:07:08Z",
  cycle: { "@NX_class": "NXcollection", deep: { value: 2.5, "value@units": "mbar", comment: "two\nlines" } },
  here: {
    "@NX_class": "NXinstrument",
    beam_other: { "@NX_class": "NXbeam", incident_energy: 40.75, "incident_energy@units": "eV" },
    analyser: {
      "@NX_class": "NXelectronanalyser",
      work_function: 4.25,
      "work_function@units": "eV",
      fast_axes: ["a", "b"],
      dispersion: { "@NX_class": "NXenergydispersion", pass_energy: 10, "pass_energy@units": "eV" },
    },
  },
  specimen: {
    "@NX_class": "NXsample",
    name: "TiO2",
    type: "sample",
    bias_env: { voltmeter: { value: -5, "value@units": "V" } },
    temperature_env: { temperature_sensor: { value: 77, "value@units": "K" } },
  },
  spectrum: DATA,
};

const read = async (entry: { readonly [name: string]: Node }) =>
  (await readNexus(await hdf5({ entry }), "f.nxs")).regions[0];

Deno.test("readNexus() reads what others write in the places and spellings that NXmpes allows", async () => {
  const { energiesEv, counts, ...facts } = await read(FOREIGN);
  assert.deepEqual([...energiesEv], [...ENERGIES].reverse());
  assert.deepEqual([...counts], [...COUNTS].reverse());
  assert.deepEqual(facts, {
    label: "valence band",
    species: "",
    energyKind: "binding",
    photonEnergyEv: 40.75,
    biasV: -5,
    asRecorded: false,
    analyzerWorkFunctionEv: 4.25,
    passEnergyEv: 10,
    dwellS: null,
    sweeps: null,
    comments: [],
    metadata: {
      date: "2031-04-05 06:07:08",
      "hours ahead of GMT": "0",
      sample: "TiO2",
      "sample/type": "sample",
      temperature_k: "77",
      "counts units": "c/s",
      "cycle/deep/value": "2.5 mbar",
      "cycle/deep/comment": "two lines",
    },
    columns: {},
  });
});

Deno.test("readNexus() leaves null what the file does not say", async () => {
  const region = await read({
    "@NX_class": "NXentry",
    definition: "NXmpes",
    data: { "@NX_class": "NXdata", data: COUNTS, energy: ENERGIES, "energy@units": "eV" },
  });
  const { label, energyKind, photonEnergyEv, biasV, analyzerWorkFunctionEv, passEnergyEv, metadata } = region;
  assert.deepEqual(
    { label, energyKind, photonEnergyEv, biasV, analyzerWorkFunctionEv, passEnergyEv, metadata },
    {
      label: "",
      energyKind: "unknown",
      photonEnergyEv: null,
      biasV: null,
      analyzerWorkFunctionEv: null,
      passEnergyEv: null,
      metadata: {},
    },
  );
});

const entryWith = (change: { readonly [name: string]: Node }) => ({ ...FOREIGN, ...change });
const dataWith = (change: { readonly [name: string]: Node }) =>
  entryWith({ spectrum: { ...DATA, ...change } });
const energiesWith = (index: number, value: number) => dataWith({ binding: ENERGIES.with(index, value) });
const BROKEN: [what: string, entry: { readonly [name: string]: Node }, rule: RegExp][] = [
  ["no NXentry", { ...FOREIGN, "@NX_class": "NXcollection" }, /must have an NXentry.*\(at f\.nxs\)/],
  [
    "another definition",
    entryWith({ definition: "NXsas" }),
    /must be "NXmpes".*"NXsas" \(at f\.nxs\/entry\/definition\)/,
  ],
  ["no NXdata", entryWith({ spectrum: { ...DATA, "@NX_class": "NXlog" } }), /there must be an NXdata/],
  ["no signal", dataWith({ "@signal": "missing" }), /read missing as it must be there/],
  ["no auxiliary signal", dataWith({ "@auxiliary_signals": "missing" }), /read missing as it must be there/],
  ["no axis", dataWith({ "@axes": "missing" }), /read missing as it must be there/],
  ["no units of energy", dataWith({ "binding@units": "" }), /units must be "eV": current value is ""/],
  ["energies in meV", dataWith({ "binding@units": "meV" }), /units must be "eV": current value is "meV"/],
  [
    "a repeated energy",
    energiesWith(2, 5.5),
    /all ascend or all descend.*"5\.5 after 5\.5" \(at f\.nxs\/entry\/spectrum\/b/,
  ],
  ["an infinite energy", energiesWith(2, -Infinity), /energies must be finite/],
  ["an unknown energy", energiesWith(0, NaN), /energies must be finite: current value is NaN/],
  ["a negative count", dataWith({ intensity: COUNTS.with(3, -1) }), /counts must be finite and >= 0: .* -1/],
  [
    "an unknown count",
    dataWith({ intensity: COUNTS.with(3, NaN) }),
    /counts must be finite and >= 0: .* NaN/,
  ],
  ["fewer energies than counts", dataWith({ binding: ENERGIES.slice(1) }), /there must be 6 energies/],
  ["texts for counts", dataWith({ intensity: ["a", "b", "c", "d", "e", "f"] }), /it must hold numbers/],
  ["one count alone", dataWith({ intensity: 5 }), /spectra must have one axis, the energy: .*0 axes/],
  [
    "a photon energy without units",
    entryWith({
      here: { "@NX_class": "NXinstrument", beam: { "@NX_class": "NXbeam", incident_energy: 21.2 } },
    }),
    /its units must be "eV": current value is "missing" \(at f\.nxs\/entry\/here\/beam\/incident_energy\)/,
  ],
  [
    "several photon energies",
    entryWith({
      here: {
        "@NX_class": "NXinstrument",
        beam: {
          "@NX_class": "NXbeam",
          incident_energy: Float64Array.of(21.2, 23.1),
          "incident_energy@units": "eV",
        },
      },
    }),
    /it must be one finite number: current value is "21\.2, 23\.1"/,
  ],
  [
    "a photon energy of 0",
    entryWith({
      here: {
        "@NX_class": "NXinstrument",
        beam: { "@NX_class": "NXbeam", incident_energy: 0, "incident_energy@units": "eV" },
      },
    }),
    /it must be > 0 eV/,
  ],
  [
    "a note that breaks a rule",
    entryWith({ twoedge_note: { "@NX_class": "NXnote", data: ["# dwell_s: 0", "oops"] } }),
    /dwell_s" as it must be > 0 s.*twoedge_note:1\)\nCannot read the note as every line must begin.*note:2\)/,
  ],
];
for (const [what, entry, rule] of BROKEN) {
  Deno.test(`readNexus() names path, rule and value when the file has ${what}`, async () => {
    const bytes = await hdf5({ entry });
    await assert.rejects(readNexus(bytes, "f.nxs"), (error) => {
      assert.ok(error instanceof InputError, String(error));
      assert.match(error.message, rule);
      return true;
    });
  });
}

Deno.test("readNexus() refuses images, and more points than it reads, before it reads them", async () => {
  const image = await (async () => {
    const { FS } = await h5wasm.ready;
    const file = new h5wasm.File("/image.h5", "w");
    const entry = file.create_group("entry");
    entry.create_attribute("NX_class", "NXentry");
    entry.create_dataset({ name: "definition", data: "NXmpes" });
    const make = (name: string, args: { shape: number[]; chunks?: number[] }) => {
      const data = entry.create_group(name);
      data.create_attribute("NX_class", "NXdata");
      data.create_dataset({
        name: "data",
        data: new Float64Array(args.shape.reduce((a, b) => a * b)),
        ...args,
      });
    };
    make("data", { shape: [3, 4] });
    file.close();
    return (FS as unknown as { readFile(path: string): Uint8Array }).readFile("/image.h5").slice();
  })();
  await assert.rejects(
    readNexus(image, "f.nxs"),
    /spectra must have one axis, the energy: current value is "2 axes"/,
  );
  const many = new Float64Array(1_000_001).map((_, i) => i);
  const long = await hdf5({ entry: dataWith({ intensity: many, binding: many }) });
  await assert.rejects(
    readNexus(long, "f.nxs"),
    /there must be at most 1000000 points: current value is 1000001/,
  );
});

Deno.test("readSpectrumFile() finds NeXus by its signature, and refuses --columns there", async () => {
  const bytes = await writeNexus([SIMULATED]);
  const { format, regions } = await readSpectrumFile(bytes, "odd.csv");
  assert.equal(format, "NXmpes");
  assert.deepEqual(lostFacts(SIMULATED, regions[0]), []);
  await assert.rejects(
    readSpectrumFile(bytes, "s.nxs", { columns: ["a", "b"] }),
    /--columns must not be given for NeXus, which names its own columns/,
  );
});

Deno.test("writeNexus() puts every fact in its place in NXmpes, and marks simulated data", async () => {
  const bytes = await writeNexus([SIMULATED]);
  const { FS } = await h5wasm.ready;
  (FS as unknown as { writeFile(path: string, bytes: Uint8Array): void }).writeFile("/check.h5", bytes);
  const file = new h5wasm.File("/check.h5", "r");
  const value = (path: string) => (file.get(path) as InstanceType<typeof h5wasm.Dataset>).value;
  const attribute = (path: string, name: string) =>
    (file.get(path) as InstanceType<typeof h5wasm.Dataset>).attrs[name].value;
  assert.equal(file.attrs.default.value, "entry");
  const texts = {
    "entry/definition": "NXmpes",
    "entry/title": "gold",
    "entry/start_time": "2031-04-05T06:07:08-03:30",
    "entry/sample/name": "Au µ",
    "entry/sample/type": "simulated data",
  };
  for (const [path, text] of Object.entries(texts)) assert.equal(value(path), text, path);
  const numbers: Record<string, [number, string]> = {
    "entry/instrument/beam_probe/incident_energy": [21.218, "eV"],
    "entry/instrument/electronanalyzer/work_function": [4.4, "eV"],
    "entry/instrument/electronanalyzer/energydispersion/pass_energy": [5, "eV"],
    "entry/sample/bias_env/value": [-9, "V"],
    "entry/sample/temperature_env/value": [300, "K"],
  };
  for (const [path, [number, units]] of Object.entries(numbers)) {
    assert.deepEqual(value(path), Float64Array.of(number), path);
    assert.equal(attribute(path, "units"), units, path);
  }
  const classes = {
    entry: "NXentry",
    "entry/instrument": "NXinstrument",
    "entry/instrument/beam_probe": "NXbeam",
    "entry/instrument/electronanalyzer": "NXelectronanalyzer",
    "entry/instrument/electronanalyzer/collectioncolumn": "NXcollectioncolumn",
    "entry/instrument/electronanalyzer/energydispersion": "NXenergydispersion",
    "entry/instrument/electronanalyzer/electron_detector": "NXelectron_detector",
    "entry/sample": "NXsample",
    "entry/sample/bias_env": "NXenvironment",
    "entry/data": "NXdata",
  };
  for (const [path, name] of Object.entries(classes)) assert.equal(attribute(path, "NX_class"), name, path);
  assert.deepEqual(value("entry/data/energy"), SIMULATED.energiesEv);
  assert.deepEqual(value("entry/data/data"), SIMULATED.counts);
  assert.equal(attribute("entry/data", "signal"), "data");
  assert.deepEqual(attribute("entry/data", "axes"), ["energy"]);
  assert.equal(attribute("entry/data/energy", "type"), "kinetic");
  assert.equal(attribute("entry/data/energy", "units"), "eV");
  file.close();

  const measured: SpectrumRegion = { ...SIMULATED, metadata: {} };
  assert.ok((await readNexus(await writeNexus([measured]), "m")).regions[0].metadata.simulated === undefined);
});

Deno.test("readNexus() never crashes and never gives other numbers when a bit of our file is changed", async () => {
  const bytes = await writeNexus([SIMULATED]);
  const [good] = (await readNexus(bytes, "g")).regions;
  // Single texts have no checksum; all the rest does (HDF5 1.10 layout, zlib).
  const texts = ["label", "comments", ...Object.keys(good.metadata)].filter((key) => key !== "temperature_k");
  const STEP = 61; // odd, so that every bit of a byte comes up; all bytes and bits were tried once
  let refused = 0;
  for (let at = 0; at < bytes.length; at += STEP) {
    const changed = bytes.with(at, bytes[at] ^ (1 << (at % 8)));
    try {
      const { regions } = await readSpectrumFile(changed, "g");
      assert.equal(regions.length, 1, `byte ${at}`);
      assert.deepEqual(lostFacts(good, regions[0]).filter((fact) => !texts.includes(fact)), [], `byte ${at}`);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      refused++;
    }
  }
  assert.ok(refused > bytes.length / (10 * STEP), `only ${refused} were refused`);
  assert.deepEqual((await readNexus(bytes, "g")).regions, [good], "the library is broken by damaged files");
});

Deno.test("readNexus() refuses our file when it is cut anywhere", async () => {
  const bytes = await writeNexus([SIMULATED]);
  for (let length = 8; length < bytes.length; length += 61) {
    await assert.rejects(
      readNexus(bytes.subarray(0, length), "g"),
      { name: "InputError" },
      `${length} bytes`,
    );
  }
  await assert.rejects(readNexus(bytes.subarray(0, -1), "g"), { name: "InputError" });
});

Deno.test("readNexus() prints nothing of its own when a file is damaged", async () => {
  const bytes = (await writeNexus([SIMULATED])).subarray(0, 900);
  const output: string[] = [];
  const { error } = console;
  console.error = (...words) => void output.push(words.join(" "));
  try {
    await assert.rejects(readNexus(bytes, "g"), /must be a whole and undamaged HDF5 file/);
  } finally {
    console.error = error;
  }
  assert.deepEqual(output, []);
});

/** Whether the HDF5 Group's own program is here and may be run. */
function h5dumpIsHere(): boolean {
  const { state } = Deno.permissions.querySync({ name: "run", command: "h5dump" });
  if (state !== "granted") return false;
  try {
    return new Deno.Command("h5dump", { args: ["--version"], stdout: "null", stderr: "null" }).outputSync()
      .success;
  } catch {
    return false;
  }
}

const skipped = !h5dumpIsHere();
Deno.test({
  name: `h5dump reads what writeNexus() wrote${
    skipped ? " (skipped: needs h5dump, Debian's hdf5-tools, and --allow-run=h5dump)" : ""
  }`,
  ignore: skipped,
  async fn() {
    await inFolder({ "gold.nxs": await writeNexus([SIMULATED, SIMULATED]) }, async (folder) => {
      const dump = async (path: string): Promise<number[]> => {
        const args = ["-d", path, "-b", "LE", "-o", `${folder}/out`, `${folder}/gold.nxs`];
        const { success } = await new Deno.Command("h5dump", { args, stdout: "null" }).output();
        assert.ok(success, path);
        const bytes = Buffer.from(await Deno.readFile(`${folder}/out`));
        return Array.from({ length: bytes.length / 8 }, (_, i) => bytes.readDoubleLE(8 * i));
      };
      assert.deepEqual(await dump("/entry_1/data/energy"), [...SIMULATED.energiesEv]);
      assert.deepEqual(await dump("/entry_2/data/data"), [...SIMULATED.counts]);
      assert.deepEqual(await dump("/entry_1/instrument/beam_probe/incident_energy"), [21.218]);
    });
  },
});
