import { cannot, VERSION } from "../base/mod.ts";
import { type Hdf5Writer, writeHdf5 } from "./hdf5.ts";
import { headLines } from "./head.ts";
import { NOTE } from "./nexus.ts";
import type { SpectrumRegion } from "./region.ts";

/** Commit of the NeXus definitions that the names below are taken from. */
const DEFINITION_VERSION = "e1ddbb32";

/**
 * Writes regions as a NeXus file of the application definition NXmpes, one NXentry each, so that `readNexus` gives the
 * same back.
 *
 * Facts with a place in NXmpes go there; all others go as `# key: value` lines into an NXnote. Simulated data (metadata
 * `simulated: true`) are marked as NeXus has it, by `sample/type` "simulated data". Fields that NXmpes wants and the
 * region does not know, such as `start_time` of a simulation, are left out rather than invented. Single numbers are
 * arrays of one, which lets checksums cover them.
 *
 * Source: NeXus definitions, applications/NXmpes and base classes NXentry, NXdata, NXsample
 * (NIAC, commit e1ddbb32).
 *
 * @param regions At least one region.
 * @returns The bytes of the file.
 * @throws {RangeError} If a text has several lines.
 */
export async function writeNexus(regions: readonly SpectrumRegion[]): Promise<Uint8Array> {
  if (regions.length === 0) throw new RangeError(cannot("write a file", "it must have a region", 0));
  const width = String(regions.length).length;
  const nameOf = (i: number) =>
    regions.length === 1 ? "entry" : `entry_${String(i + 1).padStart(width, "0")}`;
  return await writeHdf5((root) => {
    root.attribute("NX_class", "NXroot");
    root.attribute("default", nameOf(0));
    root.attribute("creator", "Twoedge");
    root.attribute("creator_version", VERSION);
    regions.forEach((region, i) => writeEntry(root.group(nameOf(i), "NXentry"), region));
  });
}

function writeEntry(entry: Hdf5Writer, region: SpectrumRegion): void {
  const left = new Map(Object.entries(region.metadata));
  const take = (key: string): string | undefined => {
    const value = left.get(key);
    if (value === "") return undefined;
    left.delete(key);
    return value;
  };
  const text = (group: Hdf5Writer, name: string, value: string | undefined) => {
    if (value !== undefined) group.text(name, value);
  };
  const number = (group: Hdf5Writer, name: string, value: number | null, units: string) => {
    if (value !== null) group.numbers(name, value, units);
  };

  entry.attribute("default", "data");
  entry.text("definition", "NXmpes");
  entry.attribute("version", DEFINITION_VERSION, "definition");
  const title = take("title");
  entry.text("title", title ?? region.label);
  text(entry, "start_time", takeTime(left));
  text(entry, "method", take("technique"));

  const person = take("operator");
  const institution = take("institution");
  if (person !== undefined || institution !== undefined) {
    const user = entry.group("user", "NXuser");
    text(user, "name", person);
    text(user, "affiliation", institution);
  }

  const instrument = entry.group("instrument", "NXinstrument");
  text(instrument, "name", take("instrument"));
  number(instrument.group("beam_probe", "NXbeam"), "incident_energy", region.photonEnergyEv, "eV");
  const analyzer = instrument.group("electronanalyzer", "NXelectronanalyzer");
  number(analyzer, "work_function", region.analyzerWorkFunctionEv, "eV");
  analyzer.group("collectioncolumn", "NXcollectioncolumn");
  const dispersion = analyzer.group("energydispersion", "NXenergydispersion");
  number(dispersion, "pass_energy", region.passEnergyEv, "eV");
  analyzer.group("electron_detector", "NXelectron_detector");

  const sample = entry.group("sample", "NXsample");
  text(sample, "name", take("sample"));
  // The note says it too, where a checksum guards it.
  if (left.get("simulated") === "true") sample.text("type", "simulated data");
  number(sample.group("bias_env", "NXenvironment"), "value", region.biasV, "V");
  number(sample.group("temperature_env", "NXenvironment"), "value", takeNumber(left, "temperature_k"), "K");

  const data = entry.group("data", "NXdata");
  const columns = Object.entries(region.columns);
  const columnNames = columns.map((_, i) => `column_${i + 1}`);
  data.attribute("signal", "data");
  data.attribute("axes", ["energy"]);
  data.attribute("energy_indices", 0);
  if (columns.length > 0) data.attribute("auxiliary_signals", columnNames);
  data.numbers("energy", region.energiesEv, "eV");
  if (region.energyKind !== "unknown") data.attribute("type", region.energyKind, "energy");
  data.numbers("data", region.counts, countsUnits(left));
  columns.forEach(([name, values], i) => {
    data.numbers(columnNames[i], values);
    data.attribute("long_name", name, columnNames[i]);
  });

  const lines = headLines({
    ...region,
    // These have their own fields.
    label: "",
    photonEnergyEv: null,
    biasV: null,
    analyzerWorkFunctionEv: null,
    passEnergyEv: null,
    metadata: Object.fromEntries(left),
  });
  if (title !== undefined) lines.unshift(`# region: ${region.label}`.trimEnd());
  const broken = lines.find((line) => /[\r\n]/.test(line));
  if (broken !== undefined) throw new RangeError(cannot("write the file", "texts must be one line", broken));
  if (lines.length > 0) {
    const note = entry.group(NOTE, "NXnote");
    note.text("type", "text/plain");
    note.lines("data", lines);
  }
}

/** Takes date and time zone as an ISO 8601 time; undefined when the date is not in the form of `readNexus`. */
function takeTime(left: Map<string, string>): string | undefined {
  const parts = /^(\d+-\d\d-\d\d) (\d\d:\d\d:\d\d(?:\.\d+)?)$/.exec(left.get("date") ?? "");
  if (parts === null) return undefined;
  left.delete("date");
  const ahead = left.get("hours ahead of GMT") ?? "";
  const hours = Number(ahead);
  const isZone = /^-?\d+(\.25|\.5|\.75)?$/.test(ahead) && String(hours) === ahead && Math.abs(hours) < 24;
  if (!isZone) return `${parts[1]}T${parts[2]}`;
  left.delete("hours ahead of GMT");
  const whole = Math.trunc(Math.abs(hours));
  const two = (part: number) => String(part).padStart(2, "0");
  return `${parts[1]}T${parts[2]}${hours < 0 ? "-" : "+"}${two(whole)}:${
    two(60 * (Math.abs(hours) - whole))
  }`;
}

/** Takes a number >= 0 that is written as numbers are, or null. */
function takeNumber(left: Map<string, string>, key: string): number | null {
  const text = left.get(key) ?? "";
  const value = Number(text);
  if (String(value) !== text || !(value >= 0 && value < Infinity)) return null;
  left.delete(key);
  return value;
}

/** Takes units other than counts where the reader gives the same text back. */
function countsUnits(left: Map<string, string>): string {
  if (left.get("counts units") !== "c/s") return "counts";
  left.delete("counts units");
  return "counts/s";
}
