import type { Estimate } from "../base/mod.ts";
import { minimizePoisson, type PoissonFit, type PoissonProblem, residualTests } from "../fit/mod.ts";
import { ABOVE_EV, BELOW_EV, type CutoffOptions, type FittedCutoff } from "./cutoff.ts";
import {
  cutoffModel,
  lateRise,
  levels,
  rampWidthEv,
  STEP_PARAMETERS,
  stepParameters,
} from "./cutoff_model.ts";
import { birgeRatio, fittedEdge, NO_INTERVALS } from "./fitted_edge.ts";

/** Two cutoffs, as patches of different work function give. */
export interface Patches {
  /** Lower cutoff, eV on the axis. */
  readonly lowerEv: Estimate;
  /** Upper cutoff, eV on the axis. */
  readonly upperEv: Estimate;
  /** Height of the upper step over that of the lower one. */
  readonly upperShare: Estimate;
  /** By how much the Bayesian information criterion of one step exceeds that of two. */
  readonly bicGain: number;
}

/** Very strong evidence for two steps: R. Kass, A. Raftery, J. Am. Stat. Assoc. 90, 773 (1995). */
export const BIC_GAIN = 10;
/** Rises further away than this belong to something else, eV (chosen). */
const NEAR_EV = 1.5;
/** A step below this share of the other is no patch (chosen). */
const LEAST_SHARE = 0.03;
/** A fit of two steps better than this chance is the last that is tried. */
const ENOUGH = 0.05;
/** Distances between the steps that are tried beside those of rises that are seen: in widths of the edge, and eV. */
const TRIED_WIDTHS = 3;
const TRIED_EV = 0.4;
/** Two rises are seen apart where their distance is many times the width of each. */
const SEEN_WIDTHS = 8;

/**
 * Decides between one cutoff and two: both models are fitted to the same window, and two are taken where the Bayesian
 * information criterion falls by more than 10.
 *
 * `BIC = deviance + parameters x ln(channels)` (G. Schwarz, Ann. Stat. 6, 461 (1978)); the deviance is divided by the
 * reduced chi-square of the better model where that is above 1, so that misfit of other origin proves nothing.
 *
 * @param energiesEv All energies, ascending, eV.
 * @param counts All counts.
 * @param one The fit of one cutoff.
 * @param risesEv Places where the counts rise, that of the one cutoff included, eV.
 * @param options As for the fit of one.
 * @returns The two cutoffs, and the fit with the position of the lower one; null when one is enough.
 */
export function fitPatches(
  energiesEv: Float64Array,
  counts: Float64Array,
  one: FittedCutoff,
  risesEv: readonly number[],
  options: CutoffOptions,
): { readonly patches: Patches; readonly edge: FittedCutoff } | null {
  const position = one.positionEv.value;
  const sigma = one.sigmaEv.value;
  const near = risesEv.filter((rise) =>
    Math.abs(rise - position) < NEAR_EV && Math.abs(rise - position) > sigma
  );
  const low = Math.min(position - 3 * sigma, ...near) - BELOW_EV;
  const high = Math.max(position + 3 * sigma, ...near) + ABOVE_EV;
  const from = energiesEv.findIndex((energy) => energy >= low);
  const past = energiesEv.findIndex((energy) => energy > high);
  const window = energiesEv.slice(from, past < 0 ? undefined : past);
  const data = counts.slice(from, past < 0 ? undefined : past);
  const [base, top] = one.levels;
  const start = { positionEv: position, sigmaEv: sigma, top: Math.max(1, top), base: Math.max(0.1, base) };
  const parameters = stepParameters(window, start);
  const stepEv = (window[window.length - 1] - window[0]) / (window.length - 1);
  const plain = minimizePoisson({ parameters, data, ...cutoffModel(window, options.ramp, "none") });
  const single = [plain];
  if (plain.deviance > plain.degreesOfFreedom) {
    single.push(minimizePoisson({
      parameters: [
        ...parameters,
        { name: "foot", start: 0.1 * start.top, lower: 0, scale: 0.1 * start.top },
        {
          name: "footLength",
          start: Math.min(1, Math.max(stepEv, 2 * sigma)),
          lower: stepEv,
          upper: 1,
          scale: sigma,
        },
      ],
      data,
      ...cutoffModel(window, options.ramp, "foot"),
    }));
  }

  const model = cutoffModel(window, options.ramp, "second step");
  // Two rises that are seen apart are sharper than one step over both; a poor fit of one says little about the width.
  const seen = risesEv.filter((rise) => rise > low && rise < high).sort((a, b) => a - b);
  const starts = [
    ...seen.slice(1).map((rise) => [seen[0], rise - seen[0], (rise - seen[0]) / SEEN_WIDTHS] as const),
    ...near.map((rise) => [Math.min(rise, position), Math.abs(rise - position), sigma] as const),
    ...[TRIED_EV, TRIED_WIDTHS * sigma].map((distance) =>
      [position - 0.3 * distance, distance, sigma] as const
    ),
  ].filter(([lower, separation]) => lower > window[0] && separation > 2 * stepEv && separation < 2 * NEAR_EV);
  let best: { readonly problem: PoissonProblem; readonly fit: PoissonFit } | null = null;
  for (const [lower, separation, width] of starts) {
    const problem = {
      parameters: [
        ...stepParameters(window, { ...start, positionEv: lower, sigmaEv: Math.min(width, separation / 2) }),
        { name: "separation", start: separation, lower: stepEv, upper: 2 * NEAR_EV, scale: sigma },
        { name: "share", start: 1, lower: 0, upper: 1 / LEAST_SHARE, scale: 1 },
      ].map((parameter, i) =>
        // Both steps share the top.
        i >= 2 && i <= 4 ? { ...parameter, start: parameter.start / 2 } : parameter
      ),
      data,
      ...model,
    };
    const fit = minimizePoisson(problem);
    const isFree = fit.atBound.every((name) => name !== "separation" && name !== "share");
    if (!fit.converged || !isFree) continue;
    if (best === null || fit.deviance < best.fit.deviance) best = { problem, fit };
    if (residualTests(fit, data).chiSquareProbability > ENOUGH) break;
  }
  if (best === null) return null;

  const edge = fittedEdge(best.fit, best.problem, window, {
    vital: ["position", "sigma"],
    model: `two steps with decaying tops${
      options.ramp === null ? "" : " and acceptance ramps"
    }, Gaussian response, sloping background`,
  }, options.intervals ?? NO_INTERVALS);
  const inflation = birgeRatio(edge.tests);
  const bic = ({ deviance, names }: typeof plain): number =>
    deviance / inflation ** 2 + names.length * Math.log(window.length);
  const bicGain = Math.min(...single.map(bic)) - bic(best.fit);
  const [separation, share] = [STEP_PARAMETERS, STEP_PARAMETERS + 1].map((index) => ({
    value: best.fit.values[index],
    standardUncertainty: best.fit.standardErrors[index] * inflation,
  }));
  const rampEv = options.ramp === null ? 0 : rampWidthEv(options.ramp, edge.positionEv.value);
  // Steps closer than the ramp are more likely a ramp that is not quite straight.
  const isReal = edge.converged && bicGain > BIC_GAIN && share.value > LEAST_SHARE &&
    separation.value > Math.max(edge.sigmaEv.value, rampEv, 3 * separation.standardUncertainty);
  if (!isReal) return null;
  const covariance = best.fit.covariance[STEP_PARAMETERS] * inflation ** 2; // of position and separation
  const upper = edge.positionEv.value + separation.value;
  return {
    patches: {
      lowerEv: edge.positionEv,
      upperEv: {
        value: upper,
        standardUncertainty: Math.sqrt(
          edge.positionEv.standardUncertainty ** 2 + separation.standardUncertainty ** 2 + 2 * covariance,
        ),
      },
      upperShare: share,
      bicGain,
    },
    edge: {
      ...edge,
      lateRise: lateRise(best.fit.values),
      rampEv,
      levels: levels(best.fit.values),
    },
  };
}
