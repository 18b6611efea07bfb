import { type FitParameter, minimizePoisson } from "../fit/mod.ts";
import { broadenedHinge } from "../spectrum/mod.ts";
import { type FittedEdge, fittedEdge } from "./cutoff.ts";
import { type EdgeCandidate, meanCounts } from "./locate.ts";
import { ghosts, type Satellite } from "./satellites.ts";

/** A valence-band edge and how much its position depends on where the straight line is said to begin. */
export interface FittedValenceEdge extends FittedEdge {
  /** Standard uncertainty from the choice of the straight part, eV. */
  readonly lineUncertaintyEv: number;
}

/** The straight part ends where the slope falls below this share of the steepest; two choices show what it matters. */
const STRAIGHT_SHARES = [0.8, 0.6] as const;
const ABOVE_EV = 0.6;
const BEYOND_SATELLITE_EV = 0.2;
/** Half-width over which a local slope is taken, eV. */
const SLOPE_HALF_EV = 0.08;

/**
 * Fits the leading edge of a valence band without Fermi edge: a straight line down to its onset, folded with a Gaussian,
 * on a background with the lamp's satellites as scaled copies of the measured spectrum.
 *
 * The onset of the line is the valence-band maximum on the linear scale (common practice). The line is fitted where the
 * slope is at least 80 % of the steepest; a second fit at 60 % gives the uncertainty of that choice, taken as the half
 * width of a rectangular distribution (JCGM 100, 4.3.7).
 *
 * @param energiesEv All energies, ascending, eV.
 * @param counts All counts.
 * @param candidate The highest fall of the counts that is not a satellite's.
 * @param satellites Weaker lines of the lamp.
 * @returns The fit, or null when fewer than 12 channels are in the window.
 */
export function fitValenceEdge(
  energiesEv: Float64Array,
  counts: Float64Array,
  candidate: EdgeCandidate,
  satellites: readonly Satellite[],
): FittedValenceEdge | null {
  const [first, second] = STRAIGHT_SHARES.map((share) =>
    fitLine(energiesEv, counts, candidate, satellites, straightFrom(energiesEv, counts, candidate, share))
  );
  if (first === null || second === null) return null;
  const difference = Math.abs(first.positionEv.value - second.positionEv.value);
  return { ...first, lineUncertaintyEv: difference / Math.sqrt(3) };
}

function fitLine(
  energiesEv: Float64Array,
  counts: Float64Array,
  candidate: EdgeCandidate,
  satellites: readonly Satellite[],
  fromChannel: number,
): FittedEdge | null {
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
  const slope = Math.max(1, -localSlope(energiesEv, counts, candidate.channel, SLOPE_HALF_EV));
  const onset = Math.min(
    candidate.energyEv + counts[candidate.channel] / slope,
    window[window.length - 1],
  );
  const floor = meanCounts(window, data, window[window.length - 1] - 0.2, Infinity);
  const parameters: FitParameter[] = [
    { name: "position", start: onset, lower: window[0], upper: window[window.length - 1], scale: 0.05 },
    { name: "sigma", start: 0.1, lower: 0.15 * stepEv, upper: 1, scale: 0.1 },
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
  return fittedEdge(minimizePoisson({ parameters, model, data }), window, data, {
    stepEv,
    vital: ["position"],
    model: `straight leading edge, Gaussian rounding, background and ${copied.copies.length} satellites`,
  });
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
    const slope = -localSlope(energiesEv, counts, i, SLOPE_HALF_EV);
    if (slope <= steepest) continue;
    steepest = slope;
    channel = i;
  }
  while (channel > 0 && -localSlope(energiesEv, counts, channel, SLOPE_HALF_EV) > share * steepest) channel--;
  return channel;
}

/** Slope of a straight line through the counts about a channel, counts per eV (ordinary least squares). */
function localSlope(energiesEv: Float64Array, counts: Float64Array, channel: number, halfEv: number): number {
  const center = energiesEv[channel];
  let n = 0, sumX = 0, sumY = 0, sumXX = 0, sumXY = 0;
  for (let i = channel; i >= 0 && center - energiesEv[i] <= halfEv; i--) add(i);
  for (let i = channel + 1; i < counts.length && energiesEv[i] - center <= halfEv; i++) add(i);
  function add(i: number): void {
    const x = energiesEv[i] - center;
    n++;
    sumX += x;
    sumY += counts[i];
    sumXX += x * x;
    sumXY += x * counts[i];
  }
  const denominator = n * sumXX - sumX * sumX;
  return denominator > 0 ? (n * sumXY - sumX * sumY) / denominator : 0;
}
