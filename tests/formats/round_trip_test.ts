import assert from "node:assert/strict";
import fc from "fast-check";
import {
  decodeText,
  lostFacts,
  readIso14976,
  readNexus,
  readSpectrumCsv,
  type SpectrumRegion,
  writeIso14976,
  writeNexus,
  writeRegionCsv,
  writeSpectrumFile,
} from "../../src/formats/mod.ts";
import { anyRegion } from "../support/any_region.ts";
import { isoItems, isoText } from "../support/iso14976_sample.ts";
import { problemsOf } from "../support/input_problems.ts";

const SEED = 20250301;
const utf8 = (text: string): Uint8Array => new TextEncoder().encode(text);

function assertNothingLost(before: readonly SpectrumRegion[], after: readonly SpectrumRegion[]): void {
  assert.equal(after.length, before.length);
  before.forEach((region, i) => assert.deepEqual(lostFacts(region, after[i]), []));
}

const throughCsv = (region: SpectrumRegion): SpectrumRegion =>
  readSpectrumCsv(decodeText(utf8(writeRegionCsv(region)), "a.csv"), "a.csv").regions[0];
const throughIso = (regions: readonly SpectrumRegion[]): readonly SpectrumRegion[] =>
  readIso14976(decodeText(utf8(writeIso14976(regions)), "a.vms"), "a.vms").regions;
const throughNexus = async (regions: readonly SpectrumRegion[]): Promise<readonly SpectrumRegion[]> =>
  (await readNexus(await writeNexus(regions), "a.nxs")).regions;

Deno.test("readSpectrumCsv() gives back every region that writeRegionCsv() wrote", () => {
  fc.assert(
    fc.property(anyRegion, (region) => assert.deepEqual(throughCsv(region), region)),
    { seed: SEED, numRuns: 200 },
  );
});

Deno.test("readIso14976() gives back all that writeIso14976() wrote, and writing that again changes nothing", () => {
  fc.assert(
    fc.property(fc.array(anyRegion, { minLength: 1, maxLength: 3 }), (regions) => {
      const back = throughIso(regions);
      assertNothingLost(regions, back);
      assert.equal(writeIso14976(throughIso(back)), writeIso14976(back));
    }),
    { seed: SEED, numRuns: 200 },
  );
});

Deno.test("readNexus() gives back all that writeNexus() wrote", async () => {
  await fc.assert(
    fc.asyncProperty(
      fc.array(anyRegion, { minLength: 1, maxLength: 2 }),
      async (regions) => assertNothingLost(regions, await throughNexus(regions)),
    ),
    { seed: SEED, numRuns: 40 },
  );
});

Deno.test("a region is the same after it went through all formats in turn", async () => {
  await fc.assert(
    fc.asyncProperty(anyRegion, async (region) => {
      const [there] = await throughNexus(throughIso([throughCsv(region)]));
      const [back] = throughIso([throughCsv(there)]);
      assert.deepEqual(lostFacts(region, back), []);
    }),
    { seed: SEED, numRuns: 25 },
  );
});

Deno.test("an ISO 14976 file is the same after it went through all formats in turn", async () => {
  for (const mode of ["NORM", "SDP", "MAP", "MAPDP"] as const) {
    for (const technique of ["UPS", "AES diff"] as const) {
      const before = readIso14976(isoText(isoItems({ mode, technique })), "s.vms").regions;
      assertNothingLost(before, (await throughNexus(throughIso(before))).map(throughCsv));
    }
  }
});

Deno.test("lostFacts() names every fact that is not the same, and only these", () => {
  const [region] = readIso14976(isoText(), "s.vms").regions;
  const { energiesEv, counts, columns, comments, metadata } = region;
  const other = (values: Float64Array) => values.map((value, i) => i === 2 ? value * (1 + 2 ** -52) : value);
  const changed: [Partial<SpectrumRegion>, string[]][] = [
    [{}, []],
    [{ label: "x", species: "x", energyKind: "unknown" }, ["label", "species", "energyKind"]],
    [{ photonEnergyEv: 21, biasV: 1, asRecorded: true }, ["photonEnergyEv", "biasV", "asRecorded"]],
    [{ analyzerWorkFunctionEv: null, passEnergyEv: 1, dwellS: 2, sweeps: null }, [
      ...["analyzerWorkFunctionEv", "passEnergyEv", "dwellS", "sweeps"],
    ]],
    [{ energiesEv: other(energiesEv) }, ["energies"]],
    [{ counts: counts.slice(1) }, ["counts"]],
    [{ comments: comments.toReversed() }, ["comments"]],
    [{ metadata: { ...metadata, sample: "silver", extra: "new" } }, ["sample"]],
    [{ columns: { Transmission: other(columns.Transmission) } }, ["column Transmission"]],
    [{ columns: {} }, ["column Transmission"]],
    [{ columns: { ...columns, more: counts } }, ["column more"]],
  ];
  for (const [change, lost] of changed) assert.deepEqual(lostFacts(region, { ...region, ...change }), lost);
});

Deno.test("writeSpectrumFile() refuses a region when the format cannot hold it", async () => {
  const [region] = readIso14976(isoText(), "s.vms").regions;
  const refusal = async (
    format: "csv" | "ISO 14976" | "NXmpes",
    change: Partial<SpectrumRegion>,
    copies = 1,
  ) => {
    const regions = Array<SpectrumRegion>(copies).fill({ ...region, ...change });
    const [{ reason }] = await Promise.allSettled([writeSpectrumFile(format, regions, "out")]) as [
      PromiseRejectedResult,
    ];
    return problemsOf(() => {
      throw reason;
    })[0].message;
  };
  const short = { energiesEv: region.energiesEv.slice(0, 4), counts: region.counts.slice(0, 4), columns: {} };
  assert.match(await refusal("csv", {}, 2), /it must have one region: current value is 2/);
  assert.match(await refusal("csv", {}, 0), /it must have one region: current value is 0/);
  assert.match(await refusal("ISO 14976", {}, 0), /it must have a region/);
  assert.match(await refusal("NXmpes", {}, 0), /it must have a region/);
  assert.match(await refusal("csv", short), /at least 5 rows/);
  assert.match(await refusal("csv", { columns: { Counts: region.counts } }), /unique.*"Counts"/);
  assert.match(await refusal("csv", { label: "two\nlines" }), /texts must be one line/);
  assert.match(await refusal("ISO 14976", { label: "two\nlines" }), /texts must be one line/);
  assert.match(await refusal("NXmpes", { comments: ["two\nlines"] }), /texts must be one line/);
  assert.match(await refusal("ISO 14976", { biasV: 1e37 }), /finite and not 1E37/);
  assert.match(
    await refusal("ISO 14976", { metadata: {}, columns: { counts: region.counts } }),
    /its own name.*"counts"/,
  );
  assert.match(await refusal("ISO 14976", { label: " x" }), /must read back the same: .*"other label"/);
  assert.match(
    await refusal("NXmpes", { metadata: { note: " x" } }),
    /must read back the same: .*"other note"/,
  );
});
