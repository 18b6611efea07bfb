import { readSpectrumFile, type SpectrumFile } from "../formats/mod.ts";
import { readBytes } from "./files.ts";
import { text } from "./flags.ts";

/** Names of the energy and the counts column. */
export type ColumnPair = readonly [energy: string, counts: string];

/** Parses `ENERGY,COUNTS`. */
export function columnPair(text: string): ColumnPair {
  const names = text.split(",").map((name) => name.trim());
  if (names.length !== 2 || names.includes("")) {
    throw new SyntaxError(`must be two column names ENERGY,COUNTS, not ${JSON.stringify(text)}`);
  }
  return [names[0], names[1]];
}

export const columnsFlag = {
  kind: "parsed",
  parse: columnPair,
  brief: "Names of the energy and the counts column of a CSV file",
  placeholder: "ENERGY,COUNTS",
  optional: true,
} as const;
export const regionFlag = {
  kind: "parsed",
  parse: text,
  brief: "Use only the region with this label; repeatable",
  placeholder: "LABEL",
  variadic: true,
  optional: true,
} as const;

/**
 * Reads a spectrum file of any format.
 *
 * @param path The file.
 * @param columns Columns of a CSV file, by default those that are named for it.
 * @returns Its regions.
 */
export async function readSpectra(path: string, columns?: ColumnPair): Promise<SpectrumFile> {
  return await readSpectrumFile(await readBytes(path), path, columns ? { columns } : {});
}
