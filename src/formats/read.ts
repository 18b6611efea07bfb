import { cannot, InputError } from "../base/mod.ts";
import { type CsvOptions, readSpectrumCsv } from "./csv.ts";
import { isHdf5 } from "./hdf5.ts";
import { readIso14976 } from "./iso14976.ts";
import { readNexus } from "./nexus.ts";
import type { SpectrumFile } from "./region.ts";
import { decodeText } from "./text.ts";

/**
 * Reads a spectrum file of any format known here, found by content: the signature of HDF5 means NeXus NXmpes, a first
 * line that begins with "VAMAS" ISO 14976, everything else is CSV.
 *
 * @param bytes The whole file.
 * @param fileName Name for messages; its ending does not matter.
 * @param options Which columns of a CSV file to take.
 * @returns The regions of the file.
 * @throws {InputError} If the file breaks a rule of its format.
 * @example
 * ```ts
 * import { readSpectrumFile } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const bytes = new TextEncoder().encode("binding_energy_ev,counts\n2,7\n1,8\n0,4\n-1,1\n-2,1\n");
 * const [region] = (await readSpectrumFile(bytes, "edge.csv")).regions;
 * assert.equal(region.energyKind, "binding");
 * assert.deepEqual([...region.energiesEv], [-2, -1, 0, 1, 2]);
 * ```
 */
export async function readSpectrumFile(
  bytes: Uint8Array,
  fileName: string,
  options: CsvOptions = {},
): Promise<SpectrumFile> {
  const refuseColumns = (format: string) => {
    if (options.columns === undefined) return;
    const message = cannot(
      `read "${fileName}"`,
      `--columns must not be given for ${format}, which names its own columns`,
      options.columns.join(","),
    );
    throw new InputError([{ place: "--columns", message }]);
  };
  if (isHdf5(bytes)) {
    refuseColumns("NeXus");
    return await readNexus(bytes, fileName);
  }
  const text = decodeText(bytes, fileName);
  if (!text.startsWith("VAMAS")) return readSpectrumCsv(text, fileName, options);
  refuseColumns("ISO 14976");
  return readIso14976(text, fileName);
}
