import { mkdir, readFile, rename, rm, writeFile } from "node:fs/promises";
import { basename, dirname, join } from "node:path";
import { InputError } from "../base/mod.ts";

/** A file that could not be read or written; ends the program with exit code 3. */
export class FileError extends Error {
  /** @param action Such as `read` or `write`. @param path The file. @param cause What the system said. */
  constructor(action: string, path: string, cause: unknown) {
    const code = (cause as { code?: string }).code;
    const why = code === "ENOENT"
      ? "it does not exist"
      : code === "EISDIR"
      ? "it is a folder"
      : code === "EEXIST" || code === "ENOTDIR"
      ? "a file is where a folder must be"
      : code === "EACCES" || code === "EPERM"
      ? "permission is denied"
      : code === "ENOSPC"
      ? "the disk is full"
      : cause instanceof Error
      ? cause.message
      : String(cause);
    super(`Cannot ${action} ${path}: ${why}`);
    this.name = "FileError";
  }
}

/**
 * Reads a whole file.
 *
 * @param path The file.
 * @returns Its bytes.
 * @throws {FileError} If it cannot be read.
 */
export async function readBytes(path: string): Promise<Uint8Array> {
  try {
    return await readFile(path);
  } catch (error) {
    throw new FileError("read", path, error);
  }
}

/**
 * Writes several files into a folder so that none is ever half-written: each goes to a temporary name first, and only
 * when all are complete are they renamed.
 *
 * @param folder Where; made if missing.
 * @param files Name and contents of each.
 * @returns The paths written.
 * @throws {FileError} If anything fails; temporary files are removed.
 */
export async function writeFiles(
  folder: string,
  files: readonly (readonly [name: string, contents: string | Uint8Array])[],
): Promise<string[]> {
  const pairs = files.map(([name]) => [join(folder, `.${name}.partial`), join(folder, name)] as const);
  try {
    await mkdir(folder, { recursive: true });
    await Promise.all(files.map(([, contents], i) => writeFile(pairs[i][0], contents)));
    await Promise.all(pairs.map(([temporary, final]) => rename(temporary, final)));
  } catch (error) {
    await Promise.all(pairs.map(([temporary]) => rm(temporary, { force: true }).catch(() => {})));
    throw new FileError("write", folder, error);
  }
  return pairs.map(([, final]) => final);
}

/** Name of a file without folder and ending. */
export function stem(path: string): string {
  return basename(path).replace(/\.[^.]*$/, "");
}

/** Path of a file named in another file, relative to that file's folder. */
export function beside(path: string, name: string): string {
  return join(dirname(path), name);
}

/**
 * Exit code for what ended the program.
 *
 * @param error Anything thrown.
 * @returns 2 for bad input, 3 for files, 1 for a defect of our own.
 */
export function exitCodeOf(error: unknown): number {
  return error instanceof InputError ? 2 : error instanceof FileError ? 3 : 1;
}
