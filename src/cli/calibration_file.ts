import { parse } from "csv-parse/sync";
import { cannot, InputError } from "../base/mod.ts";
import { calibrateScale, type ReferenceLine, type ScaleCalibration } from "../edges/mod.ts";
import { decodeText } from "../formats/mod.ts";
import { readBytes } from "./files.ts";
import { decimal } from "./flags.ts";

const COLUMNS = ["reference_ev", "measured_ev", "standard_uncertainty_ev"] as const;

/**
 * Reads reference lines: CSV with columns `reference_ev`, `measured_ev`, and `standard_uncertainty_ev` where known; other
 * columns, such as the name of the line, are left alone, and lines with `#` are comments.
 *
 * @param path The file.
 * @returns The calibration.
 * @throws {InputError} If the file breaks a rule.
 */
export async function readCalibration(path: string): Promise<ScaleCalibration> {
  const refuse = (rule: string, value: unknown, line?: number): never => {
    const place = line === undefined ? path : `${path}:${line}`;
    throw new InputError([{ place, message: cannot("read calibration", rule, value) }]);
  };
  const text = decodeText(await readBytes(path), path);
  let records: { record: Record<string, string>; info: { lines: number } }[] = [];
  try {
    records = parse(text, { columns: true, comment: "#", trim: true, skip_empty_lines: true, info: true });
  } catch (error) {
    refuse("it must be CSV with a header row", (error as Error).message);
  }
  const lines = records.map(({ record, info }): ReferenceLine => {
    const [referenceEv, measuredEv, uncertainty] = COLUMNS.map((name) => {
      const cell = record[name];
      if (cell === undefined && name === "standard_uncertainty_ev") return undefined;
      if (cell === undefined) {
        return refuse(`it must have columns ${COLUMNS.join(", ")}`, Object.keys(record).join(", "));
      }
      try {
        return decimal(cell);
      } catch {
        return refuse(`${name} must be a decimal number`, cell, info.lines);
      }
    });
    if (uncertainty === undefined) return { referenceEv: referenceEv!, measuredEv: measuredEv! };
    if (!(uncertainty > 0)) return refuse("standard_uncertainty_ev must be > 0 eV", uncertainty, info.lines);
    return { referenceEv: referenceEv!, measuredEv: measuredEv!, standardUncertaintyEv: uncertainty };
  });
  try {
    return calibrateScale(lines);
  } catch (error) {
    if (!(error instanceof RangeError)) throw error;
    throw new InputError([{ place: path, message: error.message }]);
  }
}
