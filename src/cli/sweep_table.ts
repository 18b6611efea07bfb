import { join } from "node:path";
import { type FigurePoint, renderSvg, sweepFigure, type SweepFigureAxis } from "../report/mod.ts";
import {
  csvLine,
  type JsonValue,
  planPoint,
  type PointRecord,
  type SweepAxis,
  sweepPoints,
  tableColumns,
  uncertaintyName,
} from "../sweep/mod.ts";
import { readRecords, type SweepSource, writeWhole } from "./sweep_folder.ts";

/** How far a sweep is. */
export interface SweepStatus {
  /** Title of the sweep. */
  readonly title: string;
  /** Points of the sweep. */
  readonly points: number;
  /** Points with a result. */
  readonly done: number;
  /** Points that failed. */
  readonly failed: number;
  /** Points not run yet. */
  readonly missing: number;
  /** Damaged lines in the record files; their points count as not run. */
  readonly damagedLines: number;
  /** Reasons of failed points with their number, the commonest first. */
  readonly reasons: readonly { readonly reason: string; readonly points: number }[];
}

/** Points of a figure; more would merge. */
const MOST_DRAWN = 40_000;
/** Lines of the table written at a time. */
const CHUNK_LINES = 1000;

/**
 * Joins the records of a folder with the points of its sweep, in the order of the points.
 *
 * @param folder The folder.
 * @param source Its sweep.
 * @param eachPoint Called for every point.
 * @returns How far the sweep is.
 */
async function visitPoints(
  folder: string,
  { sweep, load }: SweepSource,
  eachPoint: (
    index: number,
    settings: Readonly<Record<string, JsonValue>>,
    record: PointRecord | null,
  ) => unknown,
): Promise<SweepStatus> {
  const wanted = new Set(tableColumns(sweep).map(({ name }) => name));
  const records = new Map<string, PointRecord>();
  let damagedLines = 0;
  for await (const record of readRecords(folder)) {
    if (record === null) damagedLines++;
    else if (records.get(record.id)?.status !== "done") {
      const values = Object.fromEntries(Object.entries(record.values).filter(([name]) => wanted.has(name)));
      records.set(record.id, { ...record, settings: {}, values });
    }
  }
  const points = sweepPoints(sweep);
  const reasons = new Map<string, number>();
  const counts = { done: 0, failed: 0, missing: 0 };
  const resolve = async (overrides: readonly string[]) => (await load(overrides)).resolved;
  for (let index = 0; index < points.count; index++) {
    const settings = points.at(index);
    const record = records.get((await planPoint(sweep, index, settings, resolve)).id) ?? null;
    counts[record?.status ?? "missing"]++;
    if (record?.status === "failed") reasons.set(record.reason, (reasons.get(record.reason) ?? 0) + 1);
    await eachPoint(index, settings, record);
  }
  return {
    title: sweep.title,
    points: points.count,
    ...counts,
    damagedLines,
    reasons: [...reasons].toSorted(([, a], [, b]) => b - a).map(([reason, points]) => ({ reason, points })),
  };
}

/**
 * How far the sweep in a folder is.
 *
 * @param folder The folder.
 * @param source Its sweep.
 * @returns The status.
 */
export function sweepStatus(folder: string, source: SweepSource): Promise<SweepStatus> {
  return visitPoints(folder, source, () => {});
}

/**
 * Writes `table.csv`, one row a point in the order of the points, and `figure.svg` where one can be drawn. The bytes depend
 * on the results alone, not on how they were computed.
 *
 * @param folder The folder.
 * @param source Its sweep.
 * @returns How far the sweep is, and the files written.
 */
export async function collectSweep(
  folder: string,
  source: SweepSource,
): Promise<{ readonly status: SweepStatus; readonly written: readonly string[] }> {
  const { sweep } = source;
  const columns = tableColumns(sweep);
  const drawn = sweep.record.values[0];
  const uncertainty = uncertaintyName(drawn);
  const points = sweepPoints(sweep);
  const figurePoints: FigurePoint[] = [];
  const table = join(folder, "table.csv");
  let status: SweepStatus | undefined;
  await writeWhole(table, async (write) => {
    let lines = [csvLine(columns.map(({ name }) => name))];
    status = await visitPoints(folder, source, async (index, settings, record) => {
      lines.push(csvLine(columns.map(({ cell }) => cell(index, settings, record))));
      if (lines.length >= CHUNK_LINES) {
        await write(lines.join(""));
        lines = [];
      }
      if (points.count > MOST_DRAWN) return;
      const number = (name: string | null): number | null => {
        const value = name === null ? null : record?.values[name];
        return typeof value === "number" ? value : null;
      };
      figurePoints.push({ settings, value: number(drawn), standardUncertainty: number(uncertainty) });
    });
    await write(lines.join(""));
  });
  if (status === undefined) throw new Error("The table was not written");
  // An axis of one value is a fixed setting, and what advances together is drawn along its first path.
  const axes = sweep.axes.filter((axis) => axis.kind !== "list" || axis.values.length > 1);
  const figure = sweepFigure({
    title: sweep.title,
    subtitle: [`simulated, ${status.done} of ${status.points} points`],
    axes: axes.flatMap(drawnAxes),
    isGrid: axes.every(({ kind }) => kind !== "sample"),
    quantity: drawn,
    points: figurePoints,
  });
  if (figure === null) return { status, written: [table] };
  const drawing = join(folder, "figure.svg");
  await writeWhole(drawing, await renderSvg(figure));
  return { status, written: [table, drawing] };
}

function drawnAxes(axis: SweepAxis): SweepFigureAxis[] {
  const drawn = axis.kind === "sample" ? axis.axes : axis.kind === "zip" ? [axis.axes[0]] : [axis];
  return drawn.map((one) => ({ path: one.path, isLogarithmic: "scale" in one && one.scale === "log" }));
}

/**
 * A status as text.
 *
 * @param status The status.
 * @returns Lines.
 */
export function statusText(status: SweepStatus): string {
  const { title, points, done, failed, missing, damagedLines, reasons } = status;
  return [
    `${title}: ${points} points, ${done} done, ${failed} failed, ${missing} not run`,
    ...(damagedLines > 0
      ? [`  ${damagedLines} damaged lines in the record files; their points count as not run`]
      : []),
    ...reasons.slice(0, 5).map(({ reason, points }) =>
      `  ${points} failed: ${reason.replaceAll("\n", "; ")}`
    ),
    ...(reasons.length > 5 ? [`  and ${reasons.length - 5} more reasons, see table.csv`] : []),
    "",
  ].join("\n");
}
