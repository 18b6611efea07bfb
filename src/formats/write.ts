import { cannot, InputError } from "../base/mod.ts";
import { lostFacts } from "./compare.ts";
import { writeRegionCsv } from "./csv.ts";
import { writeIso14976 } from "./iso14976_write.ts";
import { writeNexus } from "./nexus_write.ts";
import { readSpectrumFile } from "./read.ts";
import type { SpectrumFile, SpectrumRegion } from "./region.ts";

/**
 * Writes regions in a format, reads them back and compares: what is returned has lost nothing.
 *
 * @param format The format; CSV holds one region.
 * @param regions The regions.
 * @param fileName Name for messages.
 * @returns The bytes of the file.
 * @throws {InputError} If the format cannot hold everything that the regions say.
 * @example From CSV to ISO 14976
 * ```ts
 * import { readSpectrumFile, writeSpectrumFile } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const csv = new TextEncoder().encode("# region: edge\nkinetic_energy_ev,counts\n5,3\n6,4\n7,9\n8,8\n9,7\n");
 * const { regions } = await readSpectrumFile(csv, "edge.csv");
 * const written = await writeSpectrumFile("ISO 14976", regions, "edge.vms");
 * assert.equal((await readSpectrumFile(written, "edge.vms")).regions[0].label, "edge");
 * ```
 */
export async function writeSpectrumFile(
  format: SpectrumFile["format"],
  regions: readonly SpectrumRegion[],
  fileName: string,
): Promise<Uint8Array> {
  const fail = (rule: string, value: unknown) =>
    new InputError([{ place: fileName, message: cannot(`write ${format}`, rule, value) }]);
  if (format === "csv" && regions.length !== 1) throw fail("it must have one region", regions.length);
  let bytes: Uint8Array;
  try {
    bytes = await encode(format, regions);
  } catch (error) {
    if (!(error instanceof RangeError)) throw error;
    throw new InputError([{ place: fileName, message: error.message }]);
  }
  const back = await readSpectrumFile(bytes, fileName);
  const lost = regions.flatMap((region, i) =>
    back.regions[i] === undefined ? [`region ${region.label}`] : lostFacts(region, back.regions[i])
  );
  if (lost.length > 0) throw fail("the file must read back the same", `other ${lost.join(", ")}`);
  return bytes;
}

async function encode(
  format: SpectrumFile["format"],
  regions: readonly SpectrumRegion[],
): Promise<Uint8Array> {
  if (format === "NXmpes") return await writeNexus(regions);
  return new TextEncoder().encode(format === "csv" ? writeRegionCsv(regions[0]) : writeIso14976(regions));
}
