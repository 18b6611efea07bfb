import type { Estimate } from "../base/mod.ts";
import type { EdgeRegion, FittedEdge } from "../edges/mod.ts";
import { type FigureEdge, formatEstimate, renderSvg, spectrumFigure } from "../report/mod.ts";
import { stem } from "./files.ts";
import type { FitRun } from "./fit.ts";
import { shortEv } from "./fit_text.ts";

/**
 * The regions that a fit used, or all when it used none, on the kinetic axis of its edges.
 *
 * @param run The fit.
 * @returns Regions, energies ascending.
 */
export function regionsOnFitAxis({ regions, result }: FitRun): EdgeRegion[] {
  const onFitAxis = (region: EdgeRegion): EdgeRegion => {
    if (result.inputs.axis.kind === "kinetic") return region;
    const photonEnergyEv = result.inputs.photonEnergyEv.value;
    return {
      ...region,
      energiesEv: region.energiesEv.map((energy) => photonEnergyEv - energy).reverse(),
      counts: region.counts.slice().reverse(),
    };
  };
  const isUsed = (region: EdgeRegion): boolean =>
    result.inputs.regions.some((use) => use.file === region.file && use.region === region.label);
  const used = regions.filter(isUsed);
  return (used.length > 0 ? used : regions).map(onFitAxis);
}

/**
 * The figure of a fit.
 *
 * @param run The fit.
 * @param title Title of the figure.
 * @returns Text of an SVG file.
 */
export function fitSvg(run: FitRun, title: string): Promise<string> {
  const { result } = run;
  const shown = regionsOnFitAxis(run);
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
      label: shown.length > 1 ? region.label || stem(region.file) : run.simulated ? "simulated" : "measured",
      curve: region,
    })),
    expected: null,
    edges: [
      ...edge("secondary cutoff", result.cutoffFit, result.cutoffEv),
      ...(result.fermiEdgeEv
        ? edge("Fermi edge", result.upperFit, result.fermiEdgeEv)
        : edge("valence-band edge", result.upperFit, result.upperFit?.positionEv ?? null)),
    ],
  }));
}

function edge(name: string, fit: FittedEdge | null, position: Estimate | null): FigureEdge[] {
  if (fit === null || position === null || !fit.converged) return [];
  return [{
    name,
    positionEv: position.value,
    standardUncertaintyEv: position.standardUncertainty,
    data: fit,
    fitted: { energiesEv: fit.energiesEv, counts: fit.fittedCounts },
  }];
}
