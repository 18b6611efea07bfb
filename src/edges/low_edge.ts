import { fitCutoff, type FittedCutoff } from "./cutoff.ts";
import type { AcceptanceRamp } from "./cutoff_model.ts";
import type { IntervalOptions } from "./fitted_edge.ts";
import { cutoffCandidate, edgeCandidates } from "./locate.ts";
import { fitPatches, type Patches } from "./patches.ts";
import type { CommonFacts, KineticRegion } from "./regions.ts";
import { type Findings, judgeCutoff, judgeEdge } from "./verdict.ts";

/**
 * A top that rises by more than this share is not that of a clean step. The sharp quantum barrier of our own simulation
 * (Au, Al) rises by 0.4 to 0.5 and moves the fitted cutoff up by 18 to 20 meV, taken as standard uncertainty (chosen).
 */
export const LATE_RISE_SHARE = 0.1;
/** A fit of one cutoff worse than this chance is compared with one of two. */
const SUSPICIOUS = 0.01;

/** The cutoff that was taken, and both where there are two. */
export type LowEdge = {
  readonly region: KineticRegion;
  readonly cutoff: FittedCutoff;
  readonly patches: Patches | null;
};

/** The cutoff, in the region with the most significant low edge; two where one does not describe the counts. */
export function findCutoff(
  regions: readonly KineticRegion[],
  ramp: AcceptanceRamp | null,
  intervals: IntervalOptions,
): LowEdge | null {
  const best = regions.flatMap((region) => {
    const candidates = edgeCandidates(region.energiesEv, region.counts);
    const candidate = cutoffCandidate(candidates);
    return candidate ? [{ region, candidate, candidates }] : [];
  }).sort((a, b) => b.candidate.significance - a.candidate.significance)[0];
  if (best === undefined) return null;
  const { region, candidate, candidates } = best;
  const options = { ramp, intervals };
  const one = fitCutoff(region.energiesEv, region.counts, candidate, options);
  if (one === null) return null;
  const rises = candidates.filter((other) => other.significance > 0).map((other) => other.energyEv);
  const isSuspicious = one.tests.chiSquareProbability < SUSPICIOUS || one.lateRise > LATE_RISE_SHARE ||
    rises.some((rise) => rise < one.positionEv.value && rise !== candidate.energyEv);
  const two = isSuspicious || !one.converged
    ? fitPatches(region.energiesEv, region.counts, one, rises, options)
    : null;
  return { region, cutoff: two?.edge ?? one, patches: two?.patches ?? null };
}

/** All that speaks against the cutoff. */
export function judgeLow(low: LowEdge, facts: CommonFacts, findings: Findings): void {
  judgeEdge("secondary cutoff", low.cutoff, findings);
  judgeCutoff(low.cutoff, low.region, facts, findings);
  if (low.patches !== null) {
    const { lowerEv, upperEv, upperShare, bicGain } = low.patches;
    findings.doubt(
      `one step does not describe the secondary cutoff; two, at ${lowerEv.value.toFixed(3)} and ` +
        `${upperEv.value.toFixed(3)} eV with heights as 1 : ${
          upperShare.value.toFixed(2)
        }, do better (BIC lower by ${
          bicGain.toFixed(0)
        }): patches of different work function, a barrier that opens slowly, or a wide acceptance; the work ` +
        "function is that of the lower step; measure a smaller spot, another bias, and a clean surface",
    );
  }
  if (low.cutoff.converged && low.cutoff.lateRise > LATE_RISE_SHARE) {
    findings.doubt(
      `the counts rise by ${
        (100 * low.cutoff.lateRise).toFixed(0)
      } % over the 0.3 eV above the cutoff: the ` +
        "barrier opens slowly or the surface has several work functions; the cutoff may lie lower",
    );
  }
}
