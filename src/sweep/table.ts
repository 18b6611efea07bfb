import { sweepPoints } from "./axes.ts";
import type { PointRecord } from "./record.ts";
import { uncertaintyName } from "./recorded.ts";
import type { JsonValue, Sweep } from "./types.ts";
import type { Settings } from "./axes.ts";

/** Columns of the table of a sweep: where each cell comes from. */
export interface TableColumn {
  /** Header; ends in the unit where the column has one. */
  readonly name: string;
  /** Cell of a point; null is an empty cell. A point without a record has not run yet. */
  readonly cell: (index: number, settings: Settings, record: PointRecord | null) => JsonValue;
}

/**
 * Columns of the one tidy table of a sweep: point, status, reason, identity and seeds, the settings by their scenario paths,
 * warnings, then the recorded values, each with its standard uncertainty where it has one, a verdict before fitted ones.
 *
 * @param sweep The sweep.
 * @returns The columns.
 */
export function tableColumns(sweep: Sweep): TableColumn[] {
  const fromRecord = (name: keyof PointRecord, missing: JsonValue): TableColumn => ({
    name,
    cell: (_i, _s, record) => (record === null ? missing : record[name]),
  });
  const { values } = sweep.record;
  const names = [
    "warnings",
    ...(values.some((name) => name.startsWith("fit.")) ? ["fit.verdict"] : []),
    ...values.flatMap((name) => {
      const uncertainty = uncertaintyName(name);
      return uncertainty === null ? [name] : [name, uncertainty];
    }),
  ];
  return [
    { name: "point", cell: (index) => index },
    fromRecord("status", "missing"),
    fromRecord("reason", ""),
    fromRecord("id", null),
    fromRecord("scenarioHash", null),
    fromRecord("seed", null),
    fromRecord("replicate", null),
    ...sweepPoints(sweep).paths.map((path): TableColumn => ({
      name: path,
      cell: (_i, settings) => settings[path],
    })),
    ...names.map((name): TableColumn => ({ name, cell: (_i, _s, record) => record?.values[name] ?? null })),
  ];
}

/**
 * One line of a CSV file (RFC 4180), with its end.
 *
 * @param cells Cells; null is empty, objects are written as JSON.
 * @returns The line.
 */
export function csvLine(cells: readonly JsonValue[]): string {
  return `${
    cells.map((cell) => {
      const text = cell === null ? "" : typeof cell === "object" ? JSON.stringify(cell) : String(cell);
      return /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
    }).join(",")
  }\n`;
}
