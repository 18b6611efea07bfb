import { cannot } from "../base/mod.ts";
import { keyLine } from "./head.ts";
import { PHOTON_TECHNIQUES, regularEnergiesEv, TECHNIQUES, UNKNOWN } from "./iso14976.ts";
import { energyKindOf, type SpectrumRegion } from "./region.ts";
import { ISO_14976_IDENTIFIER, numberRule } from "./text.ts";

/** How the standard writes a number that is not known. */
const UNKNOWN_TEXT = "1E37";

/** Photon energies below this are taken for ultraviolet when the technique is not known, eV. */
const ULTRAVIOLET_EV = 100;

const EXPERIMENT_TEXTS = ["institution", "instrument", "operator", "experiment"];

/**
 * Writes regions as the text of an ISO 14976 file, one block each, so that `readIso14976` gives the same back.
 *
 * The experiment mode is NORM; the scan mode is REGULAR when the energies of every region are equally spaced decimals,
 * else IRREGULAR. Metadata under the keys of `readIso14976` become items again; all others become comment lines
 * `# key: value`, which the reader knows. Numbers have the fewest digits that read back the same. Beyond the standard,
 * which has ASCII lines of up to 80 characters: text is not cut and keeps its characters (the file is to be UTF-8).
 *
 * Source: W. A. Dench, L. B. Hazell, M. P. Seah, Surf. Interface Anal. 13, 63 (1988); ISO 14976:1998.
 *
 * @param regions At least one region.
 * @returns The text, lines ended by CR LF.
 * @throws {RangeError} If the format cannot hold a value: text of several lines, an infinite number or 1E37 itself, or
 * two columns of one name.
 * @example A block ends with number of values, minimum, maximum, and the counts
 * ```ts
 * import { readSpectrumCsv, writeIso14976 } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const csv = "# region: edge\nkinetic_energy_ev,counts\n5.0,3\n5.1,4\n5.2,9\n5.3,8\n5.4,7\n";
 * const lines = writeIso14976(readSpectrumCsv(csv, "edge.csv").regions).split("\r\n");
 * assert.ok(lines.includes("edge"));
 * assert.deepEqual(lines.slice(-10, -2), ["5", "3", "9", "3", "4", "9", "8", "7"]);
 * ```
 */
export function writeIso14976(regions: readonly SpectrumRegion[]): string {
  if (regions.length === 0) throw new RangeError(cannot("write a file", "it must have a region", 0));
  const left = regions.map(({ metadata }) => new Map(Object.entries(metadata)));
  const variables = experimentalVariables(regions);
  const scans = regions.map(({ energiesEv }) => regularScan(energiesEv));
  const isRegular = scans.every((scan) => scan !== undefined);
  const comments = sharedComments(regions);
  const manual = shared(
    left,
    "manually entered items",
    (text) => text.split(" ").every((number) => isWrittenBack(number)),
  );
  const lines = [
    ISO_14976_IDENTIFIER,
    ...EXPERIMENT_TEXTS.map((key) => shared(left, key, (text) => text !== "") ?? ""),
    comments.length,
    ...comments.map(commentLine),
    "NORM",
    isRegular ? "REGULAR" : "IRREGULAR",
    new Set(regions.map(({ label }) => label)).size,
    variables.length,
    ...variables.flatMap(({ label, units }) => [label, units]),
    0, // entries in the inclusion or exclusion list
    ...(manual === undefined ? [0] : [manual.split(" ").length, ...manual.split(" ")]),
    0, // future upgrade experiment entries
    0, // future upgrade block entries
    regions.length,
    ...regions.flatMap((region, i) =>
      blockLines(
        { ...region, comments: region.comments.slice(comments.length) },
        left[i],
        variables,
        isRegular ? scans[i] : undefined,
      )
    ),
    "end of experiment",
  ];
  return lines.map((line) => `${oneLine(String(line))}\r\n`).join("");
}

type Line = string | number;

interface Variable {
  readonly label: string;
  readonly units: string;
}

interface Scan {
  readonly startEv: number;
  readonly incrementEv: number;
}

function blockLines(
  region: SpectrumRegion,
  left: Map<string, string>,
  variables: readonly Variable[],
  scan: Scan | undefined,
): Line[] {
  /** The text of an item, taken out of what is left. */
  const text = (key: string, fallback = "", isFit: (value: string) => boolean = () => true): string => {
    const value = left.get(key);
    if (value === undefined || value === "" || !isFit(value)) return fallback;
    left.delete(key);
    return value;
  };
  /** The number of an item, taken out of what is left. */
  const number = (key: string, units = ""): string => {
    const quantity = quantityOf(left.get(key));
    if (quantity === undefined || quantity.units !== units) return UNKNOWN_TEXT;
    left.delete(key);
    return quantity.number;
  };
  const numbers = (units: string, ...keys: string[]) => keys.map((key) => number(key, units));
  /** The same for an item where 0 means that it is not known. */
  const positive = (key: string, units = ""): string =>
    Number(quantityOf(left.get(key))?.number) > 0 ? number(key, units) : UNKNOWN_TEXT;

  const { photonEnergyEv, passEnergyEv } = region;
  const sample = text("sample");
  const date = dateLines(left);
  const technique = text(
    "technique",
    photonEnergyEv === null || photonEnergyEv < ULTRAVIOLET_EV ? "UPS" : "XPS",
    (name) => (photonEnergyEv === null ? TECHNIQUES : PHOTON_TECHNIQUES).includes(name),
  );
  const isPhotonSource = PHOTON_TECHNIQUES.includes(technique);
  const transition = text(
    "transition or charge state label",
    "",
    (label) => region.species === label || region.species.endsWith(` ${label}`),
  );
  const parameters = quantitiesUnder("parameter ", left);
  const source = [
    ...variables.map(({ label, units }) => number(`experimental variable ${label}`, units)),
    text("source label"),
    isPhotonSource ? known(photonEnergyEv) : positive("source energy", "eV"),
    number("source strength"),
    ...numbers("um", "source beam width x", "source beam width y"),
    ...numbers("degree", "source polar angle of incidence", "source azimuth"),
  ];
  const isFixed = (mode: string): boolean => mode.toUpperCase() === "FAT";
  const mode = passEnergyEv === null ? text("analyzer mode") : text("analyzer mode", "FAT", isFixed);
  const analyzer = [
    mode,
    isFixed(mode) ? known(passEnergyEv) : positive("analyzer pass energy or retard ratio"),
    ...(technique === "AES diff" ? [number("differential width", "eV")] : []),
    number("magnification of analyzer transfer lens"),
    known(region.analyzerWorkFunctionEv),
    known(region.biasV),
    ...numbers("um", "analysis width x", "analysis width y"),
    ...numbers("degree", "analyzer axis take-off polar angle", "analyzer axis take-off azimuth"),
    region.species.slice(0, region.species.length - transition.length).trimEnd(),
    transition,
    text("charge of detected particle", "-1", isWrittenBack),
  ];
  const energyLabel = text(
    "abscissa label",
    region.energyKind === "unknown" ? "energy" : `${region.energyKind} energy`,
    (label) => energyKindOf(label) === region.energyKind,
  );
  const countsLabel = text(
    "counts label",
    "counts",
    (label) => label !== energyLabel && !Object.hasOwn(region.columns, label),
  );
  const columns = [
    ...(scan === undefined ? [{ label: energyLabel, units: "eV", values: region.energiesEv }] : []),
    { label: countsLabel, units: text("counts units", "d"), values: region.counts },
    ...Object.entries(region.columns).map(([label, values]) => ({
      label,
      units: text(`units of column ${label}`, "d"),
      values,
    })),
  ];
  const labels = columns.map(({ label }) => label);
  const repeated = labels.find((label, i) => labels.indexOf(label) !== i);
  if (repeated !== undefined) {
    throw new RangeError(cannot("write the file", "every column must have its own name", repeated));
  }
  const signal = [
    text("signal mode", "pulse counting"),
    known(region.dwellS),
    known(region.sweeps),
    number("signal time correction", "s"),
    ...numbers("degree", "tilt polar angle", "tilt azimuth", "sample rotation angle"),
  ];
  // What no item took is left for comments.
  const comments = [
    ...region.comments.map(commentLine),
    ...(region.asRecorded ? [keyLine("as_recorded", "true")] : []),
    ...Array.from(left, ([key, value]) => keyLine(key, value)),
  ];
  return [
    region.label,
    sample,
    ...date,
    comments.length,
    ...comments,
    technique,
    ...source,
    ...analyzer,
    ...(scan === undefined ? [] : [energyLabel, "eV", scan.startEv, scan.incrementEv]),
    columns.length,
    ...columns.flatMap(({ label, units }) => [label, units]),
    ...signal,
    parameters.length,
    ...parameters.flatMap(({ label, units, number }) => [label, units, number]),
    columns.length * region.counts.length,
    ...columns.flatMap(({ values }) => extremes(values)),
    ...Array.from(region.counts).flatMap((_, i) => columns.map(({ values }) => ordinate(values[i]))),
  ];
}

/** A comment in a form that the reader does not take for `# key: value`. */
function commentLine(comment: string): string {
  return comment.startsWith("#") ? `## ${comment}` : comment;
}

/** Comments that all of several regions begin with belong to the experiment. */
function sharedComments(regions: readonly SpectrumRegion[]): readonly string[] {
  if (regions.length === 1) return [];
  const [{ comments }] = regions;
  const end = comments.findIndex((comment, i) => regions.some((region) => region.comments[i] !== comment));
  return end < 0 ? comments : comments.slice(0, end);
}

/** The value that all regions give to a key, taken out of what is left, or undefined. */
function shared(
  left: readonly Map<string, string>[],
  key: string,
  isFit: (value: string) => boolean,
): string | undefined {
  const value = left[0].get(key);
  if (value === undefined || !isFit(value) || left.some((map) => map.get(key) !== value)) return undefined;
  left.forEach((map) => map.delete(key));
  return value;
}

const VARIABLE = "experimental variable ";

function experimentalVariables(regions: readonly SpectrumRegion[]): Variable[] {
  const found = new Map<string, Variable>();
  for (const { metadata } of regions) {
    for (const { label, units } of quantitiesUnder(VARIABLE, new Map(Object.entries(metadata)))) {
      found.set(`${label}\n${units}`, { label, units });
    }
  }
  return [...found.values()];
}

interface Quantity {
  readonly number: string;
  readonly units: string;
}

/** Quantities whose key begins so, taken out of what is left. */
function quantitiesUnder(prefix: string, left: Map<string, string>): (Quantity & Variable)[] {
  return [...left].flatMap(([key, value]) => {
    const quantity = quantityOf(value);
    const label = key.slice(prefix.length);
    if (!key.startsWith(prefix) || label !== label.trim() || quantity === undefined) return [];
    left.delete(key);
    return [{ label, ...quantity }];
  });
}

/** Number and units of a text such as "12.5 degree", or undefined unless the reader makes the same text of them. */
function quantityOf(text: string | undefined): Quantity | undefined {
  const [, number, units = ""] = /^(\S+)(?: (\S.*))?$/.exec(text ?? "") ?? [];
  return number !== undefined && isWrittenBack(number) ? { number, units } : undefined;
}

/** `true` when a text is a known number in the form that numbers are written in. */
function isWrittenBack(text: string): boolean {
  return numberRule(text) === undefined && String(Number(text)) === text && Number(text) !== UNKNOWN;
}

/** Seven lines from year to hours ahead of GMT; -1 for parts that are not known. */
function dateLines(left: Map<string, string>): Line[] {
  const parts = /^(\d+)-(\d+)-(\d+) (\d+):(\d+):(\d+(?:\.\d+)?)$/.exec(left.get("date") ?? "")?.slice(1) ??
    [];
  const numbers = parts.map(Number);
  const isSame = parts.every((part, i) => String(numbers[i]).padStart(2, "0") === part);
  if (parts.length === 0 || !isSame) return [-1, -1, -1, -1, -1, -1, 0];
  left.delete("date");
  const hoursAhead = left.get("hours ahead of GMT") ?? "";
  if (!isWrittenBack(hoursAhead)) return [...numbers, UNKNOWN_TEXT];
  left.delete("hours ahead of GMT");
  return [...numbers, hoursAhead];
}

/** Start and increment that give exactly these energies back, or undefined. */
function regularScan(energiesEv: Float64Array): Scan | undefined {
  const count = energiesEv.length;
  const [startEv, next = startEv + 1] = energiesEv;
  const step = count > 1 ? (energiesEv[count - 1] - startEv) / (count - 1) : 1;
  const candidates = [Number(step.toPrecision(9)), Number(step.toPrecision(12)), step, next - startEv];
  const incrementEv = candidates.find((increment) => {
    const regular = regularEnergiesEv(startEv, increment, count);
    return increment !== 0 && energiesEv.every((energyEv, i) => energyEv === regular[i]);
  });
  return incrementEv === undefined ? undefined : { startEv, incrementEv };
}

function known(value: number | null): Line {
  if (value === null) return UNKNOWN_TEXT;
  if (!Number.isFinite(value) || value === UNKNOWN) {
    throw new RangeError(cannot("write the file", "every number must be finite and not 1E37", value));
  }
  return value;
}

function ordinate(value: number): Line {
  return known(Number.isNaN(value) ? null : value);
}

function extremes(values: Float64Array): Line[] {
  const numbers = values.filter((value) => !Number.isNaN(value));
  if (numbers.length === 0) return [UNKNOWN_TEXT, UNKNOWN_TEXT];
  return [numbers.reduce((a, b) => Math.min(a, b)), numbers.reduce((a, b) => Math.max(a, b))];
}

function oneLine(text: string): string {
  if (/[\r\n]/.test(text)) throw new RangeError(cannot("write the file", "texts must be one line", text));
  return text;
}
