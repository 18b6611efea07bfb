import type { Estimate } from "../base/mod.ts";
import { type FitParameter, minimizePoisson } from "../fit/mod.ts";
import { broadenedHinge } from "../spectrum/mod.ts";
import { type FittedEdge, fittedEdge, type IntervalOptions, NO_INTERVALS } from "./fitted_edge.ts";
import { localLine } from "./local_line.ts";
import { type EdgeCandidate, meanCounts } from "./locate.ts";
import { ghosts, type Satellite } from "./satellites.ts";

/** A valence-band edge and how much its position depends on where the straight line is said to begin. */
export interface FittedValenceEdge extends FittedEdge {
  /** Standard uncertainty from the choice of the straight part, eV. */
  readonly lineUncertaintyEv: number;
  /** Where the steepest line on a logarithmic scale meets the background, eV; null without such a line. */
  readonly logarithmicEv: Estimate | null;
}

/** The straight part ends where the slope falls below this share of the steepest; two choices show what it matters. */
const STRAIGHT_SHARES = [0.8, 0.6] as const;
const ABOVE_EV = 0.6;
const BEYOND_SATELLITE_EV = 0.2;
/** Half-width over which a local slope is taken, eV. */
const SLOPE_HALF_EV = 0.08;
/** The line on the logarithmic scale is taken where counts are this many times the background. */
const ABOVE_BACKGROUND = 3;

/**
 * Fits the leading edge of a valence band without Fermi edge: a straight line down to its onset, folded with a Gaussian,
 * on a background with the lamp's satellites as scaled copies of the measured spectrum.
 *
 * The onset of the line is the valence-band maximum on the linear scale (common practice). The line is fitted where the
 * slope is at least 80 % of the steepest; a second fit at 60 % gives the uncertainty of that choice, taken as the half
 * width of a rectangular distribution (JCGM 100, 4.3.7). On the logarithmic scale the steepest line is taken where the
 * counts are above three times the background, and met with the background, or with one count where that is lower
 * (common practice; with fewer background counts the edge moves up, so quote both).
 *
 * @param energiesEv All energies, ascending, eV.
 * @param counts All counts.
 * @param candidate The highest fall of the counts that is not a satellite's.
 * @param satellites Weaker lines of the lamp.
 * @param intervals Intervals beyond the covariance. Default: none.
 * @returns The fit, or null when fewer than 12 channels are in the window.
 */
export function fitValenceEdge(
  energiesEv: Float64Array,
  counts: Float64Array,
  candidate: EdgeCandidate,
  satellites: readonly Satellite[],
  intervals: IntervalOptions = NO_INTERVALS,
): FittedValenceEdge | null {
  const [first, second] = STRAIGHT_SHARES.map((share, i) =>
    fitLine(
      energiesEv,
      counts,
      candidate,
      satellites,
      straightFrom(energiesEv, counts, candidate, share),
      i === 0 ? intervals : NO_INTERVALS,
    )
  );
  if (first === null || second === null) return null;
  const difference = Math.abs(first.edge.positionEv.value - second.edge.positionEv.value);
  return { ...first.edge, lineUncertaintyEv: difference / Math.sqrt(3), logarithmicEv: first.logarithmicEv };
}

function fitLine(
  energiesEv: Float64Array,
  counts: Float64Array,
  candidate: EdgeCandidate,
  satellites: readonly Satellite[],
  fromChannel: number,
  intervals: IntervalOptions,
): { readonly edge: FittedEdge; readonly logarithmicEv: Estimate | null } | null {
  const last = energiesEv[energiesEv.length - 1];
  const fitting = satellites.filter((satellite) =>
    last >= candidate.energyEv + satellite.shiftEv + BEYOND_SATELLITE_EV &&
    energiesEv[fromChannel] - satellite.shiftEv >= energiesEv[0]
  );
  const reach = Math.max(0, ...fitting.map((satellite) => satellite.shiftEv));
  const high = candidate.energyEv + reach + ABOVE_EV;
  const past = energiesEv.findIndex((energy) => energy > high);
  const window = energiesEv.slice(fromChannel, past < 0 ? undefined : past);
  const data = counts.slice(fromChannel, past < 0 ? undefined : past);
  if (window.length < 12) return null;
  const stepEv = (window[window.length - 1] - window[0]) / (window.length - 1);
  const copied = ghosts(fitting, energiesEv, counts, window);
  const slope = Math.max(1, -localLine(energiesEv, counts, candidate.channel, SLOPE_HALF_EV).slope);
  const onset = Math.min(
    candidate.energyEv + counts[candidate.channel] / slope,
    window[window.length - 1],
  );
  const floor = meanCounts(window, data, window[window.length - 1] - 0.2, Infinity);
  const parameters: FitParameter[] = [
    { name: "position", start: onset, lower: window[0], upper: window[window.length - 1], scale: 0.05 },
    { name: "sigma", start: Math.max(0.1, 0.2 * stepEv), lower: 0.15 * stepEv, upper: 1, scale: 0.1 },
    { name: "steepness", start: slope, lower: 0, scale: slope },
    { name: "base", start: Math.max(floor, 0.1), lower: 0, scale: Math.max(floor, 1) },
    ...copied.parameters,
  ];
  const model = (p: Float64Array, out: Float64Array): void => {
    for (let i = 0; i < window.length; i++) {
      out[i] = p[2] * broadenedHinge(p[0] - window[i], p[1]) + p[3];
      for (let s = 0; s < copied.copies.length; s++) out[i] += p[4 + s] * copied.copies[s][i];
    }
  };
  const problem = { parameters, model, data };
  const fit = minimizePoisson(problem);
  const edge = fittedEdge(fit, problem, window, {
    vital: ["position"],
    model: `straight leading edge, Gaussian rounding, background and ${copied.copies.length} satellites`,
  }, intervals);
  const net = data.map((count, i) =>
    copied.copies.reduce((sum, copy, s) => sum - fit.values[4 + s] * copy[i], count)
  );
  const base = { value: fit.values[3], standardUncertainty: fit.standardErrors[3] };
  return { edge, logarithmicEv: logarithmicOnset(window, net, base) };
}

/** Where the steepest line through the logarithm of the counts meets the logarithm of the background. */
function logarithmicOnset(energiesEv: Float64Array, counts: Float64Array, base: Estimate): Estimate | null {
  const floor = Math.max(1, base.value);
  let best: Estimate | null = null;
  let steepest = 0;
  for (let i = 1; i < counts.length - 1; i++) {
    const { slope, slopeError, height, heightError } = localLine(energiesEv, counts, i, SLOPE_HALF_EV);
    if (height < ABOVE_BACKGROUND * floor) break;
    const steepness = -slope / height;
    if (!(steepness > steepest) || -slope < 3 * slopeError) continue;
    steepest = steepness;
    const folds = Math.log(height / floor);
    const baseError = base.value > 1 && Number.isFinite(base.standardUncertainty)
      ? base.standardUncertainty / base.value
      : 1 / floor;
    best = {
      value: energiesEv[i] + folds / steepness,
      standardUncertainty: Math.hypot(
        folds * Math.hypot(slopeError / slope, heightError / height),
        heightError / height,
        baseError,
      ) / steepness,
    };
  }
  return best;
}

/** Lowest channel of the run below the candidate in which the slope keeps the given share of the steepest. */
function straightFrom(
  energiesEv: Float64Array,
  counts: Float64Array,
  candidate: EdgeCandidate,
  share: number,
): number {
  let steepest = 0;
  let channel = candidate.channel;
  for (let i = candidate.channel; i > 0 && energiesEv[i] > candidate.energyEv - 0.5; i--) {
    const slope = -localLine(energiesEv, counts, i, SLOPE_HALF_EV).slope;
    if (slope <= steepest) continue;
    steepest = slope;
    channel = i;
  }
  const slopeAt = (at: number): number => -localLine(energiesEv, counts, at, SLOPE_HALF_EV).slope;
  while (channel > 0 && slopeAt(channel) > share * steepest) channel--;
  return channel;
}
