import { cannot, InputError, type Notice } from "../base/mod.ts";
import { nearestLine } from "../data/mod.ts";
import type { PlanFacts, Rates } from "./facts.ts";
import { findings } from "./findings.ts";
import { channelsOf, type PredictedNumbers, type Prediction, predictRun, type RunWindow } from "./predict.ts";
import { leastTimeS, optimalShares } from "./split.ts";

/** What a run is to reach, and what it may take. */
export interface PlanTarget {
  /** Wanted combined standard uncertainty of the work function, eV, > 0. */
  readonly targetEv: number;
  /** Limits of the time; the least counts. */
  readonly limits: readonly TimeLimit[];
}

/** A limit of the time. */
export interface TimeLimit {
  /** What limits it, such as `--hours`. */
  readonly name: string;
  /** Time, s, > 0. */
  readonly timeS: number;
  /** `true` where it is a dose of light, so that less light extends it. */
  readonly byLight: boolean;
}

/** `reached`; `limited` by the time that is allowed; stopped by the `floor`, which no time lowers; or no fit at all. */
export type RunStatus = "reached" | "limited" | "floor" | "failed";

/** A window as it is to be set at the instrument. */
export interface PlannedWindow extends RunWindow {
  /** Channels. */
  readonly channels: number;
  /** Step, eV. */
  readonly stepEv: number;
  /** Time in a channel in one sweep, s. */
  readonly dwellS: number;
  /** Sweeps. */
  readonly sweeps: number;
  /** Highest recorded rate in the window, counts/s. */
  readonly peakCountsPerS: number;
  /** Counts expected in the highest channel after all sweeps: when to stop. */
  readonly peakCounts: number;
}

/** How to spend the time, and what it gives. */
export interface RunPlan {
  /** Whether the target is reached. */
  readonly status: RunStatus;
  /** One sentence why. */
  readonly reason: string;
  /** Least time for the target, s, windows ideally split; Infinity where the floor is above it, NaN without a fit. */
  readonly leastTimeS: number;
  /** Windows, the cutoff's first; empty without a fit. */
  readonly windows: readonly PlannedWindow[];
  /** Time of all windows in whole sweeps, s. */
  readonly timeS: number;
  /** Predicted combined standard uncertainty after that time, eV. */
  readonly uncertaintyEv: number;
  /** Change of it by one minute more, split between the windows as here, eV. */
  readonly nextMinuteEv: number;
  /** The prediction for these windows. */
  readonly numbers: PredictedNumbers | null;
  /** What will go wrong, found in the simulated spectrum. */
  readonly findings: readonly Notice[];
}

interface Span {
  readonly name: string;
  readonly fromEv: number;
  readonly toEv: number;
}

/** More sweeps than one show a drift; a run has at least so many (chosen). */
const LEAST_SWEEPS = 2;
/** Supplies need some tens of milliseconds to settle after a step: no shorter dwell where time allows (chosen), s. */
const LEAST_DWELL_S = 0.05;
/** Where the floor is above the target, time is spent until counting adds 5 % to the floor: a third of it. */
const SHARE_OF_FLOOR = 1 / 3;
/** How far below and above the Fermi edge itself the window reaches without satellites, eV: as far as the fit looks. */
const ABOVE_EDGE_EV = 0.6;
const BEYOND_SATELLITE_EV = 0.8;
/** How far above the Fermi level a window reaches that shows that there is no Fermi edge, eV. */
const BEYOND_LEVEL_EV = 0.2;
/** A plan takes no longer than a year, s. */
const MOST_TIME_S = 3.2e7;
/** The part of a spectrum around the cutoff in which it is looked for, eV. */
const CUTOFF_PART_EV = 2.5;
/** Parts by which the limits of a window are drawn in toward the edge, to see whether that saves time. */
const DRAWN_IN = [0, 0.25, 0.5];
/** A narrower window must save this share of the time. */
const WORTHWHILE = 0.03;

const NO_RUN = {
  leastTimeS: NaN,
  windows: [],
  timeS: NaN,
  uncertaintyEv: NaN,
  nextMinuteEv: NaN,
  numbers: null,
};

/**
 * Plans a run of two windows for a target, or for the time allowed.
 *
 * Windows are those the fit uses; the time is split by {@link optimalShares}. Where a satellite would spoil the upper
 * window, one that shows the satellite itself is tried.
 *
 * @param rates Expected rates, from below the cutoff to above the Fermi level.
 * @param facts Settings.
 * @param target What is wanted.
 * @param options `drawIn` also tries narrower windows, some tens of fits more. Default: false.
 * @returns The plan; one that cannot be carried out has a status that says so.
 * @throws {InputError} If the target or a limit is not > 0.
 */
export function planRun(
  rates: Rates,
  facts: PlanFacts,
  target: PlanTarget,
  { drawIn = false }: { readonly drawIn?: boolean } = {},
): RunPlan {
  check(target);
  const survey = predictRun(rates, facts, surveyWindows(rates, facts));
  if (survey.numbers === null) return failed("fit of the simulated spectrum", facts, survey);
  const { quantity } = survey.numbers;
  const [low, high] = survey.numbers.edges;
  const last = rates.energiesEv[rates.energiesEv.length - 1];
  const lower: Span = { name: low.name, fromEv: low.fitWindowEv[0], toEv: low.fitWindowEv[1] };
  const upper: Span = {
    name: high.name,
    fromEv: high.fitWindowEv[0],
    toEv: Math.max(
      Math.min(high.fitWindowEv[1], high.positionEv + ABOVE_EDGE_EV),
      // Where no Fermi edge is found, the data must show that there is none.
      quantity === "ionizationEnergyEv" ? facts.fermiLevelEv + BEYOND_LEVEL_EV : -Infinity,
    ),
  };
  const reach = Math.max(
    0,
    ...(nearestLine(facts.photonEnergyEv)?.satellites ?? []).map(({ shiftEv }) => shiftEv),
  );
  const plan = (spans: readonly [Span, Span]): RunPlan => settle(rates, facts, target, spans, quantity);
  let best = plan([lower, upper]);
  let spans: readonly [Span, Span] = [lower, upper];
  const isSpoiled = best.numbers === null || best.numbers.floorEv > best.numbers.systematicEv;
  if (reach > 0 && isSpoiled) {
    const wide = {
      ...upper,
      fromEv: upper.fromEv - reach,
      toEv: Math.min(last, high.positionEv + reach + BEYOND_SATELLITE_EV),
    };
    const other = plan([lower, wide]);
    if (isBetter(other, best)) [best, spans] = [other, [lower, wide]];
  }
  if (!drawIn || best.numbers === null) return best;
  for (const which of [0, 1] as const) {
    const { positionEv } = best.numbers!.edges[which];
    const { fromEv, toEv } = spans[which];
    for (const below of DRAWN_IN) {
      for (const above of DRAWN_IN) {
        if (below === 0 && above === 0) continue;
        const narrow = {
          ...spans[which],
          fromEv: fromEv + below * (positionEv - fromEv),
          toEv: toEv - above * (toEv - positionEv),
        };
        const tried: readonly [Span, Span] = which === 0 ? [narrow, spans[1]] : [spans[0], narrow];
        const other = plan(tried);
        if (isWorthwhile(other, best)) [best, spans] = [other, tried];
      }
    }
  }
  return best;
}

function check({ targetEv, limits }: PlanTarget): void {
  const problems = [
    { name: "--target-ev", value: targetEv, unit: "eV" },
    ...limits.map(({ name, timeS }) => ({ name, value: timeS, unit: "s" })),
  ].filter(({ value }) => !(value > 0));
  if (problems.length === 0) return;
  throw new InputError(problems.map(({ name, value, unit }) => ({
    place: name,
    message: cannot("plan", `${name} must be > 0 ${unit}`, `${value} ${unit}`),
  })));
}

/** The whole spectrum in two parts, each counted as long as the scenario says. */
function surveyWindows(rates: Rates, facts: PlanFacts): RunWindow[] {
  const { energiesEv } = rates;
  const middle = Math.min(facts.cutoffEv + CUTOFF_PART_EV, 0.5 * (facts.cutoffEv + facts.fermiLevelEv));
  return [
    { name: "lower part", fromEv: energiesEv[0], toEv: middle },
    { name: "upper part", fromEv: middle, toEv: energiesEv[energiesEv.length - 1] },
  ].map((span) => {
    const [from, past] = channelsOf(rates, span);
    return { ...span, timeS: Math.max(1, past - from) * facts.timePerChannelS };
  });
}

/** A plan that cannot be made. */
function failed(what: string, facts: PlanFacts, prediction: Prediction): RunPlan {
  return {
    ...NO_RUN,
    status: "failed",
    reason: `the ${what} fails${
      prediction.reasons.length > 0 ? `: ${prediction.reasons.join("; ")}` : ""
    }; if the spectrum is noisy, follow more photons or measure longer`,
    findings: findings(facts, prediction, null),
  };
}

/** Times, sweeps and prediction for given windows. */
function settle(
  rates: Rates,
  facts: PlanFacts,
  target: PlanTarget,
  spans: readonly [Span, Span],
  quantity: PredictedNumbers["quantity"],
): RunPlan {
  const limit = target.limits.reduce<TimeLimit | null>(
    (least, one) => least === null || one.timeS < least.timeS ? one : least,
    null,
  );
  const mostS = limit?.timeS ?? MOST_TIME_S;
  const ranges = spans.map((span) => channelsOf(rates, span));
  const whole = spans.map((span, i) => ({
    ...span,
    timeS: Math.max(1, ranges[i][1] - ranges[i][0]) * facts.timePerChannelS,
  }));
  let prediction = predictRun(rates, facts, whole);
  let numbers = prediction.numbers;
  if (numbers === null) return failed("fit of the two windows", facts, prediction);
  // With few counts a fit may take a faint Fermi edge for something else, or find none: so long must be measured at least.
  let foundS = 0;
  let windows: readonly PlannedWindow[];
  for (;;) {
    windows = setWindows(
      rates,
      facts,
      spans,
      ranges,
      numbers,
      Math.max(goalS(numbers, target), foundS),
      mostS,
    );
    prediction = predictRun(rates, facts, windows);
    if (prediction.numbers?.quantity === quantity) break;
    foundS = 2 * windows.reduce((sum, window) => sum + window.timeS, 0);
    if (foundS > mostS) {
      return failed(`fit of what can be measured in ${mostS.toPrecision(3)} s`, facts, prediction);
    }
  }
  numbers = prediction.numbers;
  windows = setWindows(rates, facts, spans, ranges, numbers, Math.max(goalS(numbers, target), foundS), mostS);
  const timeS = windows.reduce((sum, window) => sum + window.timeS, 0);
  const varianceTimes = numbers.edges.map(({ varianceTimeEv2S }) => varianceTimeEv2S);
  const statisticalEv = Math.sqrt(varianceTimes.reduce((sum, one, i) => sum + one / windows[i].timeS, 0));
  const uncertaintyEv = Math.hypot(statisticalEv, numbers.floorEv);
  const leastS = Math.max(foundS, leastTimeS(varianceTimes, numbers.floorEv, target.targetEv));
  return {
    ...judge(numbers, target, leastS, limit, uncertaintyEv),
    leastTimeS: leastS,
    windows,
    timeS,
    uncertaintyEv,
    nextMinuteEv: Math.hypot(statisticalEv * Math.sqrt(timeS / (timeS + 60)), numbers.floorEv) -
      uncertaintyEv,
    numbers: { ...numbers, statisticalEv },
    findings: findings(facts, prediction, windows),
  };
}

/** Time that the target asks for, or where no time reaches it, that brings counting down to a share of the floor, s. */
function goalS({ edges, floorEv }: PredictedNumbers, { targetEv }: PlanTarget): number {
  const varianceTimes = edges.map(({ varianceTimeEv2S }) => varianceTimeEv2S);
  const leastS = leastTimeS(varianceTimes, floorEv, targetEv);
  return Number.isFinite(leastS) ? leastS : leastTimeS(varianceTimes, 0, SHARE_OF_FLOOR * floorEv);
}

/** Windows with the time ideally split, in whole sweeps; no longer than allowed. */
function setWindows(
  rates: Rates,
  facts: PlanFacts,
  spans: readonly Span[],
  ranges: readonly (readonly [from: number, past: number])[],
  { edges }: PredictedNumbers,
  wantedS: number,
  mostS: number,
): PlannedWindow[] {
  const shares = optimalShares(edges.map(({ varianceTimeEv2S }) => varianceTimeEv2S));
  const settings = shares.map((share, i) => {
    const channels = ranges[i][1] - ranges[i][0];
    const perChannelS = (share * Math.min(wantedS, mostS)) / channels;
    const sweeps = Math.max(LEAST_SWEEPS, Math.ceil(perChannelS / facts.dwellS));
    const dwellS = perChannelS / sweeps;
    return { channels, sweeps, dwellS, calmS: Math.max(dwellS, Math.min(LEAST_DWELL_S, facts.dwellS)) };
  });
  const calmS = settings.reduce((sum, { channels, sweeps, calmS }) => sum + channels * sweeps * calmS, 0);
  return settings.map(({ channels, sweeps, ...dwell }, i) => {
    const dwellS = calmS > mostS ? dwell.dwellS : dwell.calmS;
    const peakCountsPerS = rates.countsPerS.subarray(...ranges[i]).reduce((a, b) => Math.max(a, b), 0);
    return {
      ...spans[i],
      fromEv: rates.energiesEv[ranges[i][0]],
      toEv: rates.energiesEv[ranges[i][1] - 1],
      timeS: channels * dwellS * sweeps,
      channels,
      stepEv: facts.stepEv,
      dwellS,
      sweeps,
      peakCountsPerS,
      peakCounts: peakCountsPerS * dwellS * sweeps,
    };
  });
}

function judge(
  numbers: PredictedNumbers,
  { targetEv }: PlanTarget,
  leastS: number,
  limit: TimeLimit | null,
  uncertaintyEv: number,
): { readonly status: RunStatus; readonly reason: string } {
  const meV = (value: number): string => `${(1000 * value).toPrecision(3)} meV`;
  if (leastS === Infinity) {
    const [first] = numbers.systematicTerms;
    return {
      status: "floor",
      reason:
        `no time reaches ${meV(targetEv)}: ${meV(numbers.floorEv)} do not shrink with time, most of it ` +
        `${first.name} (${meV(first.standardUncertaintyEv)})`,
    };
  }
  if (limit !== null && leastS > limit.timeS) {
    return {
      status: "limited",
      reason: `${meV(targetEv)} would take ${leastS.toPrecision(3)} s, and ${limit.name} allows ${
        limit.timeS.toPrecision(3)
      } s, after which it is ${meV(uncertaintyEv)}`,
    };
  }
  return { status: "reached", reason: `${meV(targetEv)} is reached` };
}

const ORDER: readonly RunStatus[] = ["reached", "limited", "floor", "failed"];

/** Order of plans: those that reach the target by time, the others by what they reach. */
export function comparePlans(a: RunPlan, b: RunPlan): number {
  const status = ORDER.indexOf(a.status) - ORDER.indexOf(b.status);
  if (status !== 0 || a.status === "failed") return status;
  return a.status === "reached" ? a.leastTimeS - b.leastTimeS : a.uncertaintyEv - b.uncertaintyEv;
}

function isBetter(a: RunPlan, b: RunPlan): boolean {
  return comparePlans(a, b) < 0;
}

/** A narrower window is taken where it saves time and the fit has no more to complain of. */
function isWorthwhile(narrow: RunPlan, best: RunPlan): boolean {
  if (narrow.numbers === null || best.numbers === null || narrow.status !== best.status) return false;
  if (narrow.findings.length > best.findings.length) return false;
  const cost = ({ status, leastTimeS, uncertaintyEv }: RunPlan): number =>
    status === "reached" ? leastTimeS : uncertaintyEv ** 2;
  return cost(narrow) < (1 - WORTHWHILE) * cost(best);
}
