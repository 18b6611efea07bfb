/**
 * Room `formats`: bytes and text of spectrum files become {@link SpectrumFile} values, and back. No file access.
 *
 * @module
 */
export { type CsvColumn, type CsvOptions, readSpectrumCsv, writeSpectrumCsv } from "./csv.ts";
export { readIso14976 } from "./iso14976.ts";
export { readSpectrumFile } from "./read.ts";
export type { SpectrumFile, SpectrumRegion } from "./region.ts";
export { decodeText } from "./text.ts";
