import { cannot, InputError } from "../base/mod.ts";

/** First line of every ISO 14976 file. */
export const ISO_14976_IDENTIFIER =
  "VAMAS Surface Chemical Analysis Standard Data Transfer Format 1988 May 4";

/** Largest file that is read, bytes: one JavaScript string must hold it. */
const MAX_BYTES = 2 ** 28;

/** Leading bytes of files that are often given by mistake. */
const SIGNATURES: readonly (readonly [string, readonly number[]])[] = [
  ["a gzip archive", [0x1f, 0x8b]],
  ["a PNG picture", [0x89, 0x50, 0x4e, 0x47]],
  ["an HDF5 file", [0x89, 0x48, 0x44, 0x46, 0x0d, 0x0a, 0x1a, 0x0a]],
  ["an old Excel workbook", [0xd0, 0xcf, 0x11, 0xe0]],
  ["a PDF document", [0x25, 0x50, 0x44, 0x46]],
];

const ZIP_SIGNATURE = [0x50, 0x4b, 0x03, 0x04];

/**
 * Turns the bytes of a text file into a string, strictly: nothing is replaced or dropped except a UTF-8 byte order mark.
 *
 * UTF-8 is required. Only a file that begins with the ISO 14976 identifier may hold other bytes; it is then read as
 * Latin-1 (in its Windows-1252 form), because instruments write names and units that way.
 *
 * @param bytes The whole file, at most 256 MiB.
 * @param fileName Name for messages.
 * @returns The text.
 * @throws {InputError} If the file is empty, too large, binary, UTF-16, or not UTF-8.
 */
export function decodeText(bytes: Uint8Array, fileName: string): string {
  const fail = (rule: string, value: unknown, line = "") =>
    new InputError([{ place: fileName + line, message: cannot("read the file", rule, value) }]);

  if (bytes.length > MAX_BYTES) throw fail("it must have at most 256 MiB", `${bytes.length} bytes`);
  if (startsWith(bytes, [0xff, 0xfe]) || startsWith(bytes, [0xfe, 0xff])) {
    throw fail("its text must be saved as UTF-8", "UTF-16");
  }
  const binary = binaryKind(bytes);
  if (binary !== undefined) throw fail("it must be a text file, not a binary file", binary);

  const text = decode(bytes);
  if (text === undefined) {
    const head = latin1(bytes.subarray(0, ISO_14976_IDENTIFIER.length));
    if (head === ISO_14976_IDENTIFIER) return latin1(bytes);
    const offset = firstInvalidByte(bytes);
    const line = bytes.subarray(0, offset).reduce((n, byte) => n + (byte === 0x0a ? 1 : 0), 1);
    const hex = bytes[offset].toString(16).toUpperCase();
    throw fail("its text must be saved as UTF-8", `byte 0x${hex} at offset ${offset}`, `:${line}`);
  }
  if (text.trim() === "") throw fail("it must not be empty", `${bytes.length} bytes without text`);
  return text;
}

function startsWith(bytes: Uint8Array, signature: readonly number[]): boolean {
  return signature.every((byte, i) => bytes[i] === byte);
}

function binaryKind(bytes: Uint8Array): string | undefined {
  if (startsWith(bytes, ZIP_SIGNATURE)) {
    const head = latin1(bytes.subarray(0, 4096));
    return /\[Content_Types\]\.xml|xl\//.test(head) ? "an Excel workbook (xlsx)" : "a zip archive";
  }
  const known = SIGNATURES.find(([, signature]) => startsWith(bytes, signature));
  if (known !== undefined) return known[0];
  const nul = bytes.indexOf(0);
  return nul < 0 ? undefined : `a binary file (NUL byte at offset ${nul})`;
}

function latin1(bytes: Uint8Array): string {
  return new TextDecoder("windows-1252").decode(bytes);
}

function decode(bytes: Uint8Array, stream = false): string | undefined {
  try {
    return new TextDecoder("utf-8", { fatal: true }).decode(bytes, { stream });
  } catch {
    return undefined;
  }
}

/** Bisection works because a prefix, read as the start of a stream, stays invalid however it goes on. */
function firstInvalidByte(bytes: Uint8Array): number {
  let valid = 0;
  let invalid = bytes.length + 1;
  while (invalid - valid > 1) {
    const middle = (valid + invalid) >> 1;
    if (decode(bytes.subarray(0, middle), true) === undefined) invalid = middle;
    else valid = middle;
  }
  // The valid stream may end inside a character: that character's first byte is the culprit.
  while (decode(bytes.subarray(0, valid)) === undefined) valid--;
  return valid;
}

const DECIMAL = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;

/** What {@link numberRule} says of an empty cell or line. */
export const MUST_NOT_BE_EMPTY = "must not be empty";

/** What {@link numberRule} says of words. */
export const MUST_BE_DECIMAL = "must be a decimal number";

/**
 * The rule that a text breaks as a number, or `undefined` when it is a finite decimal number that `Number()` reads.
 *
 * @param text A cell or line without surrounding blanks.
 * @returns A rule beginning with "must", or `undefined`.
 */
export function numberRule(text: string): string | undefined {
  if (DECIMAL.test(text)) return Number.isFinite(Number(text)) ? undefined : "must be finite";
  if (text === "") return MUST_NOT_BE_EMPTY;
  if (/^[+-]?(nan|inf|infinity)$/i.test(text)) return "must be finite";
  if (/^[+-]?0x/i.test(text)) return "must be a decimal number, not a hexadecimal one";
  if (/^[+-]?\d*,\d+(e[+-]?\d+)?$/i.test(text)) {
    return "must have a decimal point, as decimal commas must become points";
  }
  return MUST_BE_DECIMAL;
}
