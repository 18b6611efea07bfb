import type { Estimate } from "../base/mod.ts";
import {
  type FitParameter,
  minimizePoisson,
  type PoissonFit,
  type ResidualTests,
  residualTests,
} from "../fit/mod.ts";
import { broadenedHinge, broadenedRampStep, broadenedTopStep } from "../spectrum/mod.ts";
import { type EdgeCandidate, meanCounts } from "./locate.ts";

/** A fitted edge: position, width, and how well the model describes the counts. */
export interface FittedEdge {
  /** Position on the energy axis of the data, eV; standard uncertainty of counting alone, inflated for misfit. */
  readonly positionEv: Estimate;
  /** Standard deviation of the Gaussian broadening, eV. */
  readonly sigmaEv: Estimate;
  /** Chi-square, runs. */
  readonly tests: ResidualTests;
  /** `true` when the minimizer converged and no parameter that matters sits at a bound. */
  readonly converged: boolean;
  /** Why it stopped, or what is wrong. */
  readonly reason: string;
  /** Energies of the fitted window, eV, shape (n). */
  readonly energiesEv: Float64Array;
  /** Fitted counts there, shape (n). */
  readonly fittedCounts: Float64Array;
  /** Channels between 10 % and 90 % of a Gaussian edge of this width. */
  readonly channelsOnEdge: number;
  /** Names of the parts of the model that were used, in words. */
  readonly model: string;
}

/** A fitted secondary cutoff. */
export interface FittedCutoff extends FittedEdge {
  /**
   * How much the counts still rise over the first 0.3 eV above the edge, as a share of the top: a clean step falls.
   * A large share means a barrier that opens slowly, or several work functions.
   */
  readonly lateRise: number;
}

/** What is known about the cutoff before the fit. */
export interface CutoffOptions {
  /**
   * Tangent squared of the acceptance half-angle on an axis of recorded kinetic energy: the cutoff then rises over
   * `tan^2(theta) x (kinetic energy at the cutoff)`. Null where angle or scale is unknown: no rise.
   */
  readonly rampPerEv: number | null;
}

/** Decay lengths of the two falling parts of the top, eV: together they follow any smooth top over the window. */
const FAST_DECAY_EV = 0.3;
const SLOW_DECAY_EV = 1.5;

/** Window below and above the edge, eV and in widths of the edge. */
const BELOW_EV = 0.5;
const ABOVE_EV = 0.9;

/** An exponential foot must improve twice the log-likelihood by this much: 2 parameters, chance below 0.1 %. */
const FOOT_GAIN = 14;

/**
 * Fits the secondary-electron cutoff: a step with a ramp and a decaying top, folded with a Gaussian, on a sloping
 * background; with an exponential foot below the edge where the counts ask for it (likelihood ratio).
 *
 * The ramp: parallel momentum is kept in the bias field, so a cone of half-angle theta takes in every direction up to
 * `E_out = tan^2(theta) E_kin`, and only a constant share above. Source: kinematics of a flat emitter; see A. Baddorf,
 * Sci. Rep. 13, 13452 (2023) and Y. Ishida et al., Commun. Phys. 3 (2020) for what it does to measured cutoffs.
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
  const parameters: FitParameter[] = [
    {
      name: "position",
      start: candidate.energyEv,
      lower: window[0],
      upper: window[window.length - 1],
      scale: sigma,
    },
    { name: "sigma", start: sigma, lower: 0.15 * stepEv, upper: 2, scale: sigma },
    { name: "flat", start: top, scale: top },
    { name: "fast", start: 0.1 * top, scale: top },
    { name: "slow", start: 0.1 * top, scale: top },
    { name: "base", start: base, lower: 0, scale: Math.max(base, 1) },
    { name: "slope", start: 0, scale: Math.max(base, 1) },
  ];
  const model = (p: Float64Array, out: Float64Array): void => {
    const [position, sigmaEv, flat, fast, slow, baseCounts, slope] = p;
    const ramp = options.rampPerEv === null ? 0 : Math.max(0, options.rampPerEv * position);
    const foot = p.length > 7 ? p[7] : 0;
    const footEv = p.length > 7 ? p[8] : 1;
    for (let i = 0; i < window.length; i++) {
      const x = window[i] - position;
      const fastTop = broadenedRampStep(x, sigmaEv, ramp, FAST_DECAY_EV, 1);
      const slowTop = broadenedRampStep(x, sigmaEv, ramp, SLOW_DECAY_EV, 1);
      const flatTop = broadenedRampStep(x, sigmaEv, ramp, 1, 0);
      out[i] = flat * flatTop + fast * fastTop + slow * slowTop + baseCounts +
        slope * broadenedHinge(-x, sigmaEv);
      if (foot !== 0) out[i] += foot * broadenedTopStep(-x, sigmaEv, footEv);
    }
  };
  const plain = minimizePoisson({ parameters, model, data });
  let best = plain;
  if (plain.deviance > plain.degreesOfFreedom) {
    const withFoot = minimizePoisson({
      parameters: [
        ...parameters.map((parameter, i) => ({ ...parameter, start: plain.values[i] })),
        { name: "foot", start: 0.1 * top, lower: 0, scale: 0.1 * top },
        { name: "footLength", start: 2 * sigma, lower: stepEv, upper: 1, scale: sigma },
      ],
      model,
      data,
    });
    if (withFoot.converged && plain.deviance - withFoot.deviance > FOOT_GAIN) best = withFoot;
  }
  const [, , flat, fast, slow] = best.values;
  const topOver = flat + fast * Math.exp(-1) + slow * Math.exp(-FAST_DECAY_EV / SLOW_DECAY_EV);
  const edge = fittedEdge(best, window, data, {
    stepEv,
    vital: ["position", "sigma"],
    model: `${best === plain ? "step" : "step with exponential foot"} with decaying top${
      options.rampPerEv === null ? "" : " and acceptance ramp"
    }, Gaussian response, sloping background`,
  });
  return { ...edge, lateRise: Math.max(0, 1 - (flat + fast + slow) / topOver) };
}

/**
 * Turns a Poisson fit into an edge: misfit inflates the uncertainties by the Birge ratio, sqrt(chi-square / degrees of
 * freedom) where above 1 (R. Birge, Phys. Rev. 40, 207 (1932)).
 *
 * @param fit Fit with parameters `position` and `sigma` first.
 * @param energiesEv Window, eV.
 * @param data Counts in the window.
 * @param about Channel step, names of parameters that must not sit at a bound, the model in words.
 * @returns The edge.
 */
export function fittedEdge(
  fit: PoissonFit,
  energiesEv: Float64Array,
  data: Float64Array,
  about: { readonly stepEv: number; readonly vital: readonly string[]; readonly model: string },
): FittedEdge {
  const tests = residualTests(fit, data);
  const inflation = Math.sqrt(Math.max(1, tests.reducedChiSquare));
  const stuck = fit.atBound.filter((name) => about.vital.includes(name));
  const sigmaEv = fit.values[1];
  return {
    positionEv: { value: fit.values[0], standardUncertainty: fit.standardErrors[0] * inflation },
    sigmaEv: { value: sigmaEv, standardUncertainty: fit.standardErrors[1] * inflation },
    tests,
    converged: fit.converged && stuck.length === 0 && Number.isFinite(fit.standardErrors[0]),
    reason: stuck.length > 0 ? `${stuck.join(" and ")} ran into a bound` : fit.reason,
    energiesEv,
    fittedCounts: fit.fitted,
    channelsOnEdge: (2.563 * sigmaEv) / about.stepEv, // 10-90 % of a Gaussian edge: 2 x 1.2816 sigma
    model: about.model,
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
