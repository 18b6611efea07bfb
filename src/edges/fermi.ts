import { type FitParameter, minimizePoisson } from "../fit/mod.ts";
import { broadenedFermiEdge } from "../spectrum/mod.ts";
import { type FittedEdge, fittedEdge } from "./cutoff.ts";
import { type EdgeCandidate, meanCounts } from "./locate.ts";
import { ghosts, type Satellite } from "./satellites.ts";

/** What is known about the Fermi edge before the fit. */
export interface FermiOptions {
  /** kT of the sample, eV, >= 0. */
  readonly thermalEnergyEv: number;
  /** Weaker lines of the lamp. */
  readonly satellites: readonly Satellite[];
  /** Start value of the Gaussian standard deviation, eV. */
  readonly startSigmaEv: number;
}

/** A Fermi edge with the height of its step, to judge whether it is one. */
export interface FittedFermiEdge extends FittedEdge {
  /** Counts of the step at the edge. */
  readonly stepCounts: number;
  /** Standard error of that. */
  readonly stepStandardError: number;
}

/** Window about the edge, eV: linear states below, background above. */
const BELOW_EV = 0.6;
const ABOVE_EV = 0.6;
/** How far above the last satellite's edge the window reaches when the data do. */
const BEYOND_SATELLITE_EV = 0.4;

/**
 * Fits a Fermi edge: linear density of states times Fermi-Dirac at known temperature, folded with a Gaussian, on a
 * background, with satellites as scaled copies of the measured spectrum where the data reach far enough, and a sloping
 * background instead where they do not.
 *
 * @param energiesEv All energies, ascending, eV.
 * @param counts All counts.
 * @param candidate Where to look.
 * @param options What is known.
 * @returns The fit, or null when fewer than 12 channels are in the window.
 */
export function fitFermiEdge(
  energiesEv: Float64Array,
  counts: Float64Array,
  candidate: EdgeCandidate,
  options: FermiOptions,
): FittedFermiEdge | null {
  const center = candidate.energyEv;
  const reach = Math.max(0, ...options.satellites.map((satellite) => satellite.shiftEv));
  const last = energiesEv[energiesEv.length - 1];
  const withSatellites = reach > 0 && last >= center + reach + BEYOND_SATELLITE_EV &&
    energiesEv[0] <= center - BELOW_EV - reach;
  const low = center - BELOW_EV;
  const high = center + (withSatellites ? reach + 2 * BEYOND_SATELLITE_EV : ABOVE_EV);
  const from = energiesEv.findIndex((energy) => energy >= low);
  const past = energiesEv.findIndex((energy) => energy > high);
  const window = energiesEv.slice(from, past < 0 ? undefined : past);
  const data = counts.slice(from, past < 0 ? undefined : past);
  if (window.length < 12) return null;

  const stepEv = (window[window.length - 1] - window[0]) / (window.length - 1);
  const above = meanCounts(window, data, center + 0.3, center + ABOVE_EV) || 0;
  const below = meanCounts(window, data, center - 0.4, center - 0.2) || above;
  const height = Math.max(1, below - above);
  const copied = withSatellites
    ? ghosts(options.satellites, energiesEv, counts, window)
    : { parameters: [], copies: [] };
  const floor = meanCounts(window, data, high - BEYOND_SATELLITE_EV, high);
  const parameters: FitParameter[] = [
    { name: "position", start: center, lower: window[0], upper: window[window.length - 1], scale: 0.05 },
    {
      name: "sigma",
      start: options.startSigmaEv,
      lower: 0.15 * stepEv,
      upper: 1,
      scale: options.startSigmaEv,
    },
    { name: "states", start: height, lower: 0, scale: height },
    { name: "statesSlope", start: 0, scale: height },
    {
      name: "base",
      start: withSatellites ? Math.max(floor, 0.1) : above,
      lower: 0,
      scale: Math.max(above, 1),
    },
    ...(withSatellites ? copied.parameters : [{ name: "baseSlope", start: 0, scale: Math.max(above, 1) }]),
  ];
  const shape = { occupation: 0, slopeEv: 0 };
  const model = (p: Float64Array, out: Float64Array): void => {
    const edgeShape = broadenedFermiEdge(options.thermalEnergyEv, p[1]);
    for (let i = 0; i < window.length; i++) {
      const x = window[i] - p[0];
      edgeShape(x, shape);
      out[i] = p[2] * shape.occupation + p[3] * shape.slopeEv + p[4];
      if (!withSatellites) out[i] += p[5] * x;
      for (let s = 0; s < copied.copies.length; s++) out[i] += p[5 + s] * copied.copies[s][i];
    }
  };
  const fit = minimizePoisson({ parameters, model, data });
  const edge = fittedEdge(fit, window, data, {
    stepEv,
    vital: ["position"],
    model: `linear states x Fermi-Dirac, Gaussian response, ${
      withSatellites ? `background and ${copied.copies.length} satellites` : "sloping background"
    }`,
  });
  return { ...edge, stepCounts: fit.values[2], stepStandardError: fit.standardErrors[2] };
}
