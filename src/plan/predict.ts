import type { Estimate, Notice } from "../base/mod.ts";
import { nearestLine } from "../data/mod.ts";
import {
  type BudgetTerm,
  type EdgeRegion,
  type FittedEdge,
  measureWorkFunction,
  type Verdict,
  type WorkFunctionResult,
} from "../edges/mod.ts";
import type { PlanFacts, Rates } from "./facts.ts";

/** A part of the spectrum and the time spent on it. */
export interface RunWindow {
  /** What it is measured for. */
  readonly name: string;
  /** Lowest energy as recorded, eV. */
  readonly fromEv: number;
  /** Highest energy, eV. */
  readonly toEv: number;
  /** Time in the window, all channels and sweeps together, s, > 0. */
  readonly timeS: number;
}

/** What counting will do to the position of an edge. */
export interface EdgePrediction {
  /** `secondary cutoff`, `Fermi edge` or `valence-band edge`. */
  readonly name: string;
  /** Position that the fit gives the expected spectrum, eV as recorded. */
  readonly positionEv: number;
  /** First and last energy that the fit uses, eV. */
  readonly fitWindowEv: readonly [number, number];
  /** Variance of the position by counting times the time in the window, eV^2 s. */
  readonly varianceTimeEv2S: number;
  /** Part of the fit's uncertainty that comes from misfit of its model and does not shrink with time, eV. */
  readonly misfitEv: number;
  /** Uncertainty of the position from the finite number of histories, eV. */
  readonly monteCarloEv: number;
}

/** What a fit of a run will give. */
export interface Prediction {
  /** What the fit says of the expected spectrum. */
  readonly verdict: Verdict;
  /** Why it is not good. */
  readonly reasons: readonly string[];
  /** What else it says. */
  readonly warnings: readonly Notice[];
  /** The numbers; null when the fit fails. */
  readonly numbers: PredictedNumbers | null;
}

/** The numbers of a {@link Prediction}. */
export interface PredictedNumbers {
  /** What is determined: the ionization energy where there is no Fermi edge. */
  readonly quantity: "workFunctionEv" | "ionizationEnergyEv";
  /** Both edges: cutoff first. */
  readonly edges: readonly [EdgePrediction, EdgePrediction];
  /** Standard uncertainty by counting for the times of the windows, eV: what replicates scatter by. */
  readonly statisticalEv: number;
  /** What the fit's budget adds that does not shrink with time, eV. */
  readonly systematicEv: number;
  /** The terms of that, largest first, eV. */
  readonly systematicTerms: readonly { readonly name: string; readonly standardUncertaintyEv: number }[];
  /**
   * Fit of the expected spectrum less what was put in, eV, with the uncertainty from the number of histories; null where
   * no single work function was put in or none is fitted.
   */
  readonly offsetEv: Estimate | null;
  /** What does not shrink with time, eV: the systematic part, or the offset beyond its noise where that is larger. */
  readonly floorEv: number;
}

/** Noise of the simulation is kept below this share of the variance of counting. */
const MONTE_CARLO_SHARE = 0.1;

/**
 * Standard uncertainties that a fit will give, from the spectrum that is expected: the fit runs on the expected counts
 * themselves, and its covariance, the inverse of the full Fisher information matrix `sum dm/dp dm/dq / m` with all its
 * nuisance parameters, is then the Cramer-Rao bound of the run.
 *
 * Source: G. Cowan, K. Cranmer, E. Gross, O. Vitells, Eur. Phys. J. C 71, 1554 (2011), sec. 3 (expected data standing
 * for all data); H. Cramer, Mathematical Methods of Statistics (1946), ch. 32 (both cited from memory).
 *
 * The information of Poisson counts is proportional to time, so the fit may run at fewer counts than planned: where the
 * histories are few it does, so that noise of the simulation is not taken for structure.
 *
 * @param rates Expected rates.
 * @param facts Settings.
 * @param windows One window that holds both edges, or one for each, the lower first.
 * @returns The prediction.
 */
export function predictRun(rates: Rates, facts: PlanFacts, windows: readonly RunWindow[]): Prediction {
  const parts = windows.map((window) => expectedPart(rates, facts, window));
  const result = measureParts(facts, parts.map(({ region }) => region));
  const { verdict, reasons, cutoffFit, upperFit } = result;
  const warnings = result.warnings.filter(({ code }) => code !== "not-whole-counts");
  const quantity = result.fermiEdgeEv === null ? "ionizationEnergyEv" : "workFunctionEv";
  const answer = result[quantity];
  if (answer === null || cutoffFit === null || upperFit === null) {
    return { verdict: "failed", reasons, warnings, numbers: null };
  }
  const upperName = quantity === "workFunctionEv" ? "Fermi edge" : "valence-band edge";
  const edges = [
    predictEdge("secondary cutoff", cutoffFit, parts[0]),
    predictEdge(upperName, upperFit, parts[parts.length - 1]),
  ] as const;
  const systematicTerms = [
    ...edges.map(({ name, misfitEv }) => ({ name: `${name}, misfit`, standardUncertaintyEv: misfitEv })),
    ...result.budget.filter((term) => !isCounting(term)).map((term) => ({
      name: term.name,
      standardUncertaintyEv: Math.abs(term.sensitivities[quantity] ?? 0) * term.standardUncertaintyEv,
    })),
  ].filter((term) => term.standardUncertaintyEv > 0)
    .sort((a, b) => b.standardUncertaintyEv - a.standardUncertaintyEv);
  const systematicEv = Math.hypot(...systematicTerms.map((term) => term.standardUncertaintyEv));
  const offsetEv = quantity === "workFunctionEv" && facts.workFunctionEv !== null
    ? {
      value: answer.value - facts.workFunctionEv,
      standardUncertainty: Math.hypot(edges[0].monteCarloEv, edges[1].monteCarloEv),
    }
    : null;
  const offsetBeyondNoise = offsetEv === null
    ? 0
    : Math.sqrt(Math.max(0, offsetEv.value ** 2 - 4 * offsetEv.standardUncertainty ** 2));
  return {
    verdict,
    reasons,
    warnings,
    numbers: {
      quantity,
      edges,
      statisticalEv: Math.sqrt(edges.reduce((sum, { varianceTimeEv2S }, i) => {
        return sum + varianceTimeEv2S / windows[Math.min(i, windows.length - 1)].timeS;
      }, 0)),
      systematicEv,
      systematicTerms: offsetBeyondNoise > systematicEv
        ? [{ name: "the fit's model against the simulation", standardUncertaintyEv: offsetBeyondNoise }]
          .concat(systematicTerms)
        : systematicTerms,
      offsetEv,
      floorEv: Math.max(systematicEv, offsetBeyondNoise),
    },
  };
}

/** Counting and misfit of the two edges, the terms that {@link EdgePrediction} takes apart. */
function isCounting({ evaluation, name }: BudgetTerm): boolean {
  return evaluation === "A" && name.endsWith("counting and misfit");
}

/**
 * The fit of regions, named so that photon energies of core-level work are taken too.
 *
 * @param facts Settings.
 * @param regions The regions.
 * @returns What the command `fit` would say.
 */
export function measureParts(facts: PlanFacts, regions: readonly EdgeRegion[]): WorkFunctionResult {
  return measureWorkFunction(regions, {
    knownLine: nearestLine,
    ...(facts.photonEnergyEv > 100 && { regions: regions.map(({ label }) => label) }),
  });
}

interface Part {
  readonly region: EdgeRegion;
  /** Time in the window at which the region was made, s. */
  readonly timeS: number;
  /** Variance of the simulation over variance of counting, by channel of the region. */
  readonly noiseShare: Float64Array;
}

/** Channels of a window, the lowest and the highest included. */
export function channelsOf(
  { energiesEv }: Rates,
  { fromEv, toEv }: Pick<RunWindow, "fromEv" | "toEv">,
): readonly [from: number, past: number] {
  const from = energiesEv.findIndex((energy) => energy >= fromEv - 1e-6);
  const past = energiesEv.findIndex((energy) => energy > toEv + 1e-6);
  return [from < 0 ? energiesEv.length : from, past < 0 ? energiesEv.length : past];
}

/** A region that holds counts. */
export function regionWith(
  facts: PlanFacts,
  label: string,
  energiesEv: Float64Array,
  counts: Float64Array,
  timePerChannelS: number,
): EdgeRegion {
  return {
    label,
    file: "plan",
    energyKind: "kinetic",
    energiesEv,
    counts,
    photonEnergyEv: facts.photonEnergyEv,
    biasV: facts.biasV,
    asRecorded: true,
    analyzerWorkFunctionEv: facts.analyzerWorkFunctionEv,
    acceptanceHalfAngleDeg: facts.acceptanceHalfAngleDeg,
    temperatureK: facts.temperatureK,
    resolutionFwhmEv: facts.resolutionFwhmEv,
    deadTimeS: facts.deadTimeS > 0 ? facts.deadTimeS : null,
    countingTimeS: timePerChannelS,
  };
}

function expectedPart(rates: Rates, facts: PlanFacts, window: RunWindow): Part {
  const [from, past] = channelsOf(rates, window);
  const countsPerS = rates.countsPerS.slice(from, past);
  const noise = rates.standardErrors.slice(from, past).map((error, i) => error ** 2 / countsPerS[i] || 0);
  const noisePerS = noise.reduce((sum, one) => sum + one, 0) / noise.length;
  const timePerChannelS = Math.min(window.timeS / countsPerS.length, MONTE_CARLO_SHARE / noisePerS);
  return {
    region: regionWith(
      facts,
      window.name,
      rates.energiesEv.slice(from, past),
      countsPerS.map((rate) => rate * timePerChannelS),
      timePerChannelS,
    ),
    timeS: timePerChannelS * countsPerS.length,
    noiseShare: noise.map((one) => one * timePerChannelS),
  };
}

function predictEdge(name: string, edge: FittedEdge, { region, timeS, noiseShare }: Part): EdgePrediction {
  const first = region.energiesEv.indexOf(edge.energiesEv[0]);
  const used = noiseShare.subarray(first, first + edge.energiesEv.length);
  const share = used.reduce((sum, one) => sum + one, 0) / used.length;
  const { reducedChiSquare } = edge.tests;
  // The fit enlarges what counting gives by the Birge ratio; with data that scatter, misfit adds to chi-square.
  const counting = edge.positionEv.standardUncertainty / Math.sqrt(Math.max(1, reducedChiSquare));
  return {
    name,
    positionEv: edge.positionEv.value,
    fitWindowEv: [edge.energiesEv[0], edge.energiesEv[edge.energiesEv.length - 1]],
    varianceTimeEv2S: counting ** 2 * timeS,
    misfitEv: counting * Math.sqrt(Math.max(0, reducedChiSquare - share)),
    monteCarloEv: counting * Math.sqrt(share),
  };
}
