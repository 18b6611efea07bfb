import { cannot, InputError } from "../base/mod.ts";
import { keyedValue, metadataOf } from "./head.ts";
import {
  ascending,
  energyKindOf,
  firstOutOfOrder,
  MAX_POINTS,
  type SpectrumFile,
  type SpectrumRegion,
} from "./region.ts";
import { ISO_14976_IDENTIFIER, numberRule } from "./text.ts";

/** The number that stands for "unknown" (ISO 14976, also written 1e+037). */
export const UNKNOWN = 1e37;

/** Experiment modes whose blocks are spectra. */
const EXPERIMENT_MODES = ["NORM", "SDP", "MAP", "MAPDP"];

/** Techniques whose source energy is a photon energy. */
export const PHOTON_TECHNIQUES: readonly string[] = ["UPS", "XPS"];

/** Techniques whose blocks are electron spectra; the others have further items. */
export const TECHNIQUES: readonly string[] = ["AES diff", "AES dir", "ELS", ...PHOTON_TECHNIQUES];

/** Allowed difference between stated and found extremes: files round the stated ones. */
const EXTREME_RELATIVE = 1e-4;
const EXTREME_ABSOLUTE = 1e-6;

/**
 * Reads the text of an ISO 14976 file ("VAMAS" format): one item a line, in the order of the standard.
 *
 * Experiment modes NORM, SDP, MAP and MAPDP with scan mode REGULAR or IRREGULAR are read; other modes, techniques other
 * than electron spectroscopies, and inclusion or exclusion lists are refused. Counts are the first corresponding
 * variable (the second for IRREGULAR, where the first is the energy); their label, units and signal mode are in
 * `metadata`, so that a rate can be told from counts. Stated minima and maxima must agree with the ordinates within
 * 1e-4, which catches lost and altered lines; two zeros there mean "not stated" in real files.
 *
 * 1E37 becomes `null`, and so does 0 where it cannot be a value: photon energy, pass energy, dwell, sweeps. Energies of
 * REGULAR scans are rounded to the decimals of start and increment, so that 0 + 3 x 0.1 is 0.3. Comment lines
 * `# key: value` become metadata, as `writeIso14976` writes what the format has no item for.
 *
 * Source: W. A. Dench, L. B. Hazell, M. P. Seah, Surf. Interface Anal. 13, 63 (1988); ISO 14976:1998.
 *
 * @param text The decoded file, lines ended by CR LF or LF.
 * @param fileName Name for messages.
 * @returns One region a block.
 * @throws {InputError} If an item is missing or breaks its rule, with file and line; the first problem only, since
 * every later item depends on the ones before.
 */
export function readIso14976(text: string, fileName: string): SpectrumFile {
  const items = itemReader(text, fileName);
  const experiment = readExperiment(items);
  const blockCount = items.count("number of blocks");
  if (blockCount === 0) throw items.error("number of blocks", "there must be at least one block", 0);
  const regions: SpectrumRegion[] = [];
  for (let i = 0; i < blockCount; i++) regions.push(readBlock(items, experiment));
  items.oneOf("experiment terminator", ["end of experiment"]);
  items.end();
  return { format: "ISO 14976", regions };
}

interface Experiment {
  readonly mode: string;
  readonly isRegular: boolean;
  readonly comments: readonly string[];
  readonly metadata: readonly Entry[];
  /** Metadata written as comments. */
  readonly stated: readonly Entry[];
  readonly variables: readonly Labeled[];
  readonly futureBlockEntries: number;
}

type Entry = readonly [string, string];

interface Labeled {
  readonly label: string;
  readonly units: string;
}

function readExperiment(items: ItemReader): Experiment {
  items.oneOf("format identifier", [ISO_14976_IDENTIFIER]);
  const metadata = ["institution", "instrument", "operator", "experiment"].map((
    key,
  ): Entry => [key, items.text(key)]);
  const stated: Entry[] = [];
  const comments = readComments(items, "experiment comment line", stated);
  const mode = items.oneOf("experiment mode", EXPERIMENT_MODES);
  const isRegular = items.oneOf("scan mode", ["REGULAR", "IRREGULAR"]) === "REGULAR";
  items.count("number of spectral regions");
  if (mode === "MAP" || mode === "MAPDP") {
    items.count("number of analysis positions");
    items.count("number of discrete x coordinates");
    items.count("number of discrete y coordinates");
  }
  const variables = items.repeat("experimental variables", () => items.labeled("experimental variable"));
  const listed = items.number("number of entries in the inclusion or exclusion list");
  if (listed !== 0) {
    const rule = "inclusion and exclusion lists are not supported, the number must be 0";
    throw items.error("number of entries in the inclusion or exclusion list", rule, listed);
  }
  const manual = items.repeat("manually entered items", () => items.number("manually entered item"));
  if (manual.length > 0) metadata.push(["manually entered items", manual.join(" ")]);
  if (mode !== "NORM") metadata.push(["experiment mode", mode]);
  const futureEntries = items.count("number of future upgrade experiment entries");
  const futureBlockEntries = items.count("number of future upgrade block entries");
  for (let i = 0; i < futureEntries; i++) comments.push(items.text("future upgrade experiment entry"));
  return { mode, isRegular, comments, metadata, stated, variables, futureBlockEntries };
}

/** Comment lines; those of the form `# key: value` go to `stated`, and `## #` stands for a comment that begins with #. */
function readComments(items: ItemReader, item: string, stated: Entry[]): string[] {
  const comments: string[] = [];
  items.repeat(`${item}s`, () => {
    const line = items.text(item);
    const keyed = /^# [^#]/.test(line) ? keyedValue(line.slice(2)) : undefined;
    if (keyed !== undefined) stated.push(keyed);
    else comments.push(line.startsWith("## #") ? line.slice(3) : line);
  });
  return comments;
}

function readBlock(items: ItemReader, experiment: Experiment): SpectrumRegion {
  const isMap = experiment.mode.startsWith("MAP");
  const isDepthProfile = experiment.mode.endsWith("DP");
  const metadata: Entry[] = [...experiment.metadata];
  const keep = (key: string, value: string) => metadata.push([key, value]);
  const keepText = (key: string): string => {
    const value = items.text(key);
    keep(key, value);
    return value;
  };
  const keepNumber = (key: string, units = ""): number | null => {
    const value = items.known(key);
    if (value !== null) keep(key, `${value} ${units}`.trim());
    return value;
  };
  const knownPositive = (key: string): number | null => {
    const value = items.known(key);
    if (value !== null && value < 0) {
      throw items.error(key, "it must be > 0, or 0 where it is not known", value);
    }
    return value || null;
  };
  const keepAll = (units: string, ...keys: string[]) => keys.forEach((key) => keepNumber(key, units));

  const label = items.text("block identifier");
  keepText("sample");
  keepDate(items, keep);
  const stated = [...experiment.stated];
  const comments = readComments(items, "block comment line", stated);
  const technique = items.oneOf("technique", TECHNIQUES);
  keep("technique", technique);
  if (isMap) keepAll("", "x coordinate", "y coordinate");
  for (const { label, units } of experiment.variables) keepNumber(`experimental variable ${label}`, units);
  keepText("source label");
  if (isDepthProfile) {
    keepAll("", "sputtering ion atomic number", "sputtering ion number of atoms", "sputtering ion charge");
  }
  const sourceEnergyEv = knownPositive("source energy");
  const isPhotonSource = PHOTON_TECHNIQUES.includes(technique);
  if (!isPhotonSource && sourceEnergyEv !== null) keep("source energy", `${sourceEnergyEv} eV`);
  keepNumber("source strength");
  keepAll("um", "source beam width x", "source beam width y");
  if (isMap) keepAll("um", "field of view x", "field of view y");
  keepAll("degree", "source polar angle of incidence", "source azimuth");
  const analyzerMode = keepText("analyzer mode");
  const passEnergyOrRatio = knownPositive("analyzer pass energy or retard ratio");
  const isPassEnergy = analyzerMode.toUpperCase() === "FAT";
  if (!isPassEnergy && passEnergyOrRatio !== null) {
    keep("analyzer pass energy or retard ratio", String(passEnergyOrRatio));
  }
  if (technique === "AES diff") keepNumber("differential width", "eV");
  keepNumber("magnification of analyzer transfer lens");
  const analyzerWorkFunctionEv = items.known("analyzer work function");
  const biasV = items.known("target bias");
  keepAll("um", "analysis width x", "analysis width y");
  keepAll("degree", "analyzer axis take-off polar angle", "analyzer axis take-off azimuth");
  const species = [items.text("species label"), keepText("transition or charge state label")].join(" ")
    .trim();
  keepNumber("charge of detected particle");

  const abscissa = experiment.isRegular ? readAbscissa(items) : undefined;
  const variables = items.repeat("corresponding variables", () => items.labeled("corresponding variable"));
  const energyVariables = experiment.isRegular ? 0 : 1;
  if (variables.length <= energyVariables) {
    const rule = `there must be more than ${energyVariables} with scan mode ${
      experiment.isRegular ? "" : "IR"
    }REGULAR`;
    throw items.error("number of corresponding variables", rule, variables.length);
  }
  const labels = variables.map((variable) => variable.label);
  const repeated = labels.find((label, i) => labels.indexOf(label) !== i);
  if (repeated !== undefined) {
    throw items.error("corresponding variables", "every variable must have its own label", repeated);
  }
  const axis = abscissa ?? variables[0];
  if (axis.units !== "eV") throw items.error("abscissa units", 'the energies must be in "eV"', axis.units);
  keep("abscissa label", axis.label);
  keep("counts label", variables[energyVariables].label);
  keep("counts units", variables[energyVariables].units);
  for (const { label, units } of variables.slice(energyVariables + 1)) {
    keep(`units of column ${label}`, units);
  }

  keepText("signal mode");
  const dwellS = knownPositive("signal collection time");
  const sweeps = knownPositive("number of scans");
  if (sweeps !== null && !Number.isInteger(sweeps)) {
    throw items.error("number of scans", "it must be a whole number", sweeps);
  }
  keepNumber("signal time correction", "s");
  if (isDepthProfile) {
    keepAll("eV", "sputtering source energy");
    keepAll("nA", "sputtering source beam current");
    keepAll("um", "sputtering source width x", "sputtering source width y");
    keepAll("degree", "sputtering source polar angle of incidence", "sputtering source azimuth");
    keepText("sputtering mode");
  }
  keepAll("degree", "tilt polar angle", "tilt azimuth", "sample rotation angle");
  items.repeat("additional numerical parameters", () => {
    const { label, units } = items.labeled("additional numerical parameter");
    keepNumber(`parameter ${label}`, units);
  });
  for (let i = 0; i < experiment.futureBlockEntries; i++) {
    comments.push(items.text("future upgrade block entry"));
  }

  const ordinates = readOrdinates(items, labels);
  const pointCount = ordinates[0].length;
  const energies = abscissa === undefined
    ? ordinates[0]
    : regularEnergiesEv(abscissa.startEv, abscissa.incrementEv, pointCount);
  const counts = ordinates[energyVariables];
  const ordinateError = (variable: number, point: number, rule: string, value: unknown) =>
    items.error(
      `ordinate of "${labels[variable]}"`,
      rule,
      value,
      (pointCount - point) * labels.length - variable - 1,
    );
  const wrongEnergy = firstOutOfOrder(energies);
  if (wrongEnergy >= 0) {
    const value = `${energies[wrongEnergy]} after ${energies[wrongEnergy - 1]}`;
    throw ordinateError(0, wrongEnergy, "energies must all ascend or all descend", value);
  }
  const wrongCount = counts.findIndex((value) => !(value >= 0));
  if (wrongCount >= 0) {
    throw ordinateError(energyVariables, wrongCount, "counts must be known and >= 0", counts[wrongCount]);
  }

  const isDescending = energies[0] > energies[pointCount - 1];
  const further = labels.flatMap((label, i) =>
    i <= energyVariables ? [] : [[label, ascending(ordinates[i], isDescending)] as const]
  );
  return {
    label,
    species,
    energyKind: energyKindOf(axis.label),
    energiesEv: ascending(energies, isDescending),
    counts: ascending(counts, isDescending),
    photonEnergyEv: isPhotonSource ? sourceEnergyEv : null,
    biasV,
    asRecorded: stated.some(([key, value]) => key === "as_recorded" && value === "true"),
    analyzerWorkFunctionEv,
    passEnergyEv: isPassEnergy ? passEnergyOrRatio : null,
    dwellS,
    sweeps,
    comments: [...experiment.comments, ...comments],
    metadata: withStated(metadata.filter(([, value]) => value !== ""), stated),
    columns: Object.fromEntries(further),
  };
}

/** What comments state goes before items of the same key: the writer puts there what an item cannot hold exactly. */
function withStated(items: readonly Entry[], stated: readonly Entry[]): Record<string, string> {
  const keys = new Set(stated.map(([key]) => key));
  return metadataOf([
    ...items.filter(([key]) => !keys.has(key)),
    ...stated.filter(([key]) => key !== "as_recorded"),
  ]);
}

/**
 * Energies of a REGULAR scan: start plus multiples of the increment, rounded to the decimals that these are written
 * with, which takes the rounding of binary fractions off.
 *
 * @param startEv First energy, eV.
 * @param incrementEv Step, eV, not 0.
 * @param pointCount Number of energies.
 * @returns Energies, eV.
 */
export function regularEnergiesEv(startEv: number, incrementEv: number, pointCount: number): Float64Array {
  const decimals = Math.max(decimalsOf(startEv), decimalsOf(incrementEv));
  const scale = 10 ** decimals;
  // Beyond these limits the scaled number has no room for its decimals.
  const isExact = decimals <= 15 &&
    Math.max(Math.abs(startEv), Math.abs(startEv + pointCount * incrementEv)) * scale < 2 ** 52;
  return Float64Array.from({ length: pointCount }, (_, i) => {
    const energyEv = startEv + i * incrementEv;
    return isExact ? Math.round(energyEv * scale) / scale + 0 : energyEv;
  });
}

function decimalsOf(value: number): number {
  const [, fraction = "", exponent = "0"] = /^-?\d+(?:\.(\d+))?(?:e([+-]\d+))?$/.exec(String(value)) ?? [];
  return Math.max(0, fraction.length - Number(exponent));
}

function keepDate(items: ItemReader, keep: (key: string, value: string) => void): void {
  const parts = ["year", "month", "day", "hour", "minute", "second"].map((part) => items.known(part));
  const hoursAhead = items.known("hours ahead of GMT");
  // The standard writes -1 for a part that is not known.
  if (!parts.every((part) => part !== null && part >= 0)) return;
  const [year, month, day, hour, minute, second] = parts.map((part) => String(part).padStart(2, "0"));
  keep("date", `${year}-${month}-${day} ${hour}:${minute}:${second}`);
  if (hoursAhead !== null) keep("hours ahead of GMT", String(hoursAhead));
}

interface Abscissa extends Labeled {
  readonly startEv: number;
  readonly incrementEv: number;
}

function readAbscissa(items: ItemReader): Abscissa {
  const axis = items.labeled("abscissa");
  if (axis.units !== "eV") throw items.error("abscissa units", 'the energies must be in "eV"', axis.units);
  const startEv = items.number("abscissa start");
  const incrementEv = items.number("abscissa increment");
  if (incrementEv === 0) throw items.error("abscissa increment", "it must not be 0", incrementEv);
  return { ...axis, startEv, incrementEv };
}

/** One array a variable; the file interleaves them point by point. Unknown ordinates become NaN. */
function readOrdinates(items: ItemReader, labels: readonly string[]): Float64Array[] {
  const item = "number of ordinate values";
  const ordinateCount = items.count(item);
  if (ordinateCount === 0 || ordinateCount % labels.length !== 0) {
    throw items.error(
      item,
      `it must be a multiple of the ${labels.length} corresponding variables`,
      ordinateCount,
    );
  }
  if (ordinateCount / labels.length > MAX_POINTS) {
    throw items.error(item, `there must be at most ${MAX_POINTS} points`, ordinateCount / labels.length);
  }
  const stated = labels.map((
    label,
  ) => [items.known(`minimum of "${label}"`), items.known(`maximum of "${label}"`)]);
  items.need(ordinateCount, "ordinate value");
  const ordinates = labels.map(() => new Float64Array(ordinateCount / labels.length));
  for (let i = 0; i < ordinateCount; i++) {
    const variable = i % labels.length;
    const value = items.known(`ordinate of "${labels[variable]}"`);
    ordinates[variable][(i - variable) / labels.length] = value ?? NaN;
  }
  labels.forEach((label, variable) => {
    const [minimum, maximum] = stated[variable];
    if (minimum === 0 && maximum === 0) return;
    const known = ordinates[variable].filter((value) => !Number.isNaN(value));
    const found = known.reduce(([low, high], value) => [Math.min(low, value), Math.max(high, value)], [
      Infinity,
      -Infinity,
    ]);
    [minimum, maximum].forEach((value, side) => {
      if (
        value === null ||
        Math.abs(value - found[side]) <= EXTREME_ABSOLUTE + EXTREME_RELATIVE * Math.abs(found[side])
      ) {
        return;
      }
      const name = `${side === 0 ? "minimum" : "maximum"} of "${label}"`;
      const linesBack = ordinateCount + 2 * (labels.length - variable) - 1 - side;
      throw items.error(
        name,
        `it must agree with the ordinates, where it is ${found[side]}`,
        value,
        linesBack,
      );
    });
  });
  return ordinates;
}

/** Reads one item after the other; every item has a name, so that every error has one. */
interface ItemReader {
  text(item: string): string;
  /** A number, or `null` for 1E37. */
  known(item: string): number | null;
  number(item: string): number;
  count(item: string): number;
  /** A word of a list, in any case; returned as the list spells it. */
  oneOf(item: string, words: readonly string[]): string;
  labeled(item: string): Labeled;
  /** A number of entries and then that many entries. */
  repeat<T>(items: string, read: () => T): T[];
  /** Throws unless so many lines are left. */
  need(lines: number, item: string): void;
  end(): void;
  /** An error at the last line read, or `linesBack` before it. */
  error(item: string, rule: string, value: unknown, linesBack?: number): InputError;
}

function itemReader(text: string, fileName: string): ItemReader {
  const lines = text.split("\n").map((line) => line.trim());
  if (lines.at(-1) === "") lines.pop();
  let next = 0;

  const error = (item: string, rule: string, value: unknown, linesBack = 0) =>
    new InputError([{
      place: `${fileName}:${next - linesBack}`,
      message: cannot(`read ${item}`, rule, value),
    }]);
  const need = (count: number, item: string) => {
    const left = lines.length - next;
    if (count <= left) return;
    next = lines.length;
    const which = count === 1 ? item : `${item} ${left + 1} of ${count}`;
    throw error(which, "the file must not end before it", `end of file after line ${lines.length}`);
  };
  const readText = (item: string) => {
    need(1, item);
    return lines[next++];
  };
  const known = (item: string) => {
    const line = readText(item);
    const rule = numberRule(line);
    if (rule !== undefined) throw error(item, `it ${rule}`, line);
    return Number(line) === UNKNOWN ? null : Number(line);
  };
  const number = (item: string) => {
    const value = known(item);
    if (value === null) throw error(item, "it must be known", UNKNOWN);
    return value;
  };
  const count = (item: string) => {
    const value = number(item);
    if (!Number.isInteger(value) || value < 0) throw error(item, "it must be a whole number >= 0", value);
    return value;
  };
  return {
    text: readText,
    known,
    number,
    count,
    oneOf(item, words) {
      const line = readText(item);
      const word = words.find((candidate) => candidate.toLowerCase() === line.toLowerCase());
      if (word !== undefined) return word;
      const list = words.map((candidate) => `"${candidate}"`).join(", ");
      throw error(
        item,
        words.length === 1 ? `it must be ${list}` : `it must be one of ${list}; others are not supported yet`,
        line,
      );
    },
    labeled: (item) => ({ label: readText(`${item} label`), units: readText(`${item} units`) }),
    repeat<T>(items: string, read: () => T): T[] {
      const entries: T[] = [];
      for (let left = count(`number of ${items}`); left > 0; left--) entries.push(read());
      return entries;
    },
    need,
    end() {
      const garbage = lines.findIndex((line, i) => i >= next && line !== "");
      if (garbage < 0) return;
      next = garbage + 1;
      throw error("end of file", 'nothing may follow "end of experiment"', lines[garbage]);
    },
    error,
  };
}
