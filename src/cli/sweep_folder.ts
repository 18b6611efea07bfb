import { createReadStream } from "node:fs";
import { type FileHandle, mkdir, open, readdir, rename, rm, stat, writeFile } from "node:fs/promises";
import { basename, dirname, join } from "node:path";
import { createInterface } from "node:readline";
import { cannot, InputError } from "../base/mod.ts";
import { decodeText } from "../formats/mod.ts";
import { scenarioHash } from "../scenario/mod.ts";
import {
  checkSweepPaths,
  parseSweep,
  type PointRecord,
  readRecordLine,
  type Sweep,
  type SweepAxis,
  writeRecordLine,
} from "../sweep/mod.ts";
import { beside, FileError, readBytes } from "./files.ts";
import { type LoadedScenario, scenarioLoader } from "./simulate.ts";

/** `sweep.json` in the folder of a sweep: everything that its points depend on, so that nobody can change it meanwhile. */
interface Snapshot {
  readonly format: "twoedge sweep folder 1";
  readonly sweep: Sweep;
  /** Text of the scenario that the sweep names. */
  readonly scenario: string;
  /** Texts of the tables that the points name, by their path from the sweep file. */
  readonly tables: Readonly<Record<string, string>>;
}

/** A sweep with all that its points need. */
export interface SweepSource {
  /** The sweep. */
  readonly sweep: Sweep;
  /** Makes the scenario of a point. */
  readonly load: (overrides: readonly string[]) => Promise<LoadedScenario>;
  /** Identity of the source. */
  readonly key: string;
  /** Text of `sweep.json`. */
  readonly text: string;
}

/** Which share of the points a process runs. */
export interface Part {
  /** 1..of. */
  readonly part: number;
  /** How many parts. */
  readonly of: number;
}

const SNAPSHOT = "sweep.json";
const PARTS = "parts";

/**
 * Reads a sweep file, its scenario, and the tables that scenario or axes name.
 *
 * @param path The sweep file.
 * @returns The sweep, checked against its scenario.
 */
export async function readSweepFile(path: string): Promise<SweepSource> {
  const textOf = async (file: string): Promise<string> => decodeText(await readBytes(file), file);
  const sweep = parseSweep(await textOf(path), path);
  const scenario = await textOf(beside(path, sweep.scenario));
  const base = await scenarioLoader(scenario, sweep.scenario, (file) => textOf(beside(path, file)))([]);
  checkSweepPaths(sweep, base.scenario);
  const { densityOfStatesFile, meanFreePathFile } = base.scenario.sample;
  const swept = sweep.axes.flatMap((axis): readonly SweepAxis[] => axis.kind === "zip" ? axis.axes : [axis])
    .flatMap((axis) => (axis.kind === "list" && axis.path.endsWith("File") ? axis.values : []));
  const names = [densityOfStatesFile, meanFreePathFile, ...swept].filter((name) => typeof name === "string");
  const tables: Record<string, string> = {};
  for (const name of names) {
    const file = beside(sweep.scenario, name);
    tables[file] = await textOf(beside(path, file));
  }
  return await source({ format: "twoedge sweep folder 1", sweep, scenario, tables });
}

async function source(snapshot: Snapshot): Promise<SweepSource> {
  const { sweep, scenario, tables } = snapshot;
  return {
    sweep,
    load: scenarioLoader(scenario, sweep.scenario, (file) => Promise.resolve(tables[file])),
    key: (await scenarioHash(snapshot)).slice(0, 8),
    text: `${JSON.stringify(snapshot, null, 2)}\n`,
  };
}

/** `true` when the path is a folder. */
export async function isFolder(path: string): Promise<boolean> {
  return await stat(path).then((info) => info.isDirectory(), () => false);
}

/**
 * Reads the sweep that a folder holds.
 *
 * @param folder The folder.
 * @returns The sweep, or null when the folder holds none.
 * @throws {InputError} If its `sweep.json` is something else.
 */
export async function readSweepFolder(folder: string): Promise<SweepSource | null> {
  const path = join(folder, SNAPSHOT);
  if (!await stat(path).then(() => true, () => false)) return null;
  try {
    const snapshot = JSON.parse(decodeText(await readBytes(path), path)) as Snapshot;
    if (snapshot.format === "twoedge sweep folder 1") return await source(snapshot);
  } catch (error) {
    if (!(error instanceof SyntaxError)) throw error;
  }
  throw new InputError([{
    place: path,
    message: cannot("open sweep folder", "sweep.json must be what sweep --out wrote", "something else"),
  }]);
}

/**
 * Reads the sweep of a folder that must hold one.
 *
 * @param folder The folder.
 * @returns The sweep.
 * @throws {InputError} If it holds none.
 */
export async function requireSweepFolder(folder: string): Promise<SweepSource> {
  const found = await readSweepFolder(folder);
  if (found === null) {
    throw new InputError([{
      place: folder,
      message: cannot(
        "open sweep folder",
        "it must hold the sweep.json that sweep --out wrote",
        "no sweep.json",
      ),
    }]);
  }
  return found;
}

/** Writes `sweep.json`. */
export async function writeSweepFolder(folder: string, { text }: SweepSource): Promise<void> {
  await writeWhole(join(folder, SNAPSHOT), text);
}

/**
 * Writes a file so that others see the old one or the new one, whoever else writes it at the same time.
 *
 * @param path The file; its folder is made if missing.
 * @param contents Text, or what writes it piece by piece.
 * @throws {FileError} If it cannot be written.
 */
export async function writeWhole(
  path: string,
  contents: string | ((write: (text: string) => Promise<void>) => Promise<void>),
): Promise<void> {
  const temporary = join(dirname(path), `.${basename(path)}.${crypto.randomUUID()}.partial`);
  try {
    await mkdir(dirname(path), { recursive: true });
    if (typeof contents === "string") await writeFile(temporary, contents);
    else {
      await using file = await open(temporary, "wx");
      await contents((text) => file.appendFile(text));
    }
    await rename(temporary, path);
  } catch (error) {
    await rm(temporary, { force: true }).catch(() => {});
    throw error instanceof InputError || error instanceof FileError
      ? error
      : new FileError("write", path, error);
  }
}

/**
 * Records in a folder, in no promised order; null for each damaged line. What a killed process left half written at the
 * end of its file is no record and no damage: that point runs again.
 *
 * @param folder The folder of a sweep.
 * @param own Only what this part of this sweep may need: files of its sister parts are left out, whose points are others.
 * @returns Records.
 */
export async function* readRecords(
  folder: string,
  own?: Part & { readonly key: string },
): AsyncGenerator<PointRecord | null, void, undefined> {
  const names = await readdir(join(folder, PARTS)).catch(() => [] as string[]);
  for (const name of names.toSorted()) {
    const [, key, part, of] = /^([0-9a-f]{8})\.(\d+)-of-(\d+)\.[0-9a-f-]+\.ndjson$/.exec(name) ?? [];
    if (key === undefined) continue;
    if (own && key === own.key && Number(of) === own.of && Number(part) !== own.part) continue;
    let last: PointRecord | null | undefined;
    const path = join(folder, PARTS, name);
    try {
      for await (const line of createInterface({ input: createReadStream(path), crlfDelay: Infinity })) {
        if (last !== undefined) yield last;
        last = readRecordLine(line);
      }
    } catch (error) {
      throw new FileError("read", path, error);
    }
    if (last) yield last;
  }
}

/** Appends the records of one process to a file of its own. */
export class RecordWriter {
  readonly #path: string;
  #file: FileHandle | undefined;

  /** @param folder The folder of the sweep. @param key Of the sweep. @param part Which part this process runs. */
  constructor(folder: string, key: string, part: Part) {
    this.#path = join(folder, PARTS, `${key}.${part.part}-of-${part.of}.${crypto.randomUUID()}.ndjson`);
  }

  /**
   * Appends a record.
   *
   * @param record The record.
   * @throws {FileError} If it cannot be written.
   */
  async write(record: PointRecord): Promise<void> {
    try {
      if (this.#file === undefined) {
        await mkdir(dirname(this.#path), { recursive: true });
        this.#file = await open(this.#path, "ax");
      }
      await this.#file.appendFile(`${writeRecordLine(record)}\n`);
    } catch (error) {
      throw new FileError("write", this.#path, error);
    }
  }

  /** Closes the file. */
  async [Symbol.asyncDispose](): Promise<void> {
    await this.#file?.close();
  }
}

/** Where the spectrum of a point is kept; folders by the first two digits keep each small. */
export function spectrumPath(folder: string, id: string): string {
  return join(folder, "spectra", id.slice(0, 2), `${id}.csv`);
}
