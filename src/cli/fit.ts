import { cannot, InputError, VERSION } from "../base/mod.ts";
import { nearestLine } from "../data/mod.ts";
import {
  type EdgeRegion,
  type FittedEdge,
  type MeasureOptions,
  measureWorkFunction,
  type WorkFunctionResult,
} from "../edges/mod.ts";
import { readSpectrumFile, type SpectrumRegion } from "../formats/mod.ts";
import { readBytes } from "./files.ts";

/** The ramp of a cutoff widens with the tangent of the acceptance half-angle, which has no value at 90 degrees. */
export const MOST_ACCEPTANCE_DEG = 89;

/** What the user states on the command line. */
export type FitStatements = Omit<MeasureOptions, "knownLine"> & {
  /** Names of the energy and the counts column of a CSV file. */
  readonly columns?: readonly [string, string];
};

/** A fit with the regions it was given. */
export interface FitRun {
  /** All regions read. */
  readonly regions: readonly EdgeRegion[];
  /** `true` when every region says that it was simulated. */
  readonly simulated: boolean;
  /** Titles that the files give (metadata `title`), each once, joined by commas; empty unless every region has one. */
  readonly title: string;
  /** The answer. */
  readonly result: WorkFunctionResult;
}

/**
 * Reads files and fits them.
 *
 * @param paths One or more files of one measurement.
 * @param statements What the user states.
 * @returns The answer.
 */
export async function fitFiles(paths: readonly string[], statements: FitStatements): Promise<FitRun> {
  const { columns, ...options } = statements;
  const regions: EdgeRegion[] = [];
  const titles: string[] = [];
  let simulated = true;
  for (const path of paths) {
    const file = await readSpectrumFile(await readBytes(path), path, columns ? { columns } : {});
    for (const region of file.regions) {
      regions.push(edgeRegion(region, path));
      titles.push(region.metadata.title ?? "");
      simulated &&= region.metadata.simulated === "true";
    }
  }
  const title = titles.includes("") ? "" : [...new Set(titles)].join(", ");
  const result = measureWorkFunction(regions, { ...options, knownLine: nearestLine });
  return { regions, simulated, title, result };
}

/** What a fit needs of a region, with the facts that are metadata in the file. */
function edgeRegion(region: SpectrumRegion, file: string): EdgeRegion {
  /** A number that the file gives, which must be in a range. */
  const number = (key: string, rule: string, isRight: (value: number) => boolean): number | null => {
    const text = region.metadata[key] ?? "";
    if (text === "") return null;
    if (Number.isFinite(Number(text)) && isRight(Number(text))) return Number(text);
    throw new InputError([{
      place: region.label === "" ? file : `${file}, region ${region.label}`,
      message: cannot("fit spectrum", `${key} ${rule}`, text),
    }]);
  };
  return {
    label: region.label,
    file,
    energyKind: region.energyKind,
    energiesEv: region.energiesEv,
    counts: poissonCounts(region, file),
    photonEnergyEv: region.photonEnergyEv,
    biasV: region.biasV,
    asRecorded: region.asRecorded,
    analyzerWorkFunctionEv: region.analyzerWorkFunctionEv,
    acceptanceHalfAngleDeg: number(
      "acceptance_half_angle_deg",
      `must be in 0..${MOST_ACCEPTANCE_DEG} degrees`,
      (value) => value >= 0 && value <= MOST_ACCEPTANCE_DEG,
    ),
    temperatureK: number("temperature_k", "must be >= 0 K", (value) => value >= 0),
    resolutionFwhmEv: number(
      "resolution_fwhm_ev",
      "must be > 0 eV, or left out where unknown",
      (value) => value > 0,
    ),
    deadTimeS: number("dead_time_s", "must be >= 0 s", (value) => value >= 0),
    countingTimeS: region.dwellS === null || region.sweeps === null ? null : region.dwellS * region.sweeps,
  };
}

/** Counts; a rate (ISO 14976 unit `c/s`) times the time it was collected for. */
export function poissonCounts(region: SpectrumRegion, file: string): Float64Array {
  if (region.metadata["counts units"] !== "c/s") return region.counts;
  const { dwellS, sweeps } = region;
  if (dwellS === null || sweeps === null) {
    throw new InputError([{
      place: `${file}, region ${region.label}`,
      message: cannot(
        "turn rates into counts",
        "collection time and number of scans must be in the file when its unit is c/s",
        `${dwellS ?? "unknown"} s, ${sweeps ?? "unknown"} scans`,
      ),
    }]);
  }
  return region.counts.map((rate) => rate * dwellS * sweeps);
}

/**
 * The answer as one JSON object with the promised keys, curves left out.
 *
 * @param result The answer.
 * @returns A plain object.
 */
export function fitJson(result: WorkFunctionResult): Record<string, unknown> {
  const { cutoffFit, upperFit, warnings, ...rest } = result;
  return {
    ...rest,
    warnings: warnings.map(noticeText),
    edges: { cutoff: edgeJson(cutoffFit), upper: edgeJson(upperFit) },
    version: VERSION,
  };
}

function edgeJson(edge: FittedEdge | null): Record<string, unknown> | null {
  if (edge === null) return null;
  const { energiesEv, fittedCounts: _fitted, counts: _counts, bootstrap, ...rest } = edge;
  const { positionsEv, ...summary } = bootstrap ?? { positionsEv: [] };
  return {
    ...rest,
    bootstrap: bootstrap === null ? null : { replicates: positionsEv.length, ...summary },
    windowEv: [energiesEv[0], energiesEv[energiesEv.length - 1]],
  };
}

/** A warning as one line. */
export function noticeText({ message, place }: WorkFunctionResult["warnings"][number]): string {
  return place === "" ? message : `${message} (at ${place})`;
}
