import type { Settings } from "./axes.ts";
import { crc32 } from "./crc32.ts";

/** Values of a point by name, as in the table; null where there is none. */
export type PointValues = Readonly<Record<string, number | string | null>>;

/** What is known of a finished point. Depends on its identity alone: no times, no machine. */
export interface PointRecord {
  /** Identity: hash of resolved scenario, version, seeds, and whether it was fitted and its spectrum kept. */
  readonly id: string;
  /** Version of the program. */
  readonly version: string;
  /** What the point changed in the scenario. */
  readonly settings: Settings;
  /** `done`, or `failed` with a reason. */
  readonly status: "done" | "failed";
  /** Why it failed; empty when it did not. */
  readonly reason: string;
  /** Identity of the scenario, as in `result.json` of the same simulation; null when it is none. */
  readonly scenarioHash: string | null;
  /** Seed of the histories; null without a scenario. */
  readonly seed: number | null;
  /** Which independent draw of the counting noise; null without a scenario. */
  readonly replicate: number | null;
  /** Results; empty after a failure. */
  readonly values: PointValues;
}

const LINE = /^\{"crc32":"([0-9a-f]{8})","record":(\{.*\})\}$/;

/**
 * One line of a record file (NDJSON), with a checksum over the bytes of the record.
 *
 * @param record The record.
 * @returns The line, without its end.
 */
export function writeRecordLine(record: PointRecord): string {
  const text = JSON.stringify(record);
  return `{"crc32":"${crc32(new TextEncoder().encode(text))}","record":${text}}`;
}

/**
 * Reads a line of a record file.
 *
 * @param line The line, without its end.
 * @returns The record, or null when the line is torn or damaged.
 * @example A torn line is no record
 * ```ts
 * import { readRecordLine, writeRecordLine } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const line = writeRecordLine({
 *   id: "0123456789abcdef", version: "0.1.0", settings: { biasV: -9 }, status: "failed", reason: "too dark",
 *   scenarioHash: null, seed: null, replicate: null, values: {},
 * });
 * assert.equal(readRecordLine(line)?.reason, "too dark");
 * assert.equal(readRecordLine(line.slice(0, -3)), null);
 * assert.equal(readRecordLine(line.replace("dark", "dork")), null);
 * ```
 */
export function readRecordLine(line: string): PointRecord | null {
  const [, checksum, text] = LINE.exec(line) ?? [];
  if (text === undefined || crc32(new TextEncoder().encode(text)) !== checksum) return null;
  return JSON.parse(text) as PointRecord;
}
