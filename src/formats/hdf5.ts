import type { Dataset, Entity, File, Group } from "h5wasm";
import { cannot, InputError } from "../base/mod.ts";
import { MAX_POINTS } from "./region.ts";

/** First bytes of every HDF5 file without a user block (HDF5 File Format Specification, II.A). */
const SIGNATURE = [0x89, 0x48, 0x44, 0x46, 0x0d, 0x0a, 0x1a, 0x0a];

/** Attribute of our own groups: how many names they have, as a damaged group gives fewer without an error. */
const COUNT = "twoedge_count";

/** Largest file that is read, bytes: twice this must fit into the memory of the library. */
const MAX_BYTES = 2 ** 28;

/** Name in the library's own file system, which lives in memory. */
const FILE = "/spectrum.nxs";

/** What is used of the library: classes, and the module below them. */
type Hdf5 = typeof import("h5wasm")["h5wasm"] & { readonly files: FileSystem };

interface FileSystem {
  readonly streams: readonly { readonly path: string }[];
  open(path: string, mode: string): unknown;
  close(stream: unknown): void;
  readFile(path: string): Uint8Array;
  writeFile(path: string, bytes: Uint8Array): void;
  unlink(path: string): void;
}

async function loadHdf5(): Promise<Hdf5> {
  const { h5wasm } = await import("h5wasm"); // 4 MB: only when such a file is met
  const files = (await h5wasm.ready).FS as unknown as FileSystem;
  // The library prints its stack of errors; ours are told by exceptions alone.
  if (files.streams[2].path !== "/dev/null") {
    files.close(files.streams[2]);
    files.open("/dev/null", "w");
  }
  return Object.assign(Object.create(h5wasm), { files });
}

/** `true` when the bytes begin like an HDF5 file. */
export function isHdf5(bytes: Uint8Array): boolean {
  return SIGNATURE.every((byte, i) => bytes[i] === byte);
}

/**
 * Opens an HDF5 file, uses it and closes it.
 *
 * @param bytes The whole file.
 * @param fileName Name for messages.
 * @param use What to read.
 * @returns What `use` gives.
 * @throws {InputError} If the file is damaged.
 */
export async function readHdf5<T>(
  bytes: Uint8Array,
  fileName: string,
  use: (file: Hdf5Group) => T,
): Promise<T> {
  const fail = (rule: string, value: string) =>
    new InputError([{ place: fileName, message: cannot("read the file", rule, value) }]);
  if (bytes.length > MAX_BYTES) throw fail("it must have at most 256 MiB", `${bytes.length} bytes`);
  const h5 = await loadHdf5();
  h5.files.writeFile(FILE, bytes);
  let file: File | undefined;
  try {
    file = new h5.File(FILE, "r");
    return use(groupReader(h5, file, await h5.ready));
  } catch (error) {
    if (error instanceof InputError) throw error;
    // A damaged file can fail anywhere below.
    throw fail(
      "it must be a whole and undamaged HDF5 file",
      error instanceof Error ? error.message : "broken",
    );
  } finally {
    closeDamaged(file);
    h5.files.unlink(FILE);
  }
}

/** Closing can fail where reading has failed already, which was told. */
function closeDamaged(file: File | undefined): void {
  try {
    if (file !== undefined && file.file_id >= 0n) file.close();
  } catch (error) {
    if (!(error instanceof WebAssembly.RuntimeError)) throw error;
  }
}

/** A value of HDF5 in terms of ours. */
export type Hdf5Value = string | Float64Array | readonly string[];

/** A group, as far as reading needs it; paths are relative to it. */
export interface Hdf5Group {
  /** Names in the group, in the order of the file. */
  readonly names: readonly string[];
  /** NeXus class, or empty. */
  readonly nxClass: string;
  /** A group below, or undefined. */
  group(path: string): Hdf5Group | undefined;
  /** Shape of a dataset, or undefined when there is none; `[]` for one value. */
  shape(path: string): readonly number[] | undefined;
  /**
   * Values of a dataset: a text, texts, or numbers (one, too, as an array); undefined when there is none or its type is
   * neither.
   */
  value(path: string): Hdf5Value | undefined;
  /** Texts or numbers of an attribute of the group (path "") or of what is below it. */
  attribute(path: string, name: string): Hdf5Value | undefined;
}

type Module = Awaited<Hdf5["ready"]>;

function groupReader(h5: Hdf5, group: Group, module: Module): Hdf5Group {
  const ownAttribute = (owner: Group | Dataset, name: string): Hdf5Value | undefined =>
    Object.hasOwn(owner.attrs, name) ? ourValue(owner.attrs[name].value) : undefined;
  const nxClass = ownAttribute(group, "NX_class");
  const count = ownAttribute(group, COUNT);
  const names = group.keys();
  if (count instanceof Float64Array && names.length < count[0]) {
    throw new Error(`${group.path} has ${names.length} of ${count[0]} parts`);
  }

  const groupAt = (path: string): Hdf5Group | undefined => {
    const [name, ...rest] = path.split("/");
    const entity = entityOf(name);
    if (!(entity instanceof h5.Group)) return undefined;
    const below = groupReader(h5, entity, module);
    return rest.length === 0 ? below : below.group(rest.join("/"));
  };
  /** The library gives null both for what is not there and for what cannot be opened, or calls the latter a group. */
  const entityOf = (name: string): Entity | null => {
    const entity = group.get(name);
    if (entity === null && names.includes(name)) throw new Error(`${group.path}/${name} cannot be opened`);
    if (entity instanceof h5.Group) entity.keys(); // throws when it is none
    return entity;
  };
  const datasetOf = (name: string): Dataset | undefined => {
    const entity = entityOf(name);
    return entity instanceof h5.Dataset ? entity : undefined;
  };
  /** Reads here, or in the group that a path leads to. */
  const at = <T>(path: string, here: (name: string) => T, there: (group: Hdf5Group, name: string) => T) => {
    const end = path.lastIndexOf("/");
    if (end < 0) return here(path);
    const below = groupAt(path.slice(0, end));
    return below === undefined ? undefined : there(below, path.slice(end + 1));
  };
  return {
    names,
    nxClass: typeof nxClass === "string" ? nxClass : "",
    group: groupAt,
    shape: (path) =>
      at(path, (name) => datasetOf(name)?.metadata.shape ?? undefined, (below, name) => below.shape(name)),
    value: (path) =>
      at(path, (name) => {
        const dataset = datasetOf(name);
        return dataset === undefined ? undefined : ourValue(checkedValue(dataset, module));
      }, (below, name) => below.value(name)),
    attribute: (path, attribute) =>
      at(path, (name) => {
        const owner = name === "" ? group : entityOf(name);
        const isOwner = owner instanceof h5.Group || owner instanceof h5.Dataset;
        return isOwner ? ownAttribute(owner, attribute) : undefined;
      }, (below, name) => below.attribute(name, attribute)),
  };
}

/**
 * The library gives what happens to be in memory where a value cannot be read (a damaged chunk, an unknown filter): so
 * the value is read once for its status alone.
 */
function checkedValue(dataset: Dataset, module: Module): unknown {
  const { size, total_size: count, type } = dataset.metadata;
  const { H5T_INTEGER, H5T_FLOAT, H5T_STRING } = module.H5T_class_t;
  const isFloat = type === H5T_FLOAT.value && (size === 4 || size === 8);
  if (!isFloat && type !== H5T_INTEGER.value && type !== H5T_STRING.value) return undefined;
  if (count > MAX_POINTS) {
    throw new Error(`${dataset.path} has ${count} values, more than ${MAX_POINTS}`);
  }
  const address = module._malloc(Math.max(1, size * count));
  try {
    const status = module.get_dataset_data(dataset.file_id, dataset.path, null, null, null, BigInt(address));
    if (status < 0) throw new Error(`${dataset.path} cannot be read`);
  } finally {
    module._free(address);
  }
  return dataset.value;
}

function ourValue(value: unknown): Hdf5Value | undefined {
  if (typeof value === "string") return value;
  if (typeof value === "number" || typeof value === "bigint") return Float64Array.of(Number(value));
  if (value instanceof Float64Array) return value;
  if (value instanceof BigInt64Array || value instanceof BigUint64Array) {
    return Float64Array.from(value, Number);
  }
  if (ArrayBuffer.isView(value) && !(value instanceof DataView)) {
    return Float64Array.from(value as unknown as ArrayLike<number>);
  }
  if (Array.isArray(value) && value.every((item) => typeof item === "string")) return value;
  return undefined;
}

/** A group to write into. */
export interface Hdf5Writer {
  /** Writes an attribute of the group, or of a dataset in it. */
  attribute(name: string, value: string | number | readonly string[], dataset?: string): void;
  /** Makes a group below with its NeXus class. */
  group(name: string, nxClass: string): Hdf5Writer;
  /** Writes numbers, or one number; NaN for unknown ones. */
  numbers(name: string, values: Float64Array | number, units?: string): void;
  /** Writes a text. */
  text(name: string, value: string): void;
  /** Writes lines. */
  lines(name: string, values: readonly string[]): void;
}

/**
 * Writes an HDF5 file. Numbers and lines are compressed and the layout is that of version 1.10, so that checksums cover
 * all but single texts: a damaged file is then found to be one.
 *
 * @param write What to write.
 * @returns The bytes; HDF5 files are not byte-reproducible.
 */
export async function writeHdf5(write: (root: Hdf5Writer) => void): Promise<Uint8Array> {
  const h5 = await loadHdf5();
  const file = new h5.File(FILE, "w", { libver: "v110" });
  try {
    const last: (() => void)[] = [];
    write(groupWriter(file, last));
    last.forEach((step) => step());
  } finally {
    file.close();
  }
  const bytes = h5.files.readFile(FILE).slice();
  h5.files.unlink(FILE);
  return bytes;
}

/** What is left to write when all else is there goes to `last`. */
function groupWriter(group: Group, last: (() => void)[]): Hdf5Writer {
  last.push(() => group.create_attribute(COUNT, group.keys().length, [], "<i4"));
  return {
    attribute(name, value, dataset) {
      const owner = dataset === undefined ? group : group.get(dataset) as Dataset;
      if (typeof value === "number") owner.create_attribute(name, value, [], "<i4");
      else if (typeof value === "string") owner.create_attribute(name, value, [], stringType([value]));
      else owner.create_attribute(name, [...value], [value.length], stringType(value));
    },
    group(name, nxClass) {
      const below = groupWriter(group.create_group(name), last);
      below.attribute("NX_class", nxClass);
      return below;
    },
    numbers(name, values, units) {
      const data = typeof values === "number" ? Float64Array.of(values) : values;
      group.create_dataset({ name, data, chunks: [data.length], compression: "gzip" });
      if (units !== undefined) this.attribute("units", units, name);
    },
    text(name, value) {
      group.create_dataset({ name, data: value, dtype: stringType([value]), shape: [] });
    },
    lines(name, values) {
      group.create_dataset({
        name,
        data: [...values],
        dtype: stringType(values),
        chunks: [values.length],
        compression: "gzip",
      });
    },
  };
}

/** Fixed length: variable lengths would go where no checksum covers them. */
function stringType(texts: readonly string[]): string {
  const encoder = new TextEncoder();
  return `S${Math.max(1, ...texts.map((text) => encoder.encode(text).length))}`;
}
