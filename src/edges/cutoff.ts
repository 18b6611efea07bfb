import { minimizePoisson, type PoissonProblem } from "../fit/mod.ts";
import {
  type AcceptanceRamp,
  cutoffModel,
  lateRise,
  levels,
  rampWidthEv,
  stepParameters,
} from "./cutoff_model.ts";
import { type FittedEdge, fittedEdge, type IntervalOptions, NO_INTERVALS } from "./fitted_edge.ts";
import { type EdgeCandidate, meanCounts } from "./locate.ts";

/** A fitted secondary cutoff. */
export interface FittedCutoff extends FittedEdge {
  /**
   * How much the counts still rise over the first 0.3 eV above the edge, as a share of the top: a clean step falls.
   * A large share means a barrier that opens slowly, or several work functions.
   */
  readonly lateRise: number;
  /** Width of the rise that the acceptance cone gives, eV; 0 where it is not known. */
  readonly rampEv: number;
  /** Counts of the background below the edge, and of the top extrapolated to the edge. */
  readonly levels: readonly [base: number, top: number];
}

/** What is known about the cutoff before the fit. */
export interface CutoffOptions {
  /** How the acceptance cone widens the rise; null where angle or scale is unknown: no rise. */
  readonly ramp: AcceptanceRamp | null;
  /** Intervals beyond the covariance. Default: none. */
  readonly intervals?: IntervalOptions;
}

/** Window below and above the edge, eV and in widths of the edge. */
export const BELOW_EV = 0.5;
/** See {@link BELOW_EV}. */
export const ABOVE_EV = 0.9;

/** An exponential foot must improve twice the log-likelihood by this much: 2 parameters, chance below 0.1 %. */
const FOOT_GAIN = 14;

/**
 * Fits the secondary-electron cutoff: a step with a ramp and a decaying top, folded with a Gaussian, on a sloping
 * background; with an exponential foot below the edge where the counts ask for it (likelihood ratio).
 *
 * @param energiesEv Energies, ascending, eV, shape (n).
 * @param counts Counts, shape (n).
 * @param candidate Where to look.
 * @param options What is known.
 * @returns The fit, or null when fewer than 12 channels are in the window.
 */
export function fitCutoff(
  energiesEv: Float64Array,
  counts: Float64Array,
  candidate: EdgeCandidate,
  options: CutoffOptions,
): FittedCutoff | null {
  const width = riseWidth(energiesEv, counts, candidate);
  const low = candidate.energyEv - Math.max(BELOW_EV, 3 * width);
  const high = candidate.energyEv + Math.max(ABOVE_EV, 4 * width);
  const from = energiesEv.findIndex((energy) => energy >= low);
  const past = energiesEv.findIndex((energy) => energy > high);
  const window = energiesEv.slice(from, past < 0 ? undefined : past);
  const data = counts.slice(from, past < 0 ? undefined : past);
  if (window.length < 12) return null;

  const stepEv = (window[window.length - 1] - window[0]) / (window.length - 1);
  const base = Math.max(0.1, meanCounts(window, data, low, candidate.energyEv - 2 * width) || 0.1);
  const top = Math.max(
    1,
    meanCounts(window, data, candidate.energyEv + width, candidate.energyEv + 2 * width),
  );
  const sigma = Math.max(0.35 * width, 0.5 * stepEv);
  const parameters = stepParameters(window, { positionEv: candidate.energyEv, sigmaEv: sigma, top, base });
  const plainProblem = { parameters, data, ...cutoffModel(window, options.ramp, "none") };
  const plain = minimizePoisson(plainProblem);
  let best = plain;
  let problem: PoissonProblem = plainProblem;
  if (plain.deviance > plain.degreesOfFreedom) {
    const footProblem = {
      parameters: [
        ...parameters.map((parameter, i) => ({ ...parameter, start: plain.values[i] })),
        { name: "foot", start: 0.1 * top, lower: 0, scale: 0.1 * top },
        {
          name: "footLength",
          start: Math.min(1, Math.max(stepEv, 2 * sigma)),
          lower: stepEv,
          upper: 1,
          scale: sigma,
        },
      ],
      data,
      expected: plain.fitted,
      ...cutoffModel(window, options.ramp, "foot"),
    };
    const withFoot = minimizePoisson(footProblem);
    if (withFoot.converged && plain.deviance - withFoot.deviance > FOOT_GAIN) {
      best = withFoot;
      problem = footProblem;
    }
  }
  const edge = fittedEdge(best, problem, window, {
    vital: ["position", "sigma"],
    model: `${best === plain ? "step" : "step with exponential foot"} with decaying top${
      options.ramp === null ? "" : " and acceptance ramp"
    }, Gaussian response, sloping background`,
  }, options.intervals ?? NO_INTERVALS);
  return {
    ...edge,
    lateRise: lateRise(best.values),
    rampEv: options.ramp === null ? 0 : rampWidthEv(options.ramp, best.values[0]),
    levels: levels(best.values),
  };
}

/** Distance between 15 % and 85 % of the rise to the highest counts within 1 eV above the candidate. */
function riseWidth(energiesEv: Float64Array, counts: Float64Array, candidate: EdgeCandidate): number {
  let top = candidate.channel;
  for (let i = candidate.channel; i < counts.length && energiesEv[i] < candidate.energyEv + 1; i++) {
    if (counts[i] > counts[top]) top = i;
  }
  const base = meanCounts(energiesEv, counts, candidate.energyEv - 0.5, candidate.energyEv - 0.25) || 0;
  const level = (share: number): number => base + share * (counts[top] - base);
  let high = candidate.channel;
  while (high < top && counts[high] < level(0.85)) high++;
  let low = candidate.channel;
  while (low > 0 && counts[low] > level(0.15)) low--;
  return Math.max(energiesEv[high] - energiesEv[low], 2 * (energiesEv[1] - energiesEv[0]));
}
