import { cannot, type Estimate, InputError, type Notice, VERSION } from "../base/mod.ts";
import { nearestLine } from "../data/mod.ts";
import {
  type EdgeRegion,
  type FittedEdge,
  type MeasureOptions,
  measureWorkFunction,
  type WorkFunctionResult,
} from "../edges/mod.ts";
import { readSpectrumFile, type SpectrumRegion } from "../formats/mod.ts";
import { formatEstimate, renderSvg, spectrumFigure } from "../report/mod.ts";
import { readBytes, stem } from "./files.ts";

/** What the user states on the command line. */
export type FitStatements = Omit<MeasureOptions, "knownLine"> & {
  /** Names of the energy and the counts column of a CSV file. */
  readonly columns?: readonly [string, string];
};

/** A fit with the regions it was given. */
export interface FitRun {
  /** All regions read. */
  readonly regions: readonly EdgeRegion[];
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
  for (const path of paths) {
    const file = readSpectrumFile(await readBytes(path), path, columns ? { columns } : {});
    for (const region of file.regions) regions.push(edgeRegion(region, path, file.format === "csv"));
  }
  return { regions, result: measureWorkFunction(regions, { ...options, knownLine: nearestLine }) };
}

/** Our own CSV defines the sign of the bias and records energies as the analyzer does; other formats do not say. */
function edgeRegion(region: SpectrumRegion, file: string, ownFormat: boolean): EdgeRegion {
  const number = (key: string): number | null => {
    const text = region.metadata[key];
    return text === undefined || text === "" || !Number.isFinite(Number(text)) ? null : Number(text);
  };
  return {
    label: region.label,
    file,
    energyKind: region.energyKind,
    energiesEv: region.energiesEv,
    counts: poissonCounts(region, file),
    photonEnergyEv: region.photonEnergyEv,
    biasV: region.biasV,
    asRecorded: ownFormat && region.biasV !== null,
    analyzerWorkFunctionEv: region.analyzerWorkFunctionEv,
    acceptanceHalfAngleDeg: number("acceptance_half_angle_deg"),
    temperatureK: number("temperature_k"),
  };
}

/** Counts; a rate (ISO 14976 unit `c/s`) times the time it was collected for. */
function poissonCounts(region: SpectrumRegion, file: string): Float64Array {
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
  const { energiesEv, fittedCounts: _, ...rest } = edge;
  return { ...rest, windowEv: [energiesEv[0], energiesEv[energiesEv.length - 1]] };
}

/** A warning as one line. */
export function noticeText(notice: Notice): string {
  return notice.place === "" ? notice.message : `${notice.message} (at ${notice.place})`;
}

/**
 * The answer as text for a terminal.
 *
 * @param result The answer.
 * @returns Lines, at most 80 columns for the table.
 */
export function fitText(result: WorkFunctionResult): string {
  const row = (name: string, estimate: WorkFunctionResult["workFunctionEv"]): string[] =>
    estimate === null ? [] : [`  ${name.padEnd(26)}${formatEstimate(estimate, "eV")}`];
  const { inputs } = result;
  return [
    `Verdict: ${result.verdict}`,
    ...result.reasons.map((reason) => `  because ${reason}`),
    ...row("work function", result.workFunctionEv),
    ...row("maximum kinetic energy", result.maxKineticEnergyEv),
    ...row("ionization energy", result.ionizationEnergyEv),
    ...row("valence-band maximum", result.valenceBandMaximumEv),
    ...row("secondary cutoff", result.cutoffEv),
    ...row("Fermi edge", result.fermiEdgeEv),
    "Used:",
    ...inputs.regions.map((use) =>
      `  ${use.file}${use.region ? ` region ${use.region}` : ""}, ${use.rangeEv[0]} to ${
        use.rangeEv[1]
      } eV: ${use.use}`
    ),
    `  photon energy ${shortEv(inputs.photonEnergyEv.value)}, ${inputs.photonEnergyEv.from}`,
    `  bias ${inputs.biasV.value === null ? "" : `${inputs.biasV.value} V, `}${inputs.biasV.from}`,
    `  ${inputs.axis.kind} energy axis, ${inputs.axis.from}; temperature ${inputs.temperatureK.value} K, ${inputs.temperatureK.from}`,
    `  Fermi level ${
      inputs.fermiLevelEv.value === null ? "" : `at ${inputs.fermiLevelEv.value.toFixed(3)} eV, `
    }${inputs.fermiLevelEv.from}`,
    ...(result.budget.length === 0 ? [] : ["Uncertainty budget (k = 1):"]),
    ...result.budget.map((term) =>
      `  ${term.name.padEnd(36)}${(1000 * term.standardUncertaintyEv).toFixed(1).padStart(7)} meV`
    ),
    ...result.warnings.map((warning) => `Warning: ${noticeText(warning)}`),
  ].join("\n");
}

/** An energy for people: at most five decimals. */
function shortEv(energyEv: number): string {
  return `${Number(energyEv.toFixed(5))} eV`;
}

/**
 * The figure of a fit.
 *
 * @param run The fit.
 * @param title Title of the figure.
 * @returns Text of an SVG file.
 */
export function fitSvg({ regions, result }: FitRun, title: string): Promise<string> {
  const onFitAxis = (region: EdgeRegion): EdgeRegion => {
    if (result.inputs.axis.kind === "kinetic") return region;
    const photonEnergyEv = result.inputs.photonEnergyEv.value;
    return {
      ...region,
      energiesEv: region.energiesEv.map((energy) => photonEnergyEv - energy).reverse(),
      counts: region.counts.slice().reverse(),
    };
  };
  const usesOf = (region: EdgeRegion) =>
    result.inputs.regions.filter((use) => use.file === region.file && use.region === region.label);
  const used = regions.filter((region) => usesOf(region).length > 0).map(onFitAxis);
  const shown = used.length > 0 ? used : regions.map(onFitAxis);
  const edge = (name: string, purpose: RegExp, fit: FittedEdge | null, position: Estimate | null) => {
    if (fit === null || position === null || !fit.converged) return [];
    const first = fit.energiesEv[0];
    const owner = used.find((region) =>
      usesOf(region).some(({ use }) => purpose.test(use)) && region.energiesEv.includes(first)
    );
    if (owner === undefined) return [];
    const from = owner.energiesEv.indexOf(first);
    return [{
      name,
      positionEv: position.value,
      standardUncertaintyEv: position.standardUncertainty,
      data: { energiesEv: fit.energiesEv, counts: owner.counts.slice(from, from + fit.energiesEv.length) },
      fitted: { energiesEv: fit.energiesEv, counts: fit.fittedCounts },
    }];
  };
  const { workFunctionEv, ionizationEnergyEv, inputs } = result;
  return renderSvg(spectrumFigure({
    title,
    subtitle: [
      [
        workFunctionEv ? `W = ${formatEstimate(workFunctionEv, "eV")}` : "no work function",
        ...(result.valenceBandMaximumEv && ionizationEnergyEv
          ? [`ionization energy ${formatEstimate(ionizationEnergyEv, "eV")}`]
          : []),
      ].join(", "),
      `verdict: ${result.verdict}, h\u03bd = ${shortEv(inputs.photonEnergyEv.value)}`,
    ],
    axisTitle: inputs.axis.kind === "kinetic"
      ? "Kinetic energy on the axis of the file / eV"
      : "h\u03bd \u2212 binding energy / eV",
    measured: shown.map((region) => ({
      label: shown.length > 1 ? region.label || stem(region.file) : "",
      curve: region,
    })),
    expected: null,
    edges: [
      ...edge("secondary cutoff", /cutoff/, result.cutoffFit, result.cutoffEv),
      ...(result.fermiEdgeEv
        ? edge("Fermi edge", /Fermi/, result.upperFit, result.fermiEdgeEv)
        : edge("valence-band edge", /valence/, result.upperFit, result.upperFit?.positionEv ?? null)),
    ],
  }));
}
