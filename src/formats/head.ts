import { cannot, editDistance, InputError, type Problem } from "../base/mod.ts";
import type { SpectrumRegion } from "./region.ts";
import { numberRule } from "./text.ts";

/** What a region says about itself, without its numbers by energy. */
export type RegionFacts = Omit<SpectrumRegion, "energyKind" | "energiesEv" | "counts" | "columns">;

/** Metadata keys with a number, and the rule for it beyond being one. */
const NUMERIC_KEYS: Readonly<Record<string, readonly [string, (value: number) => boolean]>> = {
  photon_energy_ev: ["must be > 0 eV", (value) => value > 0],
  bias_v: ["must be finite", Number.isFinite],
  analyzer_work_function_ev: ["must be finite", Number.isFinite],
  pass_energy_ev: ["must be > 0 eV", (value) => value > 0],
  dwell_s: ["must be > 0 s", (value) => value > 0],
  sweeps: ["must be a whole number >= 1", (value) => Number.isInteger(value) && value >= 1],
  acceptance_half_angle_deg: ["must be in > 0..89 degrees", (value) => value > 0 && value <= 89],
  temperature_k: ["must be >= 0 K", (value) => value >= 0],
};

/** Keys that fill a field of the region; the other keys are metadata. */
const FIELD_KEYS = [
  "region",
  "species",
  "photon_energy_ev",
  "bias_v",
  "as_recorded",
  "analyzer_work_function_ev",
  "pass_energy_ev",
  "dwell_s",
  "sweeps",
];

/** Keys with a meaning: those of fields, those with a rule, and metadata that a fit reads. */
const KNOWN_KEYS = [
  ...new Set([
    ...FIELD_KEYS,
    ...Object.keys(NUMERIC_KEYS),
    "resolution_fwhm_ev",
    "dead_time_s",
    "simulated",
  ]),
];
/** From this length on a key with two wrong letters is taken for a misspelled one (chosen). */
const LONG_KEY = 10;

/**
 * The known key that another one probably was meant to be, or undefined: one letter wrong, missing or too much, two
 * exchanged, or any two of a long key. Numbers behind it, as in `bias_v (2)`, are further away.
 */
function misspelled(key: string): string | undefined {
  const word = key.toLowerCase();
  const letters = (text: string): string => [...text].sort().join("");
  return KNOWN_KEYS.includes(word) ? undefined : KNOWN_KEYS.find((known) => {
    const distance = editDistance(word, known);
    return distance <= 1 ||
      (distance === 2 && (known.length >= LONG_KEY || letters(word) === letters(known)));
  });
}

/** Entries as metadata: a key that is a field's or that differs from another in case only gets a number behind it. */
export function metadataOf(entries: Iterable<readonly [string, string]>): Record<string, string> {
  const taken = new Set(FIELD_KEYS);
  return Object.fromEntries(
    Array.from(entries, ([key, value]) => {
      let name = key;
      for (let n = 2; taken.has(name.toLowerCase()); n++) name = `${key} (${n})`;
      taken.add(name.toLowerCase());
      return [name, value];
    }),
  );
}

/** The key and value of `key: value`, or undefined; a key in quotes, as in JSON, may hold a colon. */
export function keyedValue(content: string): readonly [key: string, value: string] | undefined {
  const quoted = /^("(?:[^"\\]|\\.)*")\s*:(?:\s+(.*))?$/s.exec(content);
  if (quoted !== null) {
    try {
      return [JSON.parse(quoted[1]), quoted[2] ?? ""];
    } catch {
      // Not a text of JSON: the quotes belong to the key.
    }
  }
  const keyed = /^([^:]+?)\s*:(?:\s+(.*))?$/s.exec(content);
  return keyed === null ? undefined : [keyed[1], keyed[2] ?? ""];
}

/** A key and a value as the line that {@link HeadReader} reads; in quotes where the key alone would be misread. */
export function keyLine(key: string, value: string): string {
  const name = /^["#]|:/.test(key) || misspelled(key) !== undefined ? JSON.stringify(key) : key;
  return `# ${name}: ${value}`.trimEnd();
}

/** Lines that say all {@link RegionFacts}; what is null, empty or the default is left out. */
export function headLines(facts: RegionFacts): string[] {
  const fields: readonly (readonly [string, string | number | null])[] = [
    ["region", facts.label || null],
    ["species", facts.species || null],
    ["photon_energy_ev", facts.photonEnergyEv],
    ["bias_v", facts.biasV],
    ["as_recorded", facts.asRecorded === (facts.biasV !== null) ? null : String(facts.asRecorded)],
    ["analyzer_work_function_ev", facts.analyzerWorkFunctionEv],
    ["pass_energy_ev", facts.passEnergyEv],
    ["dwell_s", facts.dwellS],
    ["sweeps", facts.sweeps],
  ];
  return [
    ...fields.flatMap(([key, value]) => value === null ? [] : [keyLine(key, String(value))]),
    ...Object.entries(facts.metadata).map(([key, value]) => keyLine(key, value)),
    ...facts.comments.map((comment) => `## ${comment}`.trimEnd()),
  ];
}

/** Reads lines that begin with `#`: `# key: value`, `## comment`, and `# comment` without a colon. */
export interface HeadReader {
  /** Takes a line; `false` when it does not begin with `#`. */
  take(line: string, lineNumber: number): boolean;
  /** What the lines said. */
  facts(): RegionFacts;
}

/**
 * Starts reading.
 *
 * @param problems Where to report what breaks a rule.
 * @returns The reader.
 */
export function headReader(problems: ProblemList): HeadReader {
  const comments: string[] = [];
  const metadata = new Map<string, string>();
  const seen = new Set<string>();
  const fields = new Map<string, string>();
  const numbers = new Map<string, number>();

  const check = (key: string, known: string, value: string, line: number): void => {
    if (known === "as_recorded" && value !== "true" && value !== "false") {
      problems.add(line, `read "${key}"`, "it must be true or false", value);
    }
    if (!Object.hasOwn(NUMERIC_KEYS, known)) return;
    const [rangeRule, isInRange] = NUMERIC_KEYS[known];
    const rule = numberRule(value) ?? (isInRange(Number(value)) ? undefined : rangeRule);
    if (rule === undefined) numbers.set(known, Number(value));
    else problems.add(line, `read "${key}"`, `it ${rule}`, value);
  };
  return {
    take(line, lineNumber) {
      const text = line.trim();
      if (!text.startsWith("#")) return false;
      if (text.startsWith("##")) {
        comments.push(text.slice(2).trim());
        return true;
      }
      const content = text.slice(1).trim();
      const keyed = keyedValue(content);
      if (keyed === undefined) {
        if (content !== "") comments.push(content);
        return true;
      }
      const [key, value] = keyed;
      const known = key.toLowerCase();
      const meant = content.startsWith('"') ? undefined : misspelled(key);
      if (meant !== undefined) {
        problems.add(
          lineNumber,
          "read the key",
          `it must be a known one (did you mean ${meant}?) or stand in quotes if it is meant as it is`,
          key,
        );
      }
      if (seen.has(known)) {
        problems.add(lineNumber, `read "${key}"`, "every key must be given once", content);
      }
      seen.add(known);
      if (FIELD_KEYS.includes(known)) fields.set(known, value);
      else metadata.set(key, value);
      check(key, known, value, lineNumber);
      return true;
    },
    facts() {
      const biasV = numbers.get("bias_v") ?? null;
      const asRecorded = fields.get("as_recorded");
      return {
        label: fields.get("region") ?? "",
        species: fields.get("species") ?? "",
        photonEnergyEv: numbers.get("photon_energy_ev") ?? null,
        biasV,
        asRecorded: asRecorded === undefined ? biasV !== null : asRecorded === "true",
        analyzerWorkFunctionEv: numbers.get("analyzer_work_function_ev") ?? null,
        passEnergyEv: numbers.get("pass_energy_ev") ?? null,
        dwellS: numbers.get("dwell_s") ?? null,
        sweeps: numbers.get("sweeps") ?? null,
        comments,
        metadata: Object.fromEntries(metadata),
      };
    },
  };
}

const MAX_PROBLEMS = 10;

/** Collects what is wrong with a file: the first ten problems, and how many more there are. */
export interface ProblemList {
  /** Line 0 stands for the whole file. */
  add(line: number, action: string, rule: string, value: unknown): void;
  /** Throws when there is any. */
  throwIfAny(): void;
}

/** An empty list for a file. */
export function problemList(fileName: string): ProblemList {
  const problems: Problem[] = [];
  let more = 0;
  return {
    add(line, action, rule, value) {
      if (problems.length === MAX_PROBLEMS) more++;
      else {
        const place = line === 0 ? fileName : `${fileName}:${line}`;
        problems.push({ place, message: cannot(action, rule, value) });
      }
    },
    throwIfAny() {
      if (more > 0) problems.push({ place: fileName, message: `and ${more} more` });
      if (problems.length > 0) throw new InputError(problems);
    },
  };
}
