/**
 * Room `formats`: bytes and text of spectrum files become {@link SpectrumFile} values, and back. No file access.
 *
 * @module
 */
export { lostFacts } from "./compare.ts";
export { type CsvColumn, type CsvOptions, readSpectrumCsv, writeRegionCsv, writeSpectrumCsv } from "./csv.ts";
export { readIso14976 } from "./iso14976.ts";
export { writeIso14976 } from "./iso14976_write.ts";
export { readNexus } from "./nexus.ts";
export { writeNexus } from "./nexus_write.ts";
export { readSpectrumFile } from "./read.ts";
export type { SpectrumFile, SpectrumRegion } from "./region.ts";
export { decodeText } from "./text.ts";
export { writeSpectrumFile } from "./write.ts";
