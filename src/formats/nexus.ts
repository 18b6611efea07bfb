import { cannot, InputError } from "../base/mod.ts";
import { type Hdf5Group, type Hdf5Value, readHdf5 } from "./hdf5.ts";
import { headReader, metadataOf, problemList, type RegionFacts } from "./head.ts";
import { ascending, firstOutOfOrder, MAX_POINTS, type SpectrumFile, type SpectrumRegion } from "./region.ts";

/** Name of the NXnote with what NXmpes has no field for, as `# key: value` lines. */
export const NOTE = "twoedge_note";

/** Deepest group and most groups and fields that are looked at for metadata: links can make circles. */
const MAX_DEPTH = 6;
const MAX_FIELDS = 10_000;

/**
 * Reads a NeXus file of the application definition NXmpes (or one that extends it, such as NXxps): each NXentry is a
 * region with one energy axis.
 *
 * Read are: `title`; the NXdata that `default` names or the first, its `signal` (counts), its axis (energies in eV, with
 * `type` kinetic or binding), its auxiliary signals of the same length; photon energy (`incident_energy` of
 * `beam_probe`), work function and pass energy of the analyzer, sample name, temperature and bias, start time. All
 * other fields with one value are metadata under their path. A bias does not say that energies are as recorded.
 *
 * Source: NeXus definitions, applications/NXmpes and base classes NXentry, NXdata, NXsample (NIAC, 2024).
 *
 * @param bytes The whole file.
 * @param fileName Name for messages.
 * @returns One region an entry.
 * @throws {InputError} If the file is damaged, is no NXmpes, has images instead of spectra, or breaks a rule for
 * spectra, with the path in the file.
 */
export function readNexus(bytes: Uint8Array, fileName: string): Promise<SpectrumFile> {
  return readHdf5(bytes, fileName, (root) => {
    const entries = root.names.flatMap((name) => {
      const group = root.group(name);
      return group?.nxClass === "NXentry" ? [{ name, group }] : [];
    });
    if (entries.length === 0) {
      const message = cannot(
        "read the file",
        "it must have an NXentry of the definition NXmpes",
        root.names.join(", "),
      );
      throw new InputError([{ place: fileName, message }]);
    }
    return { format: "NXmpes", regions: entries.map(({ name, group }) => readEntry(group, fileName, name)) };
  });
}

function readEntry(entry: Hdf5Group, fileName: string, entryName: string): SpectrumRegion {
  const fail = (path: string, rule: string, value: unknown) =>
    new InputError([{
      place: `${fileName}/${entryName}/${path}`,
      message: cannot(`read ${path.split("/").at(-1)}`, rule, value),
    }]);
  const fields = fieldReader(entry, fail);

  const definition = fields.text("definition");
  if (!/^NX(mpes|xps)/.test(definition ?? "")) {
    throw fail("definition", 'it must be "NXmpes" or extend it', definition ?? "missing");
  }
  const note = readNote(fields.lines(NOTE, "data"), `${fileName}/${entryName}/${NOTE}`);
  const title = fields.text("title") ?? "";
  const instrument = fields.childOfClass("", /^NXinstrument$/) ?? "instrument";
  const analyzer = fields.childOfClass(instrument, /^NXelectronanaly[sz]er$/) ?? `${instrument}/analyzer`;
  const dispersion = fields.childOfClass(analyzer, /^NXenergydispersion$/) ?? `${analyzer}/dispersion`;
  const beam = entry.group(`${instrument}/beam_probe`) === undefined
    ? fields.childOfClass(instrument, /^NXbeam$/) ?? `${instrument}/beam_probe`
    : `${instrument}/beam_probe`;
  const sample = fields.childOfClass("", /^NXsample$/) ?? "sample";
  const user = fields.childOfClass("", /^NXuser$/) ?? "user";

  const photonEnergyEv = fields.number(`${beam}/incident_energy`, "eV");
  if (photonEnergyEv !== null && !(photonEnergyEv > 0)) {
    throw fail(`${beam}/incident_energy`, "it must be > 0 eV", photonEnergyEv);
  }
  const passEnergyEv = fields.number(`${dispersion}/pass_energy`, "eV");
  if (passEnergyEv !== null && !(passEnergyEv > 0)) {
    throw fail(`${dispersion}/pass_energy`, "it must be > 0 eV", passEnergyEv);
  }
  const temperatureK = fields.number(`${sample}/temperature_env/value`, "K") ??
    fields.number(`${sample}/temperature_env/temperature_sensor/value`, "K");
  if (temperatureK !== null && !(temperatureK >= 0)) {
    throw fail(`${sample}/temperature_env`, "it must be >= 0 K", temperatureK);
  }
  const data = readData(entry, fields.dataPath(), fail);
  const type = fields.text(`${sample}/type`);
  const known: readonly (readonly [string, string | null | undefined])[] = [
    ["title", note.hasLabel ? title : null],
    ...dateEntries(fields.text("start_time")),
    ["instrument", fields.text(`${instrument}/name`)],
    ["technique", fields.text("method")],
    ["operator", fields.text(`${user}/name`)],
    ["institution", fields.text(`${user}/affiliation`)],
    ["sample", fields.text(`${sample}/name`)],
    ["temperature_k", temperatureK === null ? null : String(temperatureK)],
    ...(type === "simulated data" ? [["simulated", "true"] as const] : [["sample/type", type] as const]),
    ["counts units", data.countsUnits],
  ];
  const given = known.flatMap(([key, value]) => value ? [[key, value] as const] : []);
  const givenKeys = new Set(given.map(([key]) => key));
  const { countsUnits: _, ...spectrum } = data;
  return {
    ...note.facts,
    ...spectrum,
    label: note.hasLabel ? note.facts.label : title,
    photonEnergyEv,
    biasV: fields.number(`${sample}/bias_env/value`, "V") ??
      fields.number(`${sample}/bias_env/voltmeter/value`, "V"),
    analyzerWorkFunctionEv: fields.number(`${analyzer}/work_function`, "eV"),
    passEnergyEv,
    metadata: metadataOf([
      ...Object.entries(note.facts.metadata).filter(([key]) => !givenKeys.has(key)),
      ...given,
      ...fields.others(),
    ]),
  };
}

/** What our own note says, with the head lines of CSV; nothing when there is none. */
function readNote(lines: readonly string[], place: string): { facts: RegionFacts; hasLabel: boolean } {
  const problems = problemList(place);
  const head = headReader(problems);
  lines.forEach((line, i) => {
    if (!head.take(line, i + 1)) {
      problems.add(i + 1, "read the note", 'every line must begin with "#"', line);
    }
  });
  problems.throwIfAny();
  const facts = head.facts();
  const hasLabel = lines.some((line) => /^# region:/.test(line));
  return { facts, hasLabel };
}

type Fail = (path: string, rule: string, value: unknown) => InputError;

/** Reads fields by path and remembers which, so that the others become metadata. */
interface FieldReader {
  /** A text in one line, or undefined. */
  text(path: string): string | undefined;
  /** Lines of text in a group, all of which is then known. */
  lines(group: string, name: string): readonly string[];
  /** One number in the units that it must have, or null. */
  number(path: string, units: string): number | null;
  /** Path of the first group of a NeXus class in another group. */
  childOfClass(path: string, nxClass: RegExp): string | undefined;
  /** Path of the NXdata to take. */
  dataPath(): string;
  /** All fields with one value that were not asked for. */
  others(): (readonly [string, string])[];
}

function fieldReader(entry: Hdf5Group, fail: Fail): FieldReader {
  const asked = new Set<string>();
  const groupAt = (path: string) => path === "" ? entry : entry.group(path);
  const childOfClass = (path: string, nxClass: RegExp): string | undefined => {
    const parent = groupAt(path);
    const name = parent?.names.find((name) => nxClass.test(parent.group(name)?.nxClass ?? ""));
    return name === undefined ? undefined : path === "" ? name : `${path}/${name}`;
  };
  return {
    text(path) {
      asked.add(path);
      const value = single(entry.value(path));
      return typeof value === "string" ? oneLine(value) : undefined;
    },
    lines(group, name) {
      asked.add(group);
      const value = entry.value(`${group}/${name}`);
      if (value === undefined || value instanceof Float64Array) return [];
      return typeof value === "string" ? [value] : value;
    },
    number(path, units) {
      const value = entry.value(path);
      if (value === undefined) return null;
      asked.add(path);
      const number = single(value);
      if (typeof number !== "number" || !Number.isFinite(number)) {
        throw fail(path, "it must be one finite number", shown(value));
      }
      const found = entry.attribute(path, "units");
      if (found !== units) throw fail(path, `its units must be "${units}"`, found ?? "missing");
      return number;
    },
    childOfClass,
    dataPath() {
      const named = entry.attribute("", "default");
      if (typeof named === "string" && entry.group(named)?.nxClass === "NXdata") return named;
      const first = childOfClass("", /^NXdata$/);
      if (first === undefined) throw fail("", "there must be an NXdata", entry.names.join(", "));
      return first;
    },
    others() {
      const found: [string, string][] = [];
      let visited = 0;
      const walk = (group: Hdf5Group, prefix: string, depth: number): void => {
        for (const name of group.names) {
          const path = prefix + name;
          if (++visited > MAX_FIELDS) throw fail("", `there must be at most ${MAX_FIELDS} fields`, "more");
          const below = group.group(name);
          if (below !== undefined) {
            if (below.nxClass !== "NXdata" && !asked.has(path) && depth < MAX_DEPTH) {
              walk(below, `${path}/`, depth + 1);
            }
            continue;
          }
          const shape = group.shape(name);
          if (asked.has(path) || shape === undefined || shape.some((length) => length !== 1)) continue;
          const value = single(group.value(name));
          const text = value === undefined ? "" : oneLine(String(value));
          if (text === "" || text === "NaN") continue;
          const units = group.attribute(name, "units");
          found.push([oneLine(path), typeof units === "string" ? oneLine(`${text} ${units}`) : text]);
        }
      };
      walk(entry, "", 0);
      return found;
    },
  };
}

/** A text or number from a value or an array of one. */
function single(value: Hdf5Value | undefined): string | number | undefined {
  if (value === undefined || typeof value === "string") return value;
  return value.length === 1 ? value[0] : undefined;
}

function oneLine(text: string): string {
  return text.replaceAll(/\s*[\r\n]+\s*/g, " ").trim();
}

function shown(value: Hdf5Value): string {
  return typeof value === "string" ? value : value.slice(0, 5).join(", ");
}

/** `date` and `hours ahead of GMT` as ISO 14976 files have them, from an ISO 8601 time. */
function dateEntries(time: string | undefined): (readonly [string, string])[] {
  if (time === undefined) return [];
  const parts = /^(\d+-\d\d-\d\d)[T ](\d\d:\d\d:\d\d(?:\.\d+)?)(Z|([+-])(\d\d):?(\d\d))?$/.exec(time);
  if (parts === null) return [["start_time", time]];
  const [, day, clock, zone, sign, hours, minutes] = parts;
  const ahead = zone === "Z" ? 0 : (sign === "-" ? -1 : 1) * (Number(hours) + Number(minutes) / 60);
  return [
    ["date", `${day} ${clock}`],
    ...(zone === undefined ? [] : [["hours ahead of GMT", String(ahead + 0)] as const]),
  ];
}

/** Units of a rate, as files write it. */
const RATE_UNITS = /^(c|cts|counts?)(\/s(ec|econd)?| s\^?-1|_per_second| per second)$|^cps$|^1\/s$|^Hz$/i;

type Spectrum = Pick<SpectrumRegion, "energyKind" | "energiesEv" | "counts" | "columns"> & {
  /** `c/s` for a rate, as in ISO 14976; null for counts. */
  readonly countsUnits: string | null;
};

function readData(entry: Hdf5Group, path: string, fail: Fail): Spectrum {
  const names = (attribute: string): string[] => {
    const value = entry.attribute(path, attribute);
    return typeof value === "string" ? [value] : value instanceof Float64Array ? [] : [...value ?? []];
  };
  const at = (name: string) => `${path}/${name}`;
  const array = (name: string): Float64Array => {
    const shape = entry.shape(at(name));
    if (shape === undefined) throw fail(at(name), "it must be there", "missing");
    if (shape.length !== 1) {
      throw fail(at(name), "spectra must have one axis, the energy", `${shape.length} axes`);
    }
    if (shape[0] > MAX_POINTS) throw fail(at(name), `there must be at most ${MAX_POINTS} points`, shape[0]);
    const value = entry.value(at(name));
    if (!(value instanceof Float64Array)) throw fail(at(name), "it must hold numbers", "something else");
    return value;
  };

  const [signal = "data"] = names("signal");
  const counts = array(signal);
  const [axis = "energy"] = names("axes").filter((name) => name !== ".");
  const energies = array(axis);
  const units = entry.attribute(at(axis), "units");
  if (units !== "eV") throw fail(at(axis), 'its units must be "eV"', units ?? "missing");
  if (energies.length !== counts.length) {
    throw fail(at(axis), `there must be ${counts.length} energies as there are counts`, energies.length);
  }
  if (counts.length === 0) throw fail(at(signal), "there must be a point", 0);
  const wrongEnergy = energies.some((value) => !Number.isFinite(value)) ? -1 : firstOutOfOrder(energies);
  if (wrongEnergy >= 0) {
    const value = `${energies[wrongEnergy]} after ${energies[wrongEnergy - 1]}`;
    throw fail(at(axis), "energies must all ascend or all descend", value);
  }
  const unknown = energies.find((value) => !Number.isFinite(value));
  if (unknown !== undefined) throw fail(at(axis), "energies must be finite", unknown);
  const wrongCount = counts.find((value) => !(value >= 0 && value < Infinity));
  if (wrongCount !== undefined) throw fail(at(signal), "counts must be finite and >= 0", wrongCount);

  const isDescending = energies[0] > energies[energies.length - 1];
  const columns = names("auxiliary_signals").flatMap((name) => {
    const shape = entry.shape(at(name));
    if (shape !== undefined && (shape.length !== 1 || shape[0] !== counts.length)) return [];
    const longName = entry.attribute(at(name), "long_name");
    return [[typeof longName === "string" ? oneLine(longName) : name, array(name)] as const];
  });
  const kind = entry.attribute(at(axis), "type");
  const countsUnits = entry.attribute(at(signal), "units");
  return {
    energyKind: kind === "kinetic" || kind === "binding" ? kind : "unknown",
    energiesEv: ascending(energies, isDescending),
    counts: ascending(counts, isDescending),
    columns: Object.fromEntries(columns.map(([name, values]) => [name, ascending(values, isDescending)])),
    countsUnits: typeof countsUnits !== "string" || /^(counts?|1|)$/i.test(countsUnits)
      ? null
      : RATE_UNITS.test(countsUnits)
      ? "c/s"
      : countsUnits,
  };
}
