import { cannot, InputError } from "../base/mod.ts";
import type { PlanFacts, Rates } from "./facts.ts";
import { planRun, type PlanTarget, type RunPlan } from "./run_plan.ts";

/** A plan with the light that the count rate allows. */
export interface LightPlan {
  /** The plan. */
  readonly plan: RunPlan;
  /** Rates with that light. */
  readonly rates: Rates;
  /** Share of the scenario's light, 1 where the rate is no limit. */
  readonly lightShare: number;
}

/**
 * Rates with less light, dead time taken out and put in again (`m = n / (1 + n tau)`, as the simulation has it).
 *
 * @param rates Rates with all the light.
 * @param facts Dark rate and dead time.
 * @param lightShare Share of the light, > 0..1.
 * @returns The rates.
 */
export function attenuated(
  rates: Rates,
  { darkRateCountsPerS, deadTimeS }: Pick<PlanFacts, "darkRateCountsPerS" | "deadTimeS">,
  lightShare: number,
): Rates {
  const arriving = rates.countsPerS.map((rate) =>
    darkRateCountsPerS + lightShare * (rate / (1 - rate * deadTimeS) - darkRateCountsPerS)
  );
  return {
    energiesEv: rates.energiesEv,
    countsPerS: arriving.map((rate) => rate / (1 + rate * deadTimeS)),
    // dm/dn = (1 + n tau)^-2 = (1 - m tau)^2
    standardErrors: rates.standardErrors.map((error, i) =>
      lightShare * error / ((1 - rates.countsPerS[i] * deadTimeS) * (1 + arriving[i] * deadTimeS)) ** 2
    ),
  };
}

/**
 * Plans a run, with less light where the counter would otherwise record more than it may.
 *
 * @param rates Rates with all the light.
 * @param facts Settings.
 * @param target What is wanted. Limits that are `byLight`, such as a dose, last longer with less light.
 * @param options `mostCountsPerS`: highest rate that may be recorded, Infinity for any; `drawIn` as for {@link planRun}.
 * @returns Plan, rates and share of the light.
 * @throws {InputError} If the highest rate is not above the dark rate, or as {@link planRun}.
 */
export function planWithinRate(
  rates: Rates,
  facts: PlanFacts,
  target: PlanTarget,
  { mostCountsPerS, drawIn = false }: { readonly mostCountsPerS: number; readonly drawIn?: boolean },
): LightPlan {
  const { darkRateCountsPerS, deadTimeS } = facts;
  if (!(mostCountsPerS > darkRateCountsPerS)) {
    throw new InputError([{
      place: "--max-rate",
      message: cannot(
        "plan",
        `--max-rate must be above the dark rate of ${darkRateCountsPerS} counts/s`,
        `${mostCountsPerS} counts/s`,
      ),
    }]);
  }
  const plan = planRun(rates, facts, target, { drawIn });
  const peak = Math.max(0, ...plan.windows.map(({ peakCountsPerS }) => peakCountsPerS));
  if (peak <= mostCountsPerS) return { plan, rates, lightShare: 1 };
  const fromLight = (recorded: number): number => recorded / (1 - recorded * deadTimeS) - darkRateCountsPerS;
  const lightShare = fromLight(mostCountsPerS) / fromLight(peak);
  const less = attenuated(rates, facts, lightShare);
  const limits = target.limits.map((limit) => ({
    ...limit,
    timeS: limit.byLight ? limit.timeS / lightShare : limit.timeS,
  }));
  return { plan: planRun(less, facts, { ...target, limits }, { drawIn }), rates: less, lightShare };
}
