import type { Estimate } from "../base/mod.ts";
import {
  minimizePoisson,
  type PoissonFit,
  type PoissonProblem,
  type ProfileInterval,
  profileInterval,
  type ResidualTests,
  residualTests,
} from "../fit/mod.ts";
import { samplePoisson, streamState, Xoshiro128pp } from "../rng/mod.ts";

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
  /** Counts there as they were fitted, shape (n). */
  readonly counts: Float64Array;
  /** Fitted counts there, shape (n). */
  readonly fittedCounts: Float64Array;
  /** Channels between 10 % and 90 % of the edge, its thermal width included. */
  readonly channelsOnEdge: number;
  /** Names of the parts of the model that were used, in words. */
  readonly model: string;
  /** Profile-likelihood interval of the position (k = 1), eV; null when not asked for. */
  readonly profileEv: ProfileInterval | null;
  /** Parametric bootstrap of the position; null when not asked for. */
  readonly bootstrap: EdgeBootstrap | null;
}

/** Positions refitted to counts drawn from the fitted curve. */
export interface EdgeBootstrap {
  /** Positions, eV, shape (replicates); NaN where the fit failed. */
  readonly positionsEv: Float64Array;
  /** Fits that failed. */
  readonly failures: number;
  /** Mean less the fitted position, eV. */
  readonly biasEv: number;
  /** Standard deviation, eV, times the Birge ratio of the fit. */
  readonly standardDeviationEv: number;
  /** 15.9 % and 84.1 % quantiles less the fitted position, eV, times the Birge ratio. */
  readonly quantilesEv: readonly [number, number];
}

/** Intervals beyond the covariance, computed where asked for. */
export interface IntervalOptions {
  /** `true` for the profile-likelihood interval. */
  readonly profile: boolean;
  /** Replicates (0 for none), seed, and a stream of random numbers of its own for each edge. */
  readonly bootstrap: { readonly replicates: number; readonly seed: number; readonly stream: number };
}

/** Refits of a bootstrap need no more digits than its standard deviation has, in standard errors. */
const REFIT_TOLERANCE = 0.02;

/** The covariance is enough. */
export const NO_INTERVALS: IntervalOptions = {
  profile: false,
  bootstrap: { replicates: 0, seed: 0, stream: 0 },
};

/**
 * Factor by which misfit enlarges uncertainties: the Birge ratio, sqrt(chi-square / degrees of freedom) where above 1 (R.
 * Birge, Phys. Rev. 40, 207 (1932)).
 */
export function birgeRatio(tests: ResidualTests): number {
  return Math.sqrt(Math.max(1, tests.reducedChiSquare));
}

/**
 * Turns a Poisson fit into an edge.
 *
 * @param fit Fit with parameters `position` and `sigma` first.
 * @param problem What was fitted.
 * @param energiesEv Window, eV.
 * @param about Names of parameters that must not sit at a bound, the model in words, kT where it widens the edge.
 * @param intervals What to compute beyond the covariance.
 * @returns The edge.
 */
export function fittedEdge(
  fit: PoissonFit,
  problem: PoissonProblem,
  energiesEv: Float64Array,
  about: { readonly vital: readonly string[]; readonly model: string; readonly thermalEnergyEv?: number },
  intervals: IntervalOptions,
): FittedEdge {
  const tests = residualTests(fit, problem.data);
  const inflation = birgeRatio(tests);
  const stuck = fit.atBound.filter((name) => about.vital.includes(name));
  const sigmaEv = fit.values[1];
  const stepEv = (energiesEv[energiesEv.length - 1] - energiesEv[0]) / (energiesEv.length - 1);
  const converged = fit.converged && stuck.length === 0 && Number.isFinite(fit.standardErrors[0]);
  return {
    positionEv: { value: fit.values[0], standardUncertainty: fit.standardErrors[0] * inflation },
    sigmaEv: { value: sigmaEv, standardUncertainty: fit.standardErrors[1] * inflation },
    tests,
    converged,
    reason: stuck.length > 0
      ? `${stuck.join(" and ")} ran into a bound; widen the window or measure more counts`
      : fit.reason,
    energiesEv,
    counts: problem.data,
    fittedCounts: fit.fitted,
    // 10-90 % of a Gaussian edge 2 x 1.2816 sigma, of a Fermi edge 2 ln 9 kT; in quadrature good to 1.2 %.
    channelsOnEdge: Math.hypot(2.563 * sigmaEv, 4.394 * (about.thermalEnergyEv ?? 0)) / stepEv,
    model: about.model,
    profileEv: intervals.profile && converged
      ? profileInterval(problem, fit, "position", inflation * inflation)
      : null,
    bootstrap: intervals.bootstrap.replicates > 0 && converged
      ? bootstrapped(fit, problem, inflation, intervals.bootstrap)
      : null,
  };
}

/**
 * Parametric bootstrap: counts drawn from the fitted curve and fitted again, with the same parts of the model.
 *
 * Source: B. Efron, R. Tibshirani, An Introduction to the Bootstrap (1993), ch. 6 (cited from memory).
 */
function bootstrapped(
  fit: PoissonFit,
  problem: PoissonProblem,
  inflation: number,
  { replicates, seed, stream }: IntervalOptions["bootstrap"],
): EdgeBootstrap {
  const parameters = problem.parameters.map((parameter, j) => ({ ...parameter, start: fit.values[j] }));
  const expected = fit.fitted.map((mean) => Math.max(0, mean));
  const position = fit.values[0];
  const positionsEv = new Float64Array(replicates).map((_, replicate) => {
    const generator = new Xoshiro128pp(streamState(seed, "replicate", replicate + stream * 2 ** 32));
    const data = expected.map((mean) => samplePoisson(mean, generator));
    const again = minimizePoisson({
      ...problem,
      parameters,
      expected,
      data,
      roundTolerance: REFIT_TOLERANCE,
    });
    return again.converged ? again.values[0] : NaN;
  });
  const sorted = positionsEv.filter((value) => !Number.isNaN(value)).sort();
  const mean = sorted.reduce((sum, value) => sum + value, 0) / sorted.length;
  const squares = sorted.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  const quantile = (share: number): number =>
    inflation * (sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))] - position);
  return {
    positionsEv,
    failures: replicates - sorted.length,
    biasEv: mean - position,
    standardDeviationEv: inflation * Math.sqrt(squares / (sorted.length - 1)),
    quantilesEv: [quantile(0.1587), quantile(0.8413)],
  };
}
