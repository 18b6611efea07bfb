import { cannot, InputError, type Problem, suggest } from "../base/mod.ts";
import { decimal } from "./flags.ts";

/** A table of numbers with named columns and the `# key: value` lines above it. */
export interface NumberTable {
  /** Columns by name, all of one length. */
  readonly columns: Readonly<Record<string, readonly number[]>>;
  /** Values by key. */
  readonly keys: Readonly<Record<string, string>>;
}

/** What a table must and may hold. */
export interface TableRules {
  /** Columns; every one must be there. */
  readonly columns: readonly string[];
  /** Keys that may be there; others are refused, as a misspelled one would be lost. */
  readonly keys: readonly string[];
}

/**
 * Reads a table of numbers strictly: every cell a decimal number, no column or key that is not known.
 *
 * @param text Contents of the file; cells are separated by the comma, semicolon or tab of the header row.
 * @param file Name for messages.
 * @param rules What it must and may hold.
 * @returns Columns and keys.
 * @throws {InputError} With file and line of everything wrong.
 */
export function readNumberTable(text: string, file: string, rules: TableRules): NumberTable {
  const problems: Problem[] = [];
  const note = (line: number, action: string, rule: string, value: unknown): void => {
    problems.push({ place: `${file}:${line}`, message: cannot(action, rule, value) });
  };
  const known = (list: readonly string[], word: string): string => {
    const near = suggest(word, list);
    if (list.length === 0) return "there must be none";
    return `it must be one of ${list.join(", ")}${near ? ` (did you mean ${near}?)` : ""}`;
  };
  const keys: Record<string, string> = {};
  const columns: Record<string, number[]> = {};
  let names: string[] = [];
  let delimiter = ",";
  text.split(/\r\n|\n|\r/).forEach((raw, index) => {
    const line = index + 1;
    const content = raw.trim();
    if (content === "") return;
    if (content.startsWith("#")) {
      const [, key, value] = /^#\s*([^:]+?)\s*:\s*(.*)$/.exec(content) ?? [];
      if (key === undefined) return;
      if (!rules.keys.includes(key)) note(line, "read the key", known(rules.keys, key), key);
      else if (Object.hasOwn(keys, key)) note(line, "read the key", "every key must be given once", key);
      else keys[key] = value;
      return;
    }
    if (names.length === 0) {
      delimiter = [",", ";", "\t"].find((mark) => content.includes(mark)) ?? ",";
      names = content.split(delimiter).map((name) => name.trim());
      for (const name of names) {
        if (!rules.columns.includes(name)) note(line, "read the column", known(rules.columns, name), name);
        else if (Object.hasOwn(columns, name)) {
          note(line, "read the column", "every column must be given once", name);
        } else columns[name] = [];
      }
      for (const name of rules.columns) {
        if (!names.includes(name)) {
          note(line, "read the header row", `there must be a column ${name}`, content);
        }
      }
      return;
    }
    const cells = content.split(delimiter).map((cell) => cell.trim());
    if (cells.length !== names.length) {
      return note(line, "read the row", `it must have ${names.length} cells like the header`, content);
    }
    cells.forEach((cell, i) => {
      try {
        columns[names[i]]?.push(decimal(cell));
      } catch (error) {
        if (!(error instanceof SyntaxError)) throw error;
        note(line, `read column ${names[i]}`, "a cell must be a decimal number with a point", cell);
      }
    });
  });
  if (names.length === 0) {
    note(1, "read the table", `there must be a header row ${rules.columns.join(",")}`, "none");
  } else if (problems.length === 0 && columns[names[0]].length === 0) {
    note(1, "read the table", "there must be rows of numbers", 0);
  }
  if (problems.length > 10) {
    problems.splice(10, Infinity, { place: file, message: `and ${problems.length - 10} more` });
  }
  if (problems.length > 0) throw new InputError(problems);
  return { columns, keys };
}

/**
 * A number among the keys of a table.
 *
 * @param table The table.
 * @param key The key.
 * @param file Name for messages.
 * @returns The number, or null when the key is not there.
 * @throws {InputError} If it is no number.
 */
export function keyNumber({ keys }: NumberTable, key: string, file: string): number | null {
  if (!Object.hasOwn(keys, key)) return null;
  try {
    return decimal(keys[key]);
  } catch (error) {
    if (!(error instanceof SyntaxError)) throw error;
    throw new InputError([{
      place: file,
      message: cannot(`read the key ${key}`, "it must be a decimal number", keys[key]),
    }]);
  }
}

/**
 * Runs a computation on what a file holds; a number out of range is then the file's fault.
 *
 * @param file The file.
 * @param compute The computation.
 * @returns What it returns.
 * @throws {InputError} Instead of a RangeError.
 */
export function blamingFile<T>(file: string, compute: () => T): T {
  try {
    return compute();
  } catch (error) {
    if (!(error instanceof RangeError)) throw error;
    throw new InputError([{ place: file, message: error.message }]);
  }
}
