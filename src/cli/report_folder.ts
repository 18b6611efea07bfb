import { readdir, stat } from "node:fs/promises";
import { basename, join } from "node:path";
import { z } from "zod";
import { cannot, InputError, VERSION } from "../base/mod.ts";
import { decodeText, readSpectrumCsv, type SpectrumRegion } from "../formats/mod.ts";
import { FileError, readBytes } from "./files.ts";

const estimate = z.object({ value: z.number(), standardUncertainty: z.number().nonnegative() });
const origin = z.object({ value: z.number().nullable(), from: z.string() });

/** Contents of `fit.json` that a report uses. */
const fitSchema = z.object({
  version: z.string(),
  workFunctionEv: estimate.nullable(),
  cutoffEv: estimate.nullable(),
  fermiEdgeEv: estimate.nullable(),
  valenceBandMaximumEv: estimate.nullable(),
  valenceBandMaximumLogarithmicEv: estimate.nullable(),
  ionizationEnergyEv: estimate.nullable(),
  maxKineticEnergyEv: estimate.nullable(),
  verdict: z.enum(["good", "doubtful", "failed"]),
  reasons: z.array(z.string()),
  warnings: z.array(z.string()),
  inputs: z.object({
    regions: z.array(z.object({
      file: z.string(),
      region: z.string(),
      rangeEv: z.tuple([z.number(), z.number()]),
      use: z.string(),
    })),
    axis: z.object({ kind: z.enum(["kinetic", "binding"]), from: z.string() }),
    photonEnergyEv: z.object({ value: z.number(), from: z.string() }),
    biasV: origin,
    analyzerWorkFunctionEv: origin,
    temperatureK: origin,
    acceptanceHalfAngleDeg: origin,
    resolutionFwhmEv: origin,
    scaleGain: origin,
    fermiLevelEv: origin,
  }),
  conventions: z.object({
    rows: z.array(z.object({ name: z.string(), uncorrectedEv: estimate, correctedEv: estimate })),
  }).nullable(),
  budget: z.array(z.object({
    name: z.string(),
    standardUncertaintyEv: z.number().nonnegative(),
    sensitivities: z.record(z.string(), z.number()),
    evaluation: z.string(),
    note: z.string(),
  })),
  expanded: z.record(z.string(), z.object({ expandedEv: z.number(), coverageFactorFor95: z.number() })),
  bootstrapWorkFunctionEv: estimate.nullable(),
});

/** Contents of `result.json` that a report uses. */
const resultSchema = z.object({
  version: z.string(),
  scenarioHash: z.string(),
  title: z.string(),
  seed: z.number(),
  replicate: z.number(),
  histories: z.number(),
  complete: z.boolean(),
  wantedRelativeStandardError: z.number().nullable(),
  worstRelativeStandardError: z.number(),
  truth: z.object({
    workFunctionEv: z.number(),
    workFunctionSource: z.string(),
    maxKineticEnergyEv: z.number(),
    cutoffEv: z.number(),
    fermiEdgeEv: z.number(),
  }),
  patches: z.array(z.object({ workFunctionEv: z.number() })),
  warnings: z.array(z.object({ message: z.string(), place: z.string() })),
  scenario: z.record(z.string(), z.unknown()),
});

/** Contents of `fit.json`. */
export type FitFile = z.infer<typeof fitSchema>;
/** Contents of `result.json`. */
export type ResultFile = z.infer<typeof resultSchema>;

/** What `simulate`, `fit` or `demo` left in a folder. */
export interface ResultFolder {
  /** `result.json`, or null. */
  readonly result: ResultFile | null;
  /** `fit.json`, or null. */
  readonly fit: FitFile | null;
  /** `spectrum.csv`, with its expected counts where it has them, or null. */
  readonly spectrum: { readonly region: SpectrumRegion; readonly expected: Float64Array | null } | null;
  /** Figures by name. */
  readonly svgs: readonly (readonly [name: string, svg: string])[];
  /** Files that do not belong together. */
  readonly doubts: readonly string[];
}

/** Larger drawings are left out of a page. */
const MOST_SVG_BYTES = 3e6;
/** Files written this long after one another may still be copies made together. */
const SAME_TIME_MS = 5000;

/**
 * Reads a folder of results.
 *
 * @param folder Folder that `simulate`, `fit` or `demo` wrote into.
 * @param leaveOut Names of drawings not to read.
 * @returns What is in it.
 * @throws {FileError} If it cannot be read.
 * @throws {InputError} If it holds neither result nor fit, or one that was not written by this version.
 */
export async function readResultFolder(folder: string, leaveOut: readonly string[]): Promise<ResultFolder> {
  let names: string[];
  try {
    names = (await readdir(folder)).toSorted();
  } catch (error) {
    throw new FileError("read", folder, error);
  }
  const text = async (name: string): Promise<string> =>
    decodeText(await readBytes(join(folder, name)), join(folder, name));
  const parsed = async <T>(name: string, schema: z.ZodType<T>): Promise<T | null> =>
    names.includes(name) ? parse(await text(name), join(folder, name), schema) : null;
  const [result, fit] = await Promise.all([
    parsed("result.json", resultSchema),
    parsed("fit.json", fitSchema),
  ]);
  if (result === null && fit === null) {
    const rule = "the folder must hold result.json or fit.json of simulate, fit or demo";
    throw new InputError([{ place: folder, message: cannot("report", rule, names.join(", ") || "nothing") }]);
  }
  const spectrum = names.includes("spectrum.csv")
    ? spectrumOf(await text("spectrum.csv"), join(folder, "spectrum.csv"))
    : null;
  const svgs: (readonly [string, string])[] = [];
  const doubts = disagreements(result, fit, spectrum?.region ?? null);
  if (fit !== null && spectrum !== null && isOwnSpectrum(fit)) {
    const [fitTime, spectrumTime] = await Promise.all(
      ["fit.json", "spectrum.csv"].map(async (name) => (await stat(join(folder, name))).mtimeMs),
    );
    if (spectrumTime > fitTime + SAME_TIME_MS) {
      doubts.push(
        "spectrum.csv was written after fit.json: the fit may be of an earlier spectrum; fit again",
      );
    }
  }
  for (const name of names.filter((one) => one.endsWith(".svg") && !leaveOut.includes(one))) {
    const svg = await text(name);
    if (svg.length <= MOST_SVG_BYTES) svgs.push([name, svg]);
    else doubts.push(`${name} is larger than ${MOST_SVG_BYTES / 1e6} MB and left out`);
  }
  return { result, fit, spectrum, svgs, doubts };
}

/** `true` when the fit was of the spectrum in the same folder. */
export function isOwnSpectrum({ inputs }: FitFile): boolean {
  return inputs.regions.length === 1 && basename(inputs.regions[0].file) === "spectrum.csv" &&
    inputs.axis.kind === "kinetic";
}

function parse<T>(text: string, file: string, schema: z.ZodType<T>): T {
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch (error) {
    if (!(error instanceof SyntaxError)) throw error;
    throw new InputError([{
      place: file,
      message: `Cannot report as the file must be JSON: ${error.message}`,
    }]);
  }
  const checked = schema.safeParse(value);
  if (checked.success) return checked.data;
  throw new InputError(checked.error.issues.map(({ path, message }) => ({
    place: file,
    message: `Cannot report as the file must be as version ${VERSION} writes it: /${
      path.join("/")
    }: ${message}`,
  })));
}

function spectrumOf(text: string, file: string): ResultFolder["spectrum"] {
  const [region] = readSpectrumCsv(text, file).regions;
  if (!/^[^#].*\bexpected_counts\b/m.test(text)) return { region, expected: null };
  const [other] = readSpectrumCsv(text, file, { columns: ["kinetic_energy_ev", "expected_counts"] }).regions;
  return { region, expected: other.counts };
}

function disagreements(
  result: ResultFile | null,
  fit: FitFile | null,
  region: SpectrumRegion | null,
): string[] {
  const doubts: string[] = [];
  const hash = region?.metadata.scenario_hash;
  if (result !== null && hash !== undefined && hash !== result.scenarioHash) {
    doubts.push(`spectrum.csv is of scenario ${hash}, result.json of ${result.scenarioHash}`);
  }
  if (fit !== null && region !== null && isOwnSpectrum(fit)) {
    const { rangeEv } = fit.inputs.regions[0];
    const energies = region.energiesEv;
    if (rangeEv[0] !== energies[0] || rangeEv[1] !== energies.at(-1)) {
      doubts.push(
        `spectrum.csv covers ${energies[0]} to ${energies.at(-1)} eV, the fitted one ${
          rangeEv.join(" to ")
        } eV: fit again`,
      );
    }
  }
  return doubts;
}
