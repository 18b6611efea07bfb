import { parse } from "csv-parse/sync";
import { cannot, InputError, suggest } from "../base/mod.ts";
import { headLines, headReader, keyLine, type ProblemList, problemList, type RegionFacts } from "./head.ts";
import {
  ascending,
  energyKindOf,
  firstOutOfOrder,
  MAX_POINTS,
  type SpectrumFile,
  type SpectrumRegion,
} from "./region.ts";
import { MUST_BE_DECIMAL, MUST_NOT_BE_EMPTY, numberRule } from "./text.ts";

/** Fewest data rows of a spectrum. */
const MIN_ROWS = 5;

/** Name of the energy column by kind. */
const ENERGY_NAMES: Readonly<Record<SpectrumRegion["energyKind"], string>> = {
  kinetic: "kinetic_energy_ev",
  binding: "binding_energy_ev",
  unknown: "energy_ev",
};
const COUNTS_NAME = "counts";

/** How {@link readSpectrumCsv} finds its columns. */
export interface CsvOptions {
  /**
   * Names of the energy and the counts column, in this order; upper and lower case are the same.
   * Default: `kinetic_energy_ev`, `binding_energy_ev` or `energy_ev` (kind not stated), and `counts`.
   */
  readonly columns?: readonly [string, string];
}

/**
 * Reads a spectrum from CSV text: `# key: value` lines, one header row, then rows of numbers separated by commas
 * (or by the semicolons or tabs of the header row).
 *
 * Keys that fill fields: `photon_energy_ev`, `bias_v`, `analyzer_work_function_ev`, `pass_energy_ev`, `dwell_s`,
 * `sweeps`, `region`, `species`, and `as_recorded` (true or false, by default true when there is a bias: see
 * `SpectrumRegion.asRecorded`). Other keys go to `metadata`; `#` lines without a key, and what follows `##`, to
 * `comments`. Further columns are kept when every cell is a number or empty, else left out. Energies may descend; there
 * are 5 to 1 000 000 rows.
 *
 * @param text The decoded file.
 * @param fileName Name for messages.
 * @param options Which columns to take.
 * @returns One region.
 * @throws {InputError} If a rule is broken; up to ten problems with file and line.
 * @example
 * ```ts
 * import { readSpectrumCsv } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const text = "# bias_v: -9\nkinetic_energy_ev,counts\n5.0,3\n5.1,4\n5.2,9\n5.3,8\n5.4,7\n";
 * const [region] = readSpectrumCsv(text, "edge.csv").regions;
 * assert.equal(region.biasV, -9);
 * assert.deepEqual([...region.counts], [3, 4, 9, 8, 7]);
 * ```
 */
export function readSpectrumCsv(text: string, fileName: string, options: CsvOptions = {}): SpectrumFile {
  const problems = problemList(fileName);
  refuseTooManyRows(text, fileName);
  const { table, facts } = splitHead(text, problems);
  const delimiter = delimiterOf(table);

  let header: Header | undefined;
  let cells: number[][] = [];
  const rowLines: number[] = [];
  const wordColumns = new Set<number>();
  let isFirstRow = true;

  const takeRow = (row: readonly string[], line: number) => {
    if (header === undefined) {
      header = readHeader(row, line, fileName, options);
      cells = header.names.map(() => []);
      return;
    }
    const { names, energy, counts } = header;
    const isSecondHeader = isFirstRow && isWords(row);
    isFirstRow = false;
    if (isSecondHeader) {
      problems.add(
        line,
        "read the table",
        "there must be one header row, with numbers right below it",
        row.join(delimiter),
      );
      return;
    }
    if (row.length !== names.length) {
      const hint = delimiter === "," && row.length > names.length
        ? ", and decimal commas must become points"
        : "";
      const rule = `every row must have ${names.length} cells like the header${hint}`;
      problems.add(line, "read the row", rule, `${row.length} cells: ${row.join(delimiter)}`);
      return;
    }
    rowLines.push(line);
    row.forEach((cell, column) => {
      const rule = numberRule(cell);
      cells[column].push(rule === undefined ? Number(cell) : NaN);
      if (column !== energy && column !== counts) {
        if (rule !== undefined && rule !== MUST_NOT_BE_EMPTY) wordColumns.add(column);
        return;
      }
      const action = `read column "${names[column]}"`;
      if (rule !== undefined) {
        const mixed = cell.includes(";") ? `${rule}, and decimal commas must become points` : rule;
        problems.add(line, action, `a cell ${mixed}`, cell);
      } else if (column === counts && Number(cell) < 0) {
        problems.add(line, action, "counts must be >= 0", Number(cell));
      }
    });
  };
  try {
    parse(table, {
      delimiter,
      record_delimiter: "\n",
      relax_column_count: true,
      skip_empty_lines: true,
      trim: true,
      // Rows are converted one by one and not kept, so that a million of them fit.
      on_record: (row: string[], context: { lines: number }) => {
        takeRow(row, context.lines);
        return null;
      },
    });
  } catch (error) {
    if (error instanceof InputError || !(error instanceof Error && "code" in error && "lines" in error)) {
      throw error;
    }
    problems.add(
      Number(error.lines),
      "read the table",
      "quotes must come in pairs around whole cells",
      String(error.code),
    );
    problems.throwIfAny();
  }
  if (header === undefined) {
    throw new InputError([{ place: fileName, message: cannot("read the table", headerRule(), "no rows") }]);
  }

  const { names, energy, counts } = header;
  if (rowLines.length < MIN_ROWS) {
    problems.add(0, "read the table", `there must be at least ${MIN_ROWS} rows of numbers`, rowLines.length);
  }
  const energies = cells[energy];
  const wrong = energies.some(Number.isNaN) ? -1 : firstOutOfOrder(energies);
  if (wrong >= 0) {
    const rule = energies[wrong] === energies[wrong - 1]
      ? "energies must not be repeated"
      : "energies must be sorted, all ascending or all descending";
    const value = `${energies[wrong]} after ${energies[wrong - 1]}`;
    problems.add(rowLines[wrong], `read column "${names[energy]}"`, rule, value);
  }
  problems.throwIfAny();

  const isDescending = energies[0] > energies[1];
  const column = (i: number) => ascending(Float64Array.from(cells[i]), isDescending);
  const kept = names.flatMap((name, i) =>
    i === energy || i === counts || wordColumns.has(i) ? [] : [[name, column(i)] as const]
  );
  const energyName = names[energy].toLowerCase();
  const labels = {
    ...(Object.values(ENERGY_NAMES).includes(energyName) ? {} : { "abscissa label": names[energy] }),
    ...(names[counts].toLowerCase() === COUNTS_NAME ? {} : { "counts label": names[counts] }),
  };
  return {
    format: "csv",
    regions: [{
      ...facts,
      metadata: { ...labels, ...facts.metadata },
      energyKind: /^(kinetic|binding)/.test(energyName) ? energyKindOf(energyName) : "unknown",
      energiesEv: column(energy),
      counts: column(counts),
      columns: Object.fromEntries(kept),
    }],
  };
}

/** Counts before anything is copied, and stops at the limit: a huge file costs neither time nor memory. */
function refuseTooManyRows(text: string, fileName: string): void {
  const lineEnd = text.includes("\n") ? "\n" : "\r";
  let rows = 0;
  let line = 1;
  for (let start = 0; start >= 0 && start < text.length; line++) {
    if (!"#\r\n".includes(text[start])) rows++;
    if (rows > MAX_POINTS + 1) {
      const message = cannot(
        "read the table",
        `there must be at most ${MAX_POINTS} rows of numbers`,
        `more than ${MAX_POINTS}`,
      );
      throw new InputError([{ place: `${fileName}:${line}`, message }]);
    }
    const end = text.indexOf(lineEnd, start);
    start = end < 0 ? -1 : end + 1;
  }
}

/** What the `#` lines say, and the text with these lines blanked, so that line numbers stay. */
function splitHead(text: string, problems: ProblemList): { table: string; facts: RegionFacts } {
  const head = headReader(problems);
  const lines = text.split(/\r\n|\n|\r/);
  lines.forEach((line, index) => {
    if (head.take(line, index + 1)) lines[index] = "";
  });
  return { table: lines.join("\n"), facts: head.facts() };
}

function delimiterOf(table: string): string {
  const firstRow = /\S[^\n]*/.exec(table)?.[0].replace(/"[^"]*"/g, "") ?? "";
  return [",", ";", "\t"].find((delimiter) => firstRow.includes(delimiter)) ?? ",";
}

function isWords(row: readonly string[]): boolean {
  const rules = row.map(numberRule);
  return rules.includes(MUST_BE_DECIMAL) &&
    rules.every((rule) => rule === MUST_BE_DECIMAL || rule === MUST_NOT_BE_EMPTY);
}

interface Header {
  readonly names: readonly string[];
  /** Index of the energy column. */
  readonly energy: number;
  /** Index of the counts column. */
  readonly counts: number;
}

function headerRule(): string {
  const names = Object.values(ENERGY_NAMES).join(" or ");
  return `there must be a header row with the columns ${names}, and ${COUNTS_NAME} ` +
    "(or others named by --columns ENERGY,COUNTS)";
}

function readHeader(row: readonly string[], line: number, fileName: string, options: CsvOptions): Header {
  const fail = (rule: string, value: unknown) =>
    new InputError([{ place: `${fileName}:${line}`, message: cannot("read the header row", rule, value) }]);
  if (row.every((cell) => /^[+-]?\.?\d[\d.,;eE+-]*$/.test(cell))) throw fail(headerRule(), row.join(","));
  if (row.length < 2) {
    throw fail("there must be at least two columns, separated by comma, semicolon or tab", row[0]);
  }

  const lower = row.map((name) => name.toLowerCase());
  const repeated = row.find((_, i) => lower.indexOf(lower[i]) !== i);
  if (repeated !== undefined) throw fail("every column must have its own name", repeated);
  if (row.includes("")) throw fail("every column must have a name", row.join(","));

  if (options.columns !== undefined) {
    const [energy, counts] = options.columns.map((name) => {
      const index = lower.indexOf(name.toLowerCase());
      if (index >= 0) return index;
      const near = suggest(name, row);
      const hint = near === undefined ? "" : `, perhaps "${near}"`;
      throw fail(`--columns must name columns of the file (${row.join(", ")})${hint}`, name);
    });
    if (energy === counts) throw fail("--columns must name two different columns", options.columns.join(","));
    return { names: row, energy, counts };
  }
  const energyNames = Object.values(ENERGY_NAMES).filter((name) => lower.includes(name));
  if (energyNames.length > 1) {
    throw fail("--columns must say which energy column to take", energyNames.join(","));
  }
  const counts = lower.indexOf(COUNTS_NAME);
  if (energyNames.length === 0 || counts < 0) throw fail(headerRule(), row.join(","));
  return { names: row, energy: lower.indexOf(energyNames[0]), counts };
}

/** A named column for {@link writeSpectrumCsv}. */
export interface CsvColumn {
  /** Header cell: not blank, without line breaks. */
  readonly name: string;
  /** Finite numbers, as many as in the other columns. */
  readonly values: ArrayLike<number>;
  /** `true` when NaN stands for a number that is not known and becomes an empty cell. Default: false. */
  readonly mayBeUnknown?: boolean;
}

/**
 * Writes the CSV that {@link readSpectrumCsv} reads: `# key: value` lines, a header row, rows of numbers with the
 * fewest digits that read back the same. Blanks around keys and values are not kept by the reader.
 *
 * @param metadata Keys and values in order; no line breaks, no colon in a key.
 * @param columns At least one column.
 * @returns The text, each line ended by a line feed.
 * @throws {RangeError} If a key, value, name or number cannot be read back.
 * @example
 * ```ts
 * import { writeSpectrumCsv } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const text = writeSpectrumCsv([["bias_v", "-9"]], [{ name: "kinetic_energy_ev", values: [5, 5.1] }]);
 * assert.equal(text, "# bias_v: -9\nkinetic_energy_ev\n5\n5.1\n");
 * ```
 */
export function writeSpectrumCsv(
  metadata: readonly (readonly [string, string])[],
  columns: readonly CsvColumn[],
): string {
  refuseNames("metadata key", metadata.map(([key]) => key), /[:\r\n]/);
  refuseNames("column name", columns.map(({ name }) => name), /[\r\n]/);
  const head = metadata.map(([key, value]) => {
    if (/[\r\n]/.test(value)) {
      throw new RangeError(cannot(`write "${key}"`, "its value must be one line", value));
    }
    return keyLine(key, value);
  });
  const rowCount = columns[0].values.length;
  for (const { name, values, mayBeUnknown = false } of columns) {
    if (values.length !== rowCount) {
      throw new RangeError(
        cannot(`write column "${name}"`, `it must have ${rowCount} values`, values.length),
      );
    }
    const wrong = Array.from(values).findIndex((value) =>
      !Number.isFinite(value) && !(mayBeUnknown && Number.isNaN(value))
    );
    if (wrong >= 0) {
      throw new RangeError(cannot(`write column "${name}"`, `value ${wrong} must be finite`, values[wrong]));
    }
  }
  const rows = Array.from(
    { length: rowCount },
    (_, i) => columns.map(({ values }) => Number.isNaN(values[i]) ? "" : String(values[i])).join(","),
  );
  return [...head, columns.map(({ name }) => quoted(name)).join(","), ...rows, ""].join("\n");
}

/**
 * Writes a region as CSV so that {@link readSpectrumCsv} gives the same back.
 *
 * @param region The region, of at least 5 points.
 * @returns The text.
 * @throws {RangeError} If CSV cannot hold it, such as two columns of one name.
 */
export function writeRegionCsv(region: SpectrumRegion): string {
  const head = headLines(region);
  const broken = head.find((line) => /[\r\n]/.test(line));
  if (broken !== undefined) throw new RangeError(cannot("write the file", "texts must be one line", broken));
  const table = writeSpectrumCsv([], [
    { name: ENERGY_NAMES[region.energyKind], values: region.energiesEv },
    { name: COUNTS_NAME, values: region.counts },
    ...Object.entries(region.columns).map(([name, values]) => ({ name, values, mayBeUnknown: true })),
  ]);
  return [...head, table].join("\n");
}

function refuseNames(what: string, names: readonly string[], forbidden: RegExp): void {
  const lower = names.map((name) => name.toLowerCase());
  names.forEach((name, i) => {
    if (name.trim() === "" || name !== name.trim() || forbidden.test(name) || lower.indexOf(lower[i]) !== i) {
      const rule = `a ${what} must be unique and one line without surrounding blanks${
        forbidden.test(":") ? " or colons" : ""
      }`;
      throw new RangeError(cannot("write the table", rule, name));
    }
  });
}

/** RFC 4180, section 2; also for the characters that this reader takes for a delimiter or a comment. */
function quoted(name: string): string {
  return /[",;\t#]/.test(name) ? `"${name.replaceAll('"', '""')}"` : name;
}
