import { chiSquareProbability } from "../fit/mod.ts";
import { GAIN_RANGE, type Match, type MatchedValue, type MatchFreedom, matchTemplate } from "./match.ts";
import type { MatchChannels } from "./matched_model.ts";
import type { Template, TemplateFamily } from "./template.ts";

/** One change of the scenario, tried alone. */
export interface Suspect {
  /** What is changed: a path of the scenario, the gain of the energy scale or a constant background. */
  readonly name: string;
  /** Unit of the value; empty for a number. */
  readonly unit: string;
  /** Value of the scenario. */
  readonly scenarioValue: number;
  /** Best value with its uncertainty; null in the uncertainty at the end of the range. */
  readonly best: MatchedValue;
  /** Range that was tried. */
  readonly range: readonly [lower: number, upper: number];
  /** Chi-square with the change. */
  readonly chiSquare: number;
  /** Drop of the deviance, divided by {@link SuspectReport.overdispersion} and by the design effect. */
  readonly drop: number;
  /** Share of the misfit (chi-square above its degrees of freedom) that goes with the change, 0..1. */
  readonly explainedShare: number;
  /** Akaike's criterion (QAICc) less that of the unchanged scenario: the more below zero, the better. */
  readonly criterionChange: number;
  /** Chance of such a drop by accident, for all suspects together (Bonferroni). */
  readonly chance: number;
  /** `true` when the fit converged. */
  readonly converged: boolean;
}

/** All suspects, the best first. */
export interface SuspectReport {
  /** Chi-square of the scenario as it is, only offset and intensity free. */
  readonly chiSquare: number;
  /** Its degrees of freedom. */
  readonly degreesOfFreedom: number;
  /** Reduced chi-square of the best description tried, at least 1: by so much the residuals are larger than noise. */
  readonly overdispersion: number;
  /** Suspects, ranked by the criterion. */
  readonly suspects: readonly Suspect[];
  /** Names of those that explain something, the best first; those that the data cannot tell from it follow. */
  readonly named: readonly string[];
  /** What it comes to, one sentence. */
  readonly conclusion: string;
}

/** Names of the suspects that are no parameters of the scenario. */
const GAIN_SUSPECT = "gain of the energy scale";
const BACKGROUND_SUSPECT = "constant background";

/** Chance of naming a suspect where there is none, all suspects together (chosen). */
const FAMILY_FALSE_ALARM = 0.01;
/** Criteria closer than this to the best have considerable support: Burnham & Anderson (2002), p. 70. */
const SUPPORTED = 2;
/** Misfit with a smaller chance than this needs an explanation. */
const MISFIT_CHANCE = 1e-3;
/** A suspect that leaves more than this share of the misfit explains little. */
const LEAST_EXPLAINED = 0.5;
const NOTHING: MatchFreedom = { gain: false, extraFwhm: false, background: false };

/**
 * Tries one change of the scenario at a time, offset and intensity free, and ranks the changes.
 *
 * Criterion: QAICc, `deviance / c + 2 k + 2 k (k + 1)/(n - k - 1)`, with c the reduced chi-square of the best description
 * tried (at least 1): K. Burnham, D. Anderson, Model Selection and Multimodel Inference, 2nd ed. (2002), sections 2.2 and
 * 2.5. The drop of the deviance is divided first by the design effect, the ratio of the full variance of the value (noise
 * of the simulation included) to that of counting alone, since correlated noise of the templates would otherwise pass for
 * signal: J. Rao, A. Scott, Ann. Stat. 12, 46 (1984).
 *
 * Caveats: a criterion ranks what is on the list and knows nothing else. Changes that do nearly the same (work function
 * and gain of the scale, temperature and resolution) share their support. Two changes at once are not tried.
 *
 * @param base Template of the scenario.
 * @param families One for each suspect.
 * @param channels Measured counts.
 * @param startOffsetEv Offset to start from, eV.
 * @returns The ranking.
 */
export function rankSuspects(
  base: Template,
  families: readonly TemplateFamily[],
  channels: MatchChannels,
  startOffsetEv: number,
): SuspectReport {
  const plain = matchTemplate(base, [], channels, NOTHING, startOffsetEv);
  const offsetEv = plain.values[0].value;
  const tried = [
    ...families.map((family) => ({
      name: family.name,
      parameter: family.name,
      unit: family.unit,
      scenarioValue: family.baseValue,
      range: [family.lower, family.upper] as const,
      match: matchTemplate(base, [family], channels, NOTHING, offsetEv),
    })),
    {
      name: GAIN_SUSPECT,
      parameter: "gain",
      unit: "",
      scenarioValue: 1,
      range: GAIN_RANGE,
      match: matchTemplate(base, [], channels, { ...NOTHING, gain: true }, offsetEv),
    },
    {
      name: BACKGROUND_SUSPECT,
      parameter: "backgroundCounts",
      unit: "counts",
      scenarioValue: 0,
      range: [-Infinity, Infinity] as const,
      match: matchTemplate(base, [], channels, { ...NOTHING, background: true }, offsetEv),
    },
  ];
  const reduced = (match: Match): number => match.chiSquare / match.degreesOfFreedom;
  const overdispersion = Math.max(1, Math.min(reduced(plain), ...tried.map(({ match }) => reduced(match))));
  const n = channels.counts.length;
  const penalty = (k: number): number => 2 * k + 2 * k * (k + 1) / (n - k - 1);
  const extra = penalty(tried[0].match.values.length) - penalty(plain.values.length);
  const misfit = plain.chiSquare - plain.degreesOfFreedom;
  const suspects = tried.map(({ name, parameter, unit, scenarioValue, range, match }): Suspect => {
    const found = match.values.find((value) => value.name === parameter)!;
    const design = found.standardUncertainty === null || found.fromCounting === null
      ? 1
      : (found.standardUncertainty / found.fromCounting) ** 2;
    const drop = Math.max(0, plain.deviance - match.deviance) / overdispersion / design;
    return {
      name,
      unit,
      scenarioValue,
      best: widened(found, name, overdispersion),
      range,
      chiSquare: match.chiSquare,
      drop,
      explainedShare: misfit > 0 ? Math.min(1, Math.max(0, (plain.chiSquare - match.chiSquare) / misfit)) : 0,
      criterionChange: extra - drop,
      chance: Math.min(1, tried.length * chiSquareProbability(drop, 1)),
      converged: match.converged,
    };
  }).sort((a, b) => Number(b.converged) - Number(a.converged) || a.criterionChange - b.criterionChange);
  const best = suspects[0];
  const isFound = best.converged && best.chance < FAMILY_FALSE_ALARM;
  const named = isFound
    ? suspects.filter((s) =>
      s.criterionChange <= best.criterionChange + SUPPORTED && s.chance < FAMILY_FALSE_ALARM
    )
      .map(({ name }) => name)
    : [];
  const leftChance = chiSquareProbability(isFound ? best.chiSquare : plain.chiSquare, plain.degreesOfFreedom);
  return {
    chiSquare: plain.chiSquare,
    degreesOfFreedom: plain.degreesOfFreedom,
    overdispersion,
    suspects,
    named: isFound && (leftChance >= MISFIT_CHANCE || best.explainedShare >= LEAST_EXPLAINED) ? named : [],
    conclusion: conclude(best, named, leftChance),
  };
}

function conclude(best: Suspect, named: readonly string[], leftChance: number): string {
  const isLeft = leftChance < MISFIT_CHANCE;
  if (named.length === 0) {
    return isLeft
      ? "nothing on the list explains the difference"
      : "nothing needs an explanation: no change on the list improves the description by more than chance";
  }
  const names = named.length === 1 ? named[0] : `${named.join(" or ")} (the data do not tell these apart)`;
  if (!isLeft) return `${names} explains the difference`;
  const share = `${(100 * best.explainedShare).toFixed(0)} % of the misfit`;
  return best.explainedShare >= LEAST_EXPLAINED
    ? `${names} explains ${share}; something else is different too`
    : `nothing on the list explains the difference: the best, ${names}, takes ${share} away`;
}

function widened(value: MatchedValue, name: string, overdispersion: number): MatchedValue {
  const factor = Math.sqrt(overdispersion);
  const times = (u: number | null): number | null => (u === null ? null : factor * u);
  return {
    name,
    value: value.value,
    standardUncertainty: times(value.standardUncertainty),
    fromCounting: times(value.fromCounting),
    fromSimulation: factor * value.fromSimulation,
  };
}
