import { cannot } from "../base/mod.ts";
import { samplePoisson, streamState, Xoshiro128pp } from "../rng/mod.ts";
import type { PlanFacts, Rates } from "./facts.ts";
import { channelsOf, measureParts, regionWith, type RunWindow } from "./predict.ts";

/** What simulated runs of a plan gave. */
export interface Replicates {
  /** Fitted values, eV, shape (runs); NaN where the fit failed. */
  readonly valuesEv: Float64Array;
  /** Fits that failed. */
  readonly failures: number;
  /** Mean of the others, eV. */
  readonly meanEv: number;
  /** Standard deviation, eV. */
  readonly scatterEv: number;
  /** That over the predicted statistical uncertainty. */
  readonly ratio: number;
  /** Standard error of the ratio from the number of runs: `ratio / sqrt(2 (n - 1))`, normal values. */
  readonly ratioStandardError: number;
  /** Median of the uncertainties that the fits report, systematic parts included, eV. */
  readonly reportedEv: number;
}

/**
 * Simulates runs of a plan with counting noise, fits each as the command `fit` would, and compares the scatter with the
 * prediction.
 *
 * @param rates Expected rates.
 * @param facts Settings.
 * @param windows Windows of the plan.
 * @param options Number of runs >= 10, seed, what is determined, and the predicted statistical uncertainty, eV.
 * @returns The comparison.
 * @throws {RangeError} If there are fewer than 10 runs.
 */
export function replicateRun(
  rates: Rates,
  facts: PlanFacts,
  windows: readonly RunWindow[],
  { runs, seed, quantity, statisticalEv }: {
    readonly runs: number;
    readonly seed: number;
    readonly quantity: "workFunctionEv" | "ionizationEnergyEv";
    readonly statisticalEv: number;
  },
): Replicates {
  if (!(runs >= 10)) throw new RangeError(cannot("replicate a run", "there must be at least 10 runs", runs));
  const parts = windows.map((window) => {
    const [from, past] = channelsOf(rates, window);
    return {
      name: window.name,
      energiesEv: rates.energiesEv.slice(from, past),
      timePerChannelS: window.timeS / (past - from),
      countsPerS: rates.countsPerS.slice(from, past),
    };
  });
  const reported: number[] = [];
  const valuesEv = new Float64Array(runs).map((_, run) => {
    const generator = new Xoshiro128pp(streamState(seed, "replicate", run));
    const answer = measureParts(
      facts,
      parts.map(({ name, energiesEv, timePerChannelS, countsPerS }) =>
        regionWith(
          facts,
          name,
          energiesEv,
          countsPerS.map((rate) => samplePoisson(rate * timePerChannelS, generator)),
          timePerChannelS,
        )
      ),
    )[quantity];
    if (answer !== null) reported.push(answer.standardUncertainty);
    return answer?.value ?? NaN;
  });
  const good = valuesEv.filter((value) => !Number.isNaN(value));
  const mean = good.reduce((sum, value) => sum + value, 0) / good.length;
  const squares = good.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  const scatterEv = Math.sqrt(squares / (good.length - 1));
  const ratio = scatterEv / statisticalEv;
  return {
    valuesEv,
    failures: runs - good.length,
    meanEv: mean,
    scatterEv,
    ratio,
    ratioStandardError: ratio / Math.sqrt(2 * (good.length - 1)),
    reportedEv: reported.sort((a, b) => a - b)[Math.floor(reported.length / 2)] ?? NaN,
  };
}
