import { chiSquareProbability, runsTest } from "../fit/mod.ts";
import type { MatchChannels } from "./matched_model.ts";
import { type Match, varianceOf } from "./match.ts";
import type { Template } from "./template.ts";

/** How well one part of a spectrum is described. */
export interface PartTest {
  /** Which part. */
  readonly part: "cutoff" | "middle" | "Fermi edge" | "all";
  /** First and last energy, on the axis as recorded, eV. */
  readonly rangeEv: readonly [number, number];
  /** Channels. */
  readonly channels: number;
  /** Sum of squared residuals over their variances, those of the simulation included. */
  readonly chiSquare: number;
  /** Channels less this part's share of the fitted parameters. */
  readonly degreesOfFreedom: number;
  /** Probability of a larger chi-square by chance. */
  readonly chiSquareProbability: number;
  /** Probability of as few runs of residuals of one sign by chance (A. Wald, J. Wolfowitz 1940). */
  readonly runsProbability: number;
  /** Mean share of the variance that is the simulation's. */
  readonly simulationShare: number;
}

/** How far about an edge its part reaches, eV, and in widths of the resolution (chosen). */
const EDGE_REACH_EV = 0.5;
const EDGE_REACH_FWHM = 4;

/**
 * Tests a match part by part: about the cutoff, between the edges, about the Fermi edge, and as a whole.
 *
 * @param match The match.
 * @param channels Its channels.
 * @param template Its template.
 * @param resolutionFwhmEv Resolution of the scenario, eV.
 * @returns Parts with at least two channels, the whole last.
 */
export function testParts(
  match: Match,
  channels: MatchChannels,
  template: Template,
  resolutionFwhmEv: number,
): PartTest[] {
  const reach = Math.max(EDGE_REACH_EV, EDGE_REACH_FWHM * resolutionFwhmEv);
  const offsetEv = match.values.find(({ name }) => name === "offsetEv")?.value ?? 0;
  const partOf = (energyEv: number): PartTest["part"] => {
    if (energyEv - offsetEv < template.cutoffEv + reach) return "cutoff";
    return energyEv - offsetEv > template.fermiEdgeEv - reach ? "Fermi edge" : "middle";
  };
  const order = Array.from(channels.energiesEv.keys()).sort((a, b) =>
    channels.energiesEv[a] - channels.energiesEv[b]
  );
  const parts = ["cutoff", "middle", "Fermi edge", "all"] as const;
  return parts.flatMap((part) => {
    const members = order.filter((i) => part === "all" || partOf(channels.energiesEv[i]) === part);
    if (members.length < 2) return [];
    let chiSquare = 0;
    let simulation = 0;
    const residuals = members.map((i) => {
      const variance = varianceOf(match.expected[i], match.standardErrors[i]);
      const residual = channels.counts[i] - match.expected[i];
      chiSquare += residual * residual / variance;
      simulation += match.standardErrors[i] ** 2 / variance;
      return residual;
    });
    const degreesOfFreedom = members.length * match.degreesOfFreedom / channels.counts.length;
    return [{
      part,
      rangeEv: [channels.energiesEv[members[0]], channels.energiesEv[members[members.length - 1]]] as const,
      channels: members.length,
      chiSquare,
      degreesOfFreedom,
      chiSquareProbability: chiSquareProbability(chiSquare, degreesOfFreedom),
      runsProbability: runsTest(residuals).probability,
      simulationShare: simulation / members.length,
    }];
  });
}

/** What a comparison comes to. */
export interface Agreement {
  /** `agrees`, `differs`, or `failed` when the fit gave no answer. */
  readonly verdict: "agrees" | "differs" | "failed";
  /** Why it is not `agrees`, in sentences. */
  readonly reasons: readonly string[];
  /** What weakens the answer, in sentences. */
  readonly cautions: readonly string[];
}

/** Chance at which one of the tests alarms on a true scenario (chosen; twelve tests, so about 1 % altogether). */
const FALSE_ALARM = 1e-3;
/** Standard uncertainties beyond which a nuisance is no accident: 0.1 % two-sided. */
const SIGMAS = 3.29;
/** A share of the simulation in the variance above which its correlated noise can fool the runs test (chosen). */
const MUCH_SIMULATION = 0.1;

/**
 * Judges an alignment.
 *
 * @param match The alignment, all nuisances free.
 * @param parts Its tests.
 * @param isAbsolute `true` where the file says where the zero of its axis is, so that an offset counts as a difference.
 * @returns Verdict and reasons.
 */
export function judgeMatch(match: Match, parts: readonly PartTest[], isAbsolute: boolean): Agreement {
  if (!match.converged) {
    return { verdict: "failed", reasons: [`the fit gave no answer: ${match.reason}`], cautions: [] };
  }
  const reasons: string[] = [];
  const cautions: string[] = [];
  for (const { part, chiSquare, degreesOfFreedom, chiSquareProbability, runsProbability } of parts) {
    const where = part === "all" ? "the whole spectrum" : `the ${part}`;
    if (chiSquareProbability < FALSE_ALARM) {
      reasons.push(
        `chi-square of ${where} is ${chiSquare.toFixed(0)} for ${
          degreesOfFreedom.toFixed(0)
        } degrees of freedom`,
      );
    } else if (runsProbability < FALSE_ALARM) {
      reasons.push(`residuals of ${where} keep their sign for too long (runs test)`);
    }
  }
  const nuisance = (
    name: string,
    neutral: number,
    sigmas: number,
    digits: number,
    say: (value: string) => string,
  ): void => {
    const found = match.values.find((value) => value.name === name);
    if (found === undefined || found.standardUncertainty === null) return;
    if (Math.abs(found.value - neutral) <= sigmas * found.standardUncertainty) return;
    reasons.push(say(`${found.value.toFixed(digits)} +- ${found.standardUncertainty.toFixed(digits)}`));
  };
  if (isAbsolute) nuisance("offsetEv", 0, SIGMAS, 4, (value) => `the energy axis is off by ${value} eV`);
  nuisance(
    "gain",
    1,
    SIGMAS,
    5,
    (value) => `the edges are further apart than in the scenario by a factor of ${value}`,
  );
  // What is nearly normal is the square of the width, whose relative uncertainty is twice that of the width.
  nuisance(
    "extraFwhmEv",
    0,
    2 * SIGMAS,
    4,
    (value) => `the spectrum is broader by a Gaussian of ${value} eV FWHM`,
  );
  nuisance(
    "backgroundCounts",
    0,
    SIGMAS,
    2,
    (value) => `there is a constant background of ${value} counts`,
  );
  for (const name of match.atBound) {
    if (name !== "extraFwhmEv") reasons.push(`${name} ran into the end of its range`);
  }
  const share = Math.max(...parts.map(({ simulationShare }) => simulationShare));
  if (share > MUCH_SIMULATION) {
    cautions.push(
      `${(100 * share).toFixed(0)} % of the variance is noise of the simulation: raise simulation.histories`,
    );
  }
  return { verdict: reasons.length === 0 ? "agrees" : "differs", reasons, cautions };
}
