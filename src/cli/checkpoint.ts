import { readFile, rename, rm, writeFile } from "node:fs/promises";
import { cannot, InputError, VERSION } from "../base/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import { crc32, engineKey } from "../sweep/mod.ts";
import { type BatchTally, HISTORIES_PER_BATCH, type Tally } from "../transport/mod.ts";
import { FileError } from "./files.ts";

/** First line of a checkpoint file, JSON; the sums follow as little-endian 64-bit numbers (IEEE 754). */
interface Header {
  readonly format: "twoedge checkpoint 1";
  /** Version of the program, tables of the scenario and seed, to which the sums belong. */
  readonly key: string;
  readonly batches: number;
  /** Energy bins. */
  readonly bins: number;
  /** Histories of each group. */
  readonly groupHistories: readonly number[];
  /** Of the numbers. */
  readonly crc32: string;
}

const PARTS = ["forced", "analogue", "events"] as const satisfies readonly (keyof BatchTally)[];

/**
 * What the sums of a checkpoint belong to. Histories and everything that only the instrument sees are left out: the same
 * sums serve them all.
 */
export async function checkpointKey(resolved: ResolvedScenario): Promise<string> {
  return `${VERSION} ${await engineKey(resolved)} seed ${resolved.seed}`;
}

/**
 * Reads the sums of an earlier run.
 *
 * @param path The file.
 * @param key What the sums must belong to.
 * @returns The sums, or undefined when there is no such file.
 * @throws {InputError} If the file is damaged or of another simulation.
 */
export async function readCheckpoint(path: string, key: string): Promise<Tally | undefined> {
  let bytes: Uint8Array;
  try {
    bytes = await readFile(path);
  } catch (error) {
    if ((error as { code?: string }).code === "ENOENT") return undefined;
    throw new FileError("read", path, error);
  }
  const refuse = (rule: string, value: unknown): never => {
    throw new InputError([{ place: path, message: cannot("continue from checkpoint", rule, value) }]);
  };
  const end = bytes.indexOf(10);
  const header = readHeader(bytes.subarray(0, Math.max(0, end))) ??
    refuse("the file must be a checkpoint", `${bytes.length} bytes`);
  if (header.key !== key) {
    refuse(`it must be of this version, scenario (but for the instrument) and seed, ${key}`, header.key);
  }
  // A copy: a slice of a Buffer would be a view, and its buffer the whole file.
  const body = new Uint8Array(bytes.subarray(end + 1));
  const wanted = 8 * header.bins * PARTS.length * header.groupHistories.length;
  if (body.length !== wanted || crc32(body) !== header.crc32) {
    refuse(`its ${wanted} bytes of sums must be whole`, `${body.length} bytes, checksum ${crc32(body)}`);
  }
  const numbers = new Float64Array(body.buffer);
  let next = 0;
  const take = (): Float64Array => numbers.slice(next, next += header.bins);
  return {
    batches: header.batches,
    histories: header.batches * HISTORIES_PER_BATCH,
    groups: header.groupHistories.map((histories) => ({
      forced: take(),
      analogue: take(),
      events: take(),
      histories,
    })),
  };
}

function readHeader(line: Uint8Array): Header | null {
  try {
    const header = JSON.parse(new TextDecoder().decode(line));
    return header?.format === "twoedge checkpoint 1" ? header : null;
  } catch {
    return null;
  }
}

/**
 * Writes sums so that an interruption leaves the old file or the new one.
 *
 * @param path The file.
 * @param key What the sums belong to.
 * @param tally The sums.
 * @throws {FileError} If it cannot be written.
 */
export async function writeCheckpoint(path: string, key: string, tally: Tally): Promise<void> {
  const arrays = tally.groups.flatMap((group) => PARTS.map((part) => group[part]));
  const bins = arrays[0]?.length ?? 0;
  const numbers = new Float64Array(bins * arrays.length);
  arrays.forEach((array, i) => numbers.set(array, i * bins));
  const body = new Uint8Array(numbers.buffer);
  const header: Header = {
    format: "twoedge checkpoint 1",
    key,
    batches: tally.batches,
    bins,
    groupHistories: tally.groups.map(({ histories }) => histories),
    crc32: crc32(body),
  };
  const head = new TextEncoder().encode(`${JSON.stringify(header)}\n`);
  const bytes = new Uint8Array(head.length + body.length);
  bytes.set(head);
  bytes.set(body, head.length);
  const temporary = `${path}.partial`;
  try {
    await writeFile(temporary, bytes);
    await rename(temporary, path);
  } catch (error) {
    await rm(temporary, { force: true }).catch(() => {});
    throw new FileError("write", path, error);
  }
}
