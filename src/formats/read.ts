import { cannot, InputError } from "../base/mod.ts";
import { type CsvOptions, readSpectrumCsv } from "./csv.ts";
import { readIso14976 } from "./iso14976.ts";
import type { SpectrumFile } from "./region.ts";
import { decodeText } from "./text.ts";

/**
 * Reads a spectrum file of any format known here, found by content: a first line that begins with "VAMAS" means
 * ISO 14976, everything else is CSV.
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
 * const [region] = readSpectrumFile(bytes, "edge.csv").regions;
 * assert.equal(region.energyKind, "binding");
 * assert.deepEqual([...region.energiesEv], [-2, -1, 0, 1, 2]);
 * ```
 */
export function readSpectrumFile(
  bytes: Uint8Array,
  fileName: string,
  options: CsvOptions = {},
): SpectrumFile {
  const text = decodeText(bytes, fileName);
  if (!text.startsWith("VAMAS")) return readSpectrumCsv(text, fileName, options);
  if (options.columns !== undefined) {
    const message = cannot(
      `read "${fileName}"`,
      "--columns must not be given for ISO 14976, which names its own columns",
      options.columns.join(","),
    );
    throw new InputError([{ place: "--columns", message }]);
  }
  return readIso14976(text, fileName);
}
