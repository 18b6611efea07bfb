import type { SpectrumRegion } from "./region.ts";

const FIELDS = [
  "label",
  "species",
  "energyKind",
  "photonEnergyEv",
  "biasV",
  "asRecorded",
  "analyzerWorkFunctionEv",
  "passEnergyEv",
  "dwellS",
  "sweeps",
] as const;

/**
 * What a region has lost on its way into a file and back. New metadata are no loss: a format may name a default.
 *
 * @param before The region written.
 * @param after The region read back.
 * @returns Names of the fields, metadata and columns that are not the same; empty when nothing is lost.
 */
export function lostFacts(before: SpectrumRegion, after: SpectrumRegion): string[] {
  const columns = new Set([...Object.keys(before.columns), ...Object.keys(after.columns)]);
  return [
    ...FIELDS.filter((field) => before[field] !== after[field]),
    ...(isSame(before.energiesEv, after.energiesEv) ? [] : ["energies"]),
    ...(isSame(before.counts, after.counts) ? [] : ["counts"]),
    ...(isSame(before.comments, after.comments) ? [] : ["comments"]),
    ...Object.entries(before.metadata).filter(([key, value]) => after.metadata[key] !== value).map(([key]) =>
      key
    ),
    ...[...columns].filter((name) => !isSame(before.columns[name], after.columns[name])).map((name) =>
      `column ${name}`
    ),
  ];
}

function isSame(
  a: ArrayLike<number | string> | undefined,
  b: ArrayLike<number | string> | undefined,
): boolean {
  if (a === undefined || b === undefined || a.length !== b.length) return false;
  for (let i = 0; i < a.length; i++) {
    if (a[i] !== b[i] && !(Number.isNaN(a[i]) && Number.isNaN(b[i]))) return false;
  }
  return true;
}
