import assert from "node:assert/strict";
import { lostFacts, readSpectrumFile } from "../../src/formats/mod.ts";
import { isoItems, isoText } from "../support/iso14976_sample.ts";
import { isoSpectraText } from "../support/iso14976_spectra.ts";
import { inFolder, namesIn, twoedge } from "../support/twoedge.ts";

const CSV =
  "# simulated: true\n# photon_energy_ev: 21.218\n# bias_v: -9\n# analyzer_work_function_ev: 4.4\n" +
  "# dwell_s: 0.1\n# sweeps: 2\nkinetic_energy_ev,counts,mesh\n" +
  Array.from({ length: 30 }, (_, i) => `${(900 + 2 * i) / 100},${(i * i) % 23},${i / 3}`).join("\n") + "\n";

const regionsOf = async (path: string) => (await readSpectrumFile(await Deno.readFile(path), path)).regions;

Deno.test("convert gives the same spectrum back after it went through all formats", async () => {
  await inFolder({ "a.csv": CSV }, async (folder) => {
    for (const [from, to] of [["a.csv", "b.vms"], ["b.vms", "c.NXS"], ["c.NXS", "d.csv"]]) {
      assert.deepEqual(await twoedge(folder, "convert", from, to), {
        code: 0,
        stdout: `Wrote 1 region to ${to}\n`,
        stderr: "",
      });
    }
    const [before, after] = [await regionsOf(`${folder}/a.csv`), await regionsOf(`${folder}/d.csv`)];
    assert.deepEqual(lostFacts(before[0], after[0]), []);
    assert.equal(after[0].asRecorded, true);
    assert.deepEqual(namesIn(folder), ["a.csv", "b.vms", "c.NXS", "d.csv"]);
  });
});

Deno.test("convert does not make energies as recorded of a bias that is only written", async () => {
  await inFolder({ "s.vms": isoText() }, async (folder) => {
    await twoedge(folder, "convert", "s.vms", "s.csv", "--region", "cutoff");
    const [region] = await regionsOf(`${folder}/s.csv`);
    assert.deepEqual([region.biasV, region.asRecorded], [-9.5, false]);
  });
});

Deno.test("convert writes a CSV for each region, and with --region only those of that label", async () => {
  await inFolder({ "s.vms": isoText() }, async (folder) => {
    const all = await twoedge(folder, "convert", "s.vms", "all.csv");
    assert.deepEqual([all.code, all.stdout], [0, "Wrote 3 regions to all_1.csv, all_2.csv, all_3.csv\n"]);
    const labels = (await Promise.all([1, 2, 3].map((i) => regionsOf(`${folder}/all_${i}.csv`)))).flat();
    assert.deepEqual(labels.map(({ label }) => label), ["survey", "cutoff", "valence"]);
    const two = await twoedge(
      folder,
      "convert",
      "s.vms",
      "two.nxs",
      "--region",
      "valence",
      "--region",
      "survey",
    );
    assert.equal(two.code, 0, two.stderr);
    assert.deepEqual((await regionsOf(`${folder}/two.nxs`)).map(({ label }) => label), ["survey", "valence"]);
  });
});

Deno.test("convert takes the columns that --columns names", async () => {
  await inFolder({ "a.csv": CSV.replace("kinetic_energy_ev,counts", "Kinetic,N") }, async (folder) => {
    const { code, stderr } = await twoedge(folder, "convert", "a.csv", "b.vms", "--columns", "Kinetic,N");
    assert.equal(code, 0, stderr);
    const [region] = await regionsOf(`${folder}/b.vms`);
    assert.deepEqual([region.energyKind, region.metadata["counts label"]], ["kinetic", "N"]);
  });
});

const SHORT = isoItems().slice(0, 60).map(([, line]) => line).join("\n");
const REFUSED: [what: string, args: string[], code: number, message: RegExp][] = [
  [
    "another ending",
    ["a.csv", "b.txt"],
    2,
    /^Cannot convert as OUT must end in \.csv, \.vms, \.nxs: .*"b\.txt" \(at OUT\)\n$/,
  ],
  ["the file itself", ["a.csv", "./a.csv"], 2, /^Cannot convert as OUT must be another file than IN/],
  ["a missing file", ["none.csv", "b.vms"], 3, /^Cannot read none\.csv: it does not exist\n$/],
  [
    "a truncated file",
    ["short.vms", "b.nxs"],
    2,
    /^Cannot read .* the file must not end before it.*\(at short\.vms:60\)\n$/,
  ],
  [
    "a label that is not there",
    ["s.vms", "b.csv", "--region", "cutof"],
    2,
    /"survey", "cutoff", "valence" \(did you mean cutoff\?\)/,
  ],
  [
    "a place that cannot be written",
    ["a.csv", "a.csv/b.vms"],
    3,
    /^Cannot write a\.csv: a file is where a folder must be\n$/,
  ],
  ["a region too short for CSV", ["few.vms", "b.csv"], 2, /at least 5 rows of numbers.* \(at b\.csv\)\n$/],
];
for (const [what, args, code, message] of REFUSED) {
  Deno.test(`convert refuses ${what} and writes nothing`, async () => {
    const few = isoSpectraText([{
      label: "few",
      photonEnergyEv: 21.2,
      biasV: 0,
      analyzerWorkFunctionEv: 4,
      startEv: 1,
      stepEv: 1,
      counts: [1, 2, 3],
    }]);
    const files = { "a.csv": CSV, "s.vms": isoText(), "short.vms": SHORT, "few.vms": few };
    await inFolder(files, async (folder) => {
      const outcome = await twoedge(folder, "convert", ...args);
      assert.deepEqual([outcome.code, outcome.stdout], [code, ""], outcome.stderr);
      assert.match(outcome.stderr, message);
      assert.deepEqual(namesIn(folder), Object.keys(files).sort());
    });
  });
}

Deno.test("inspect lists regions with axes, energies, bias and units, and what a fit would refuse", async () => {
  await inFolder({ "s.vms": isoText() }, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "inspect", "s.vms");
    assert.deepEqual([code, stderr], [0, ""]);
    const expected = [
      /^s\.vms: ISO 14976 \(VAMAS\)\n\nRegion 1: survey, wide\n/,
      /\nRegion 2: cutoff, HeI SECO\n {2}axis +kinetic energy\n {2}energies +13 to 14 eV, 5 points, step 0\.25 eV\n/,
      /\n {2}counts +in counts; highest 900, sum 1754\n {2}photon energy +21\.2 eV \(He I alpha\)\n/,
      /\n {2}bias +-9\.5 V, as written: its sign and whether the energies include it are not stated\n/,
      /\n {2}analyzer work function +-4\.41 eV\n {2}pass energy +5 eV\n {2}dwell +0\.2 s, 3 sweeps\n/,
      /\n {2}variables +tilt stage 12\.5 degree\n {2}further columns +Transmission\n/,
      /\nRegion 3: valence, VB edge\n {2}axis +binding energy\n/,
      /\n {2}photon energy +not given\n/,
    ];
    for (const part of expected) assert.match(stdout, part);
  });
});

Deno.test("inspect says what a fit would use and assume, and that data are simulated", async () => {
  await inFolder({ "a.csv": CSV }, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "inspect", "a.csv");
    assert.deepEqual([code, stderr], [0, ""]);
    assert.match(stdout, /\n {2}bias +-9 V, negative accelerates, energies as recorded\n/);
    assert.match(stdout, /\n {2}origin +simulated, not measured\n/);
    assert.match(
      stdout,
      /\nA fit would use\n(.|\n)*and assume\n {2}axis +kinetic energy, file\n {2}photon energy +21\.218 eV, file/,
    );
    assert.match(stdout, /\n {2}temperature +300 K, not known, 300 K assumed\n/);
  });
  // Nine digits are enough to read: the lamp line of simulated files has seventeen.
  await inFolder(
    { "b.csv": CSV.replace(/photon_energy_ev: .*/, "photon_energy_ev: 21.218022919822868") },
    async (folder) => {
      assert.match((await twoedge(folder, "inspect", "b.csv")).stdout, /\n {2}photon energy +21\.2180229 eV/);
    },
  );
});

Deno.test("inspect --json prints one object with the same facts", async () => {
  await inFolder(
    { "a.csv": CSV.replace("# bias_v: -9\n", "# counts units: c/s\n"), "s.vms": isoText() },
    async (folder) => {
      const inspect = async (file: string) =>
        JSON.parse((await twoedge(folder, "inspect", file, "--json")).stdout);
      const { file, format, regions: [region], fit } = await inspect("a.csv");
      assert.deepEqual([file, format], ["a.csv", "csv"]);
      assert.deepEqual(region.energies, { kind: "kinetic", firstEv: 9, lastEv: 9.58, stepEv: 0.02 });
      assert.deepEqual(region.counts, { total: 229, highest: 18, units: "counts/s", whole: true });
      assert.deepEqual([region.points, region.biasV, region.line, region.simulated], [
        30,
        null,
        "He I alpha",
        true,
      ]);
      assert.deepEqual(region.columns, ["mesh"]);
      assert.equal(fit.inputs.photonEnergyEv.value, 21.218);
      assert.deepEqual((await inspect("s.vms")).regions.map(({ label }: { label: string }) => label), [
        "survey",
        "cutoff",
        "valence",
      ]);
    },
  );
});

Deno.test("inspect refuses a damaged NeXus file in one line", async () => {
  await inFolder({ "a.csv": CSV }, async (folder) => {
    assert.equal((await twoedge(folder, "convert", "a.csv", "a.nxs")).code, 0);
    const bytes = await Deno.readFile(`${folder}/a.nxs`);
    await Deno.writeFile(`${folder}/cut.nxs`, bytes.subarray(0, 2000));
    const { code, stdout, stderr } = await twoedge(folder, "inspect", "cut.nxs");
    assert.deepEqual([code, stdout], [2, ""]);
    assert.match(
      stderr,
      /^Cannot read the file as it must be a whole and undamaged HDF5 file: .* \(at cut\.nxs\)\n$/,
    );
  });
});

Deno.test("fit reads NeXus, and finds there what it finds in the CSV it came from", async () => {
  await inFolder({ "a.csv": CSV }, async (folder) => {
    await twoedge(folder, "convert", "a.csv", "a.nxs");
    const inputs = async (file: string) =>
      JSON.parse((await twoedge(folder, "fit", file, "--json")).stdout.replaceAll(file, "a")).inputs;
    assert.deepEqual(await inputs("a.nxs"), await inputs("a.csv"));
  });
});
