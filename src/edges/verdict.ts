import { FWHM_PER_SIGMA } from "../math/mod.ts";
import type { Notice } from "../base/mod.ts";
import type { FittedCutoff } from "./cutoff.ts";
import type { BadChannels } from "./data_checks.ts";
import type { EnergyReference } from "./energy_reference.ts";
import type { FittedFermiEdge } from "./fermi.ts";
import type { FittedEdge } from "./fitted_edge.ts";
import { edgeCandidates, meanCounts } from "./locate.ts";
import type { CommonFacts, KineticRegion } from "./regions.ts";
import type { Verdict } from "./result.ts";
import type { FittedValenceEdge } from "./valence.ts";

/** Misfit that makes an edge doubtful: reduced chi-square and chance probability together. */
const MISFIT_REDUCED = 2;
const MISFIT_PROBABILITY = 1e-4;
/**
 * Residuals of so few runs make an edge doubtful where they are also as large as counting makes them; with two edges a
 * good fit is flagged once in 500.
 */
const RUNS_PROBABILITY = 1e-3;
/** Share lost to dead time that is worth a word, and that makes the top doubtful (chosen). */
const DEAD_SHARE = 0.02;
const DEAD_SHARE_DOUBTFUL = 0.2;
/** A Fermi edge this far from where bias and analyzer work function put it suggests charging, eV (chosen). */
const CHARGING_EV = 0.15;
/** A Fermi edge this much wider than the known resolution suggests charging or a wrong temperature (chosen). */
const CHARGING_WIDTH = 1.5;
/** A stated resolution this much wider than an edge cannot be that of the measurement (chosen). */
const TOO_WIDE = 1.25;
/** Both scales of a valence-band maximum should agree to this, eV (chosen), and within three standard uncertainties. */
const SCALES_EV = 0.3;
/** On a kinetic axis an analyzer's own cutoff lies at its zero; a cutoff this close to it may be that one, eV. */
const OWN_LIMIT_EV = 0.5;
/** More failed replicates of a bootstrap than this share are too many (chosen). */
const BOOTSTRAP_FAILURES = 0.05;
/** An axis can be read in the wrong direction only where it is long enough to show both edges, eV. */
const REVERSIBLE_EV = 5;

/** What speaks against an answer, collected on the way. */
export class Findings {
  /** Reasons, in the order they were found. */
  readonly reasons: string[] = [];
  /** What else should be known. */
  readonly warnings: Notice[] = [];
  #failed = false;

  /** The answer must not be used. */
  fail(reason: string): void {
    this.#failed = true;
    this.reasons.push(reason);
  }

  /** The answer must be looked at. */
  doubt(reason: string): void {
    this.reasons.push(reason);
  }

  /** Worth knowing. */
  warn(code: string, message: string, place = ""): void {
    this.warnings.push({ code, message, place });
  }

  /** `true` once anything failed. */
  get failed(): boolean {
    return this.#failed;
  }

  /** The verdict so far. */
  get verdict(): Verdict {
    return this.#failed ? "failed" : this.reasons.length > 0 ? "doubtful" : "good";
  }
}

/** `true` when a model does not describe an edge. */
export function isMisfit({ tests }: FittedEdge): boolean {
  return tests.reducedChiSquare > MISFIT_REDUCED && tests.chiSquareProbability < MISFIT_PROBABILITY;
}

/** Convergence, misfit, order of the residuals, channels on the edge, bootstrap. */
export function judgeEdge(name: string, edge: FittedEdge, findings: Findings): void {
  if (!edge.converged) return findings.fail(`the fit of the ${name} did not converge: ${edge.reason}`);
  const { reducedChiSquare, runs } = edge.tests;
  if (isMisfit(edge)) {
    findings.doubt(
      `the model does not describe the ${name}: chi-square is ${reducedChiSquare.toFixed(1)} per degree of ` +
        "freedom; its uncertainty is enlarged, look at the residuals",
    );
  } else if (runs.probability < RUNS_PROBABILITY && reducedChiSquare > 1) {
    findings.doubt(
      `the residuals of the ${name} are structured: ${runs.runs} runs of one sign where ` +
        `${runs.expectedRuns.toFixed(0)} are expected; look at the figure, and fit a cleaner or wider window`,
    );
  }
  if (edge.channelsOnEdge < 3) {
    findings.doubt(
      `only ${
        edge.channelsOnEdge.toFixed(1)
      } channels lie on the ${name} (10 to 90 %); measure with a smaller step`,
    );
  }
  const { bootstrap } = edge;
  if (bootstrap !== null && bootstrap.failures > BOOTSTRAP_FAILURES * bootstrap.positionsEv.length) {
    findings.doubt(
      `${bootstrap.failures} of ${bootstrap.positionsEv.length} bootstrap fits of the ${name} failed: its ` +
        "uncertainty is not established; measure longer",
    );
  }
}

/** Whether the lowest rise is a cutoff of the sample at all. */
export function judgeCutoff(
  cutoff: FittedCutoff,
  region: KineticRegion,
  facts: CommonFacts,
  findings: Findings,
): void {
  if (!cutoff.converged) return;
  const { energiesEv, counts } = region;
  const position = cutoff.positionEv.value;
  const sigma = cutoff.sigmaEv.value;
  const below = meanCounts(energiesEv, counts, position - 4 * sigma - 0.5, position - 3.5 * sigma);
  const above = meanCounts(energiesEv, counts, position + 2 * sigma, position + 2 * sigma + 0.5);
  if (position - energiesEv[0] < 4 * sigma) {
    findings.fail("the window starts on the cutoff itself; start at least 0.3 eV lower");
  } else if (!(below < 0.4 * above)) {
    findings.fail(
      "the lowest rise of the counts is not a cutoff: the counts below it are not small; start lower in energy",
    );
  }
  if (region.fromBinding) return;
  if (facts.asRecorded && position < OWN_LIMIT_EV) {
    findings.doubt("the cutoff lies at the analyzer's own limit; apply a larger negative bias");
  } else if (!facts.asRecorded && (facts.biasV ?? 0) === 0 && position < OWN_LIMIT_EV) {
    findings.doubt(
      "the cutoff lies at the zero of a kinetic axis whose bias is not known and may be the analyzer's own limit; " +
        "apply a negative bias and state it with --bias",
    );
  } else if (facts.biasV === null) {
    findings.warn(
      "bias-unknown",
      "the bias is not known: whether the cutoff is the sample's and not the analyzer's cannot be checked",
    );
  }
}

/** No edge is sharper than the resolution. */
export function judgeResolution(
  name: string,
  edge: FittedEdge | null,
  { resolutionFwhmEv }: CommonFacts,
  findings: Findings,
): void {
  if (edge === null || !edge.converged || resolutionFwhmEv === null) return;
  const found = FWHM_PER_SIGMA * edge.sigmaEv.value;
  const isWider = resolutionFwhmEv > TOO_WIDE * found &&
    resolutionFwhmEv - found > 3 * FWHM_PER_SIGMA * edge.sigmaEv.standardUncertainty;
  if (isWider) {
    findings.doubt(
      `the stated resolution of ${
        (1000 * resolutionFwhmEv).toFixed(0)
      } meV FWHM is wider than the ${name}, ` +
        `${(1000 * found).toFixed(0)} meV: it is wrong, and uncertainties that rest on it are too small`,
    );
  }
}

/** A Fermi edge where the axis has none: the axis is not what it is said to be, unless the edge is a narrow band's. */
export function judgeStrayFermiEdge(
  edge: FittedFermiEdge,
  references: readonly EnergyReference[],
  findings: Findings,
): void {
  const position = edge.positionEv.value;
  const nearest = references.map(({ fermiLevelEv }) => position - fermiLevelEv)
    .sort((a, b) => Math.abs(a) - Math.abs(b))[0];
  const message =
    `a sharp edge like a Fermi edge lies ${Math.abs(nearest).toFixed(2)} eV ${
      nearest < 0 ? "below" : "above"
    } where the axis puts the Fermi level: the bias, the analyzer work function, the photon energy or the kind of ` +
    "axis is wrong, or the sample charges or has no contact; if the edge is the Fermi edge, state its position " +
    "with --fermi-level";
  if (isMisfit(edge)) findings.doubt(`${message}; if it is not, it is a narrow band`);
  else findings.fail(message);
}

/** The two lines of a valence-band maximum. */
export function judgeValenceScales(valence: FittedValenceEdge, gain: number, findings: Findings): void {
  const { positionEv, lineUncertaintyEv, logarithmicEv } = valence;
  if (logarithmicEv === null || !valence.converged) return;
  const difference = Math.abs(logarithmicEv.value - positionEv.value) / gain;
  const uncertainty = Math.hypot(
    positionEv.standardUncertainty,
    lineUncertaintyEv,
    logarithmicEv.standardUncertainty,
  ) / gain;
  if (difference > SCALES_EV && difference > 3 * uncertainty) {
    findings.doubt(
      `the valence-band maxima on a linear and on a logarithmic scale lie ${
        difference.toFixed(2)
      } eV apart, ` +
        `${
          (difference / uncertainty).toFixed(0)
        } standard uncertainties: states in the gap, or a leading edge that ` +
        "is not straight; say which one you quote",
    );
  }
}

/** What a Fermi edge says about charging. */
export function judgeFermiEdge(
  edge: FittedFermiEdge,
  region: KineticRegion,
  facts: CommonFacts,
  omittedShiftEv: number,
  findings: Findings,
): void {
  const position = edge.positionEv.value;
  const { biasV, analyzerWorkFunctionEv } = facts;
  const expected = region.fromBinding
    ? region.photonEnergyEv
    : facts.asRecorded && biasV !== null && analyzerWorkFunctionEv !== null
    ? region.photonEnergyEv - Math.abs(analyzerWorkFunctionEv) - biasV
    : null;
  if (expected !== null && Math.abs(position - expected) > CHARGING_EV) {
    findings.doubt(
      `the Fermi edge lies ${
        (position - expected).toFixed(2)
      } eV from where the axis puts it: charging, a loose ` +
        "contact, or a wrong bias or analyzer work function; repeat with less light and check the contact",
    );
  }
  if (facts.resolutionFwhmEv !== null) {
    const known = facts.resolutionFwhmEv / FWHM_PER_SIGMA;
    const { value, standardUncertainty } = edge.sigmaEv;
    if (value > CHARGING_WIDTH * known && value - known > 3 * standardUncertainty) {
      findings.doubt(
        `the Fermi edge is ${
          (value / known).toFixed(1)
        } times as wide as temperature and the stated resolution make ` +
          "it: uneven charging, or a wrong temperature or resolution",
      );
    }
  }
  if (omittedShiftEv > Math.max(0.003, 2 * edge.positionEv.standardUncertainty)) {
    findings.doubt(
      `a satellite line of the lamp may lie over the Fermi edge and move it by ${
        (1000 * omittedShiftEv).toFixed(0)
      } meV, as the window ends below the satellite's own edge; measure 3 eV further up`,
    );
  }
}

/** Channels and regions that cannot be what they seem. */
export function judgeData(
  regions: readonly KineticRegion[],
  used: readonly { readonly name: string; readonly region: KineticRegion; readonly edge: FittedEdge }[],
  findings: Findings,
): void {
  regions.forEach((region, i) => {
    const copy = regions.slice(0, i).find((other) =>
      other.rawCounts.length === region.rawCounts.length &&
      other.rawCounts.every((count, c) => count === region.rawCounts[c])
    );
    if (copy === undefined || region.rawCounts.every((count) => count === region.rawCounts[0])) return;
    findings.doubt(
      `${nameOf(region)} holds exactly the counts of ${
        nameOf(copy)
      }: one is a copy of the other; give each measurement once`,
    );
  });
  for (const region of new Set(used.map((use) => use.region))) {
    const { bad } = region;
    const edges = used.filter((use) => use.region === region);
    judgeLone(bad.dropouts, "far fewer counts than their neighbors (dropouts)", region, edges, findings);
    judgeLone(bad.spikes, "far more counts than their neighbors (spikes)", region, edges, findings);
    judgeTop(bad, region, findings);
  }
}

function judgeLone(
  channels: readonly number[],
  what: string,
  region: KineticRegion,
  edges: readonly { readonly name: string; readonly edge: FittedEdge }[],
  findings: Findings,
): void {
  if (channels.length === 0) return;
  const at = channels.map((channel) => region.energiesEv[channel]);
  const shown = `${at.slice(0, 3).map((energy) => `${energy.toFixed(3)} eV`).join(", ")}${
    at.length > 3 ? `, ${at.length} in all` : ""
  }`;
  const hit = edges.filter(({ edge }) =>
    at.some((energy) => energy >= edge.energiesEv[0] && energy <= edge.energiesEv[edge.energiesEv.length - 1])
  );
  if (hit.length > 0) {
    findings.doubt(
      `channels at ${shown} hold ${what}, in the fit of the ${
        hit.map(({ name }) => name).join(" and of the ")
      }; the mean of their neighbors was taken instead; measure again`,
    );
  } else findings.warn("lone-channels", `channels at ${shown} hold ${what}, outside the fits`, region.label);
}

function judgeTop({ flatTop }: BadChannels, region: KineticRegion, findings: Findings): void {
  if (flatTop !== null) {
    const [from, to] = flatTop;
    findings.doubt(
      `${to - from + 1} channels from ${
        region.energiesEv[from].toFixed(3)
      } eV on hold the same highest number of ` +
        "counts: the counter or the file is saturated; measure with less light",
    );
  }
  if (region.deadShare > DEAD_SHARE_DOUBTFUL) {
    findings.doubt(
      `${
        (100 * region.deadShare).toFixed(0)
      } % of the electrons are lost to dead time at the top of the spectrum; ` +
        "measure with less light",
    );
  } else if (region.deadShare > DEAD_SHARE) {
    findings.warn(
      "dead-time",
      `${(100 * region.deadShare).toFixed(1)} % of the electrons are lost to dead time at the top; corrected`,
      region.label,
    );
  }
}

/**
 * A spectrum read in the wrong direction has its highest counts at the upper end, just below the steepest fall of all:
 * its secondary cutoff.
 */
export function looksReversed({ energiesEv, counts }: KineticRegion): boolean {
  const n = energiesEv.length;
  if (energiesEv[n - 1] - energiesEv[0] < REVERSIBLE_EV) return false;
  const edges = edgeCandidates(energiesEv, counts);
  const strongest = edges.reduce(
    (a, b) => Math.abs(b.significance) > Math.abs(a.significance) ? b : a,
    edges[0],
  );
  if (strongest === undefined || strongest.significance > 0) return false;
  const at = strongest.energyEv;
  const highest = energiesEv[counts.reduce((top, count, i) => count > counts[top] ? i : top, 0)];
  const below = meanCounts(energiesEv, counts, at - 0.4, at - 0.1);
  const above = meanCounts(energiesEv, counts, at + 0.2, at + 0.5);
  return at - highest < 1.5 && highest <= at + 0.2 && above < 0.1 * below &&
    meanCounts(energiesEv, counts, energiesEv[0], energiesEv[0] + 1) < 0.1 * below;
}

function nameOf(region: KineticRegion): string {
  return `${region.file}${region.label === "" ? "" : ` region ${region.label}`}` || "a region";
}
