import type { Estimate } from "../base/mod.ts";
import { BOLTZMANN_EV_PER_K } from "../data/mod.ts";
import { budgetCorrelation, combined, expandedUncertainty, type Quantity } from "./budget.ts";
import { budgetTerms } from "./budget_terms.ts";
import { cutoffConventions } from "./conventions.ts";
import type { AcceptanceRamp } from "./cutoff_model.ts";
import { energyReferences } from "./energy_reference.ts";
import type { FittedEdge, IntervalOptions } from "./fitted_edge.ts";
import { findCutoff, judgeLow, LATE_RISE_SHARE } from "./low_edge.ts";
import {
  chooseRegions,
  type CommonFacts,
  commonFacts,
  type EdgeRegion,
  type MeasureOptions,
  overrides,
  type ScaleGain,
} from "./regions.ts";
import type { WorkFunctionResult } from "./result.ts";
import {
  findFermiEdge,
  findStrayFermiEdge,
  highestFalls,
  levelBelow,
  mainFalls,
  omittedSatelliteShiftEv,
} from "./upper_edge.ts";
import { fitValenceEdge } from "./valence.ts";
import {
  Findings,
  isMisfit,
  judgeData,
  judgeEdge,
  judgeFermiEdge,
  judgeResolution,
  judgeStrayFermiEdge,
  judgeValenceScales,
  looksReversed,
} from "./verdict.ts";

/** Conventions further apart than this are worth a word, eV (chosen: half of what laboratories differ by). */
const CONVENTION_SPREAD_EV = 0.05;
/** A combined uncertainty above this is no measurement of a work function, eV (chosen). */
const MOST_UNCERTAINTY_EV = 0.2;
const UNIT_GAIN: ScaleGain = { value: 1, standardUncertainty: 0, degreesOfFreedom: Infinity };

/**
 * Work function, maximum kinetic energy and ionization energy from one or more regions of one measurement.
 *
 * `W = h nu - (E_Fermi - E_cutoff)`: with a Fermi edge the energy scale, bias and analyzer work function cancel. Without
 * one (semiconductors, organics) W needs the position of the Fermi level on the axis; the ionization energy
 * `h nu - (E_VBM - E_cutoff)` does not. Distances are divided by the gain of the energy scale where it is given.
 *
 * @param regions Regions of one file or of several files of the same sample and settings.
 * @param options What the user states.
 * @returns The answer; a poor one is a verdict, not an error.
 * @throws {InputError} If no region, photon energy or axis can be settled.
 */
export function measureWorkFunction(
  regions: readonly EdgeRegion[],
  options: MeasureOptions,
): WorkFunctionResult {
  const chosen = chooseRegions(regions, options);
  const { photonEnergyEv, photonFrom, fromBinding } = chosen[0];
  const line = options.knownLine(photonEnergyEv);
  const satellites = line?.satellites ?? [];
  const facts = commonFacts(chosen, options);
  const gain = options.scaleGain ?? UNIT_GAIN;
  const findings = new Findings();
  const ramp = acceptanceRamp(facts, fromBinding);
  const low = findCutoff(chosen, ramp, intervalOptions(options, 0));
  const cutoff = low?.cutoff ?? null;

  const falls = mainFalls(chosen, satellites);
  const onset = falls.length > 0 ? Math.max(...falls.map((fall) => fall.candidate.energyEv)) : null;
  const given = options.fermiLevelEv ?? null;
  const references = cutoff === null ? [] : energyReferences(
    {
      photonEnergyEv,
      fromBinding,
      fermiLevelEv: given !== null && fromBinding ? photonEnergyEv - given : given,
      biasV: facts.biasV,
      asRecorded: facts.asRecorded,
      analyzerWorkFunctionEv: facts.analyzerWorkFunctionEv,
    },
    cutoff.positionEv.value,
    onset,
  );
  const intervals = intervalOptions(options, 1);
  const fermiOptions = {
    thermalEnergyEv: BOLTZMANN_EV_PER_K * facts.temperatureK,
    satellites,
    startSigmaEv: Math.min(0.15, cutoff?.sigmaEv.value ?? 0.05),
    intervals,
  };
  const expectedFermi = findFermiEdge(falls, references, fermiOptions);
  const strayFermi = expectedFermi === null ? findStrayFermiEdge(falls, fermiOptions) : null;
  // One that the model does not describe may be a narrow band after all: that reading stays, with a doubt.
  const fermi = expectedFermi ?? (strayFermi === null || isMisfit(strayFermi.edge) ? null : strayFermi);
  const reference = fermi?.reference ?? (references.length === 1 ? references[0] : null);
  const highest = highestFalls(falls).sort((a, b) => levelBelow(b) - levelBelow(a))[0];
  const valence = fermi === null && highest !== undefined
    ? fitValenceEdge(
      highest.region.energiesEv,
      highest.region.counts,
      highest.candidate,
      satellites,
      intervals,
    )
    : null;
  const upper: FittedEdge | null = fermi?.edge ?? valence;
  const upperRegion = fermi?.region ?? highest?.region;
  const upperName = fermi ? "Fermi edge" : "valence-band edge";

  // Verdict.
  if (low === null) {
    findings.fail(
      "no secondary cutoff was found: no rise of the counts with enough channels around it; widen the window",
    );
  } else judgeLow(low, facts, findings);
  if (upper === null) {
    findings.fail(
      "neither a Fermi edge nor a valence-band edge was found: extend the window to higher kinetic energy",
    );
  } else judgeEdge(upperName, upper, findings);
  if ((low === null ? chosen : [low.region]).some(looksReversed)) {
    findings.fail(
      "the counts are highest just below their upper end, as on an energy axis read in the wrong direction; " +
        `try --axis ${fromBinding ? "kinetic" : "binding"}`,
    );
  }
  judgeResolution("secondary cutoff", cutoff, facts, findings);
  if (strayFermi !== null) {
    judgeStrayFermiEdge(strayFermi.edge, references, findings);
  } else if (fermi !== null) {
    judgeResolution("Fermi edge", fermi.edge, facts, findings);
    const omitted = fermi.edge.withSatellites
      ? 0
      : omittedSatelliteShiftEv(fermi.edge, fermi.region, satellites);
    judgeFermiEdge(fermi.edge, fermi.region, facts, omitted, findings);
  }
  judgeData(chosen, [
    ...(low === null ? [] : [{ name: "secondary cutoff", region: low.region, edge: low.cutoff }]),
    ...(upper === null || upperRegion === undefined ? [] : [{
      name: upperName,
      region: upperRegion,
      edge: upper,
    }]),
  ], findings);
  if (fermi === null && upper !== null && !findings.failed) {
    const last = upperRegion?.energiesEv.at(-1) ?? -Infinity;
    if (reference !== null && last < reference.fermiLevelEv) {
      findings.doubt(
        `the data end ${
          (reference.fermiLevelEv - last).toFixed(2)
        } eV below the Fermi level, so a Fermi edge could ` +
          "not be seen and what is taken for a valence-band maximum may be none; measure further up",
      );
    }
    if (references.length > 1) {
      findings.fail(
        "no Fermi edge was found and the axis can be read in several ways; give --fermi-level or --bias",
      );
    } else if (reference === null || !reference.usable) {
      findings.fail(
        "no Fermi edge was found and the position of the Fermi level on the axis is not known; give --fermi-level",
      );
    }
  }

  // Answer.
  const edgeDifference = cutoff && upper
    ? (upper.positionEv.value - cutoff.positionEv.value) / gain.value
    : NaN;
  const fermiLevelEv = fermi?.edge.positionEv.value ?? reference?.fermiLevelEv ?? NaN;
  const maxKinetic = cutoff ? (fermiLevelEv - cutoff.positionEv.value) / gain.value : NaN;
  const valenceMaximum = valence ? (fermiLevelEv - valence.positionEv.value) / gain.value : NaN;
  const budget = budgetTerms({
    cutoff,
    fermi: fermi?.edge ?? null,
    valence,
    isLateRise: low !== null && low.cutoff.lateRise > LATE_RISE_SHARE,
    hasRamp: ramp !== null,
    resolutionFwhmEv: facts.resolutionFwhmEv,
    line,
    photonEnergyEv,
    isFermiLevelGiven: given !== null && !fromBinding,
    gain: options.scaleGain ?? null,
    maxKinetic,
    edgeDifference,
    valenceMaximum,
  });
  const workFunction = combined(budget, "workFunctionEv", photonEnergyEv - maxKinetic);
  if (!findings.failed && !(workFunction.value >= 1 && workFunction.value <= 10)) {
    findings.fail(
      `the work function would be ${
        workFunction.value.toFixed(3)
      } eV, outside 1..10 eV: check photon energy, bias and axis`,
    );
  }
  if (!findings.failed && workFunction.standardUncertainty > MOST_UNCERTAINTY_EV) {
    findings.doubt(
      `the standard uncertainty of the work function is ${
        workFunction.standardUncertainty.toFixed(2)
      } eV; measure ` +
        "longer, or with a better resolution",
    );
  }
  const valenceUncertainty = combined(budget, "valenceBandMaximumEv", valenceMaximum).standardUncertainty;
  if (valence !== null && !findings.failed && valenceMaximum < -2 * valenceUncertainty) {
    findings.fail(
      `the valence-band maximum would lie ${
        (-valenceMaximum).toFixed(3)
      } eV above the Fermi level: photon energy, bias, analyzer work function or --fermi-level is wrong, or the sample charges`,
    );
  } else if (valence !== null && !findings.failed && valenceMaximum < 2 * valenceUncertainty) {
    findings.doubt(
      `the valence-band maximum would lie ${
        valenceMaximum.toFixed(3)
      } eV below the Fermi level, at it within the ` +
        "uncertainty: a Fermi edge too faint to be recognized, or charging; measure longer, with less light",
    );
  }
  const logarithmicEv = valence?.logarithmicEv ?? null;
  const valenceMaximumLogarithmic = logarithmicEv === null ? null : combined(
    budget,
    "valenceBandMaximumLogarithmicEv",
    (fermiLevelEv - logarithmicEv.value) / gain.value,
  );
  if (valence !== null) {
    judgeValenceScales(valence, gain.value, findings);
    findings.warn(
      "no-fermi-edge",
      "no Fermi edge in the data: the leading edge is taken for a valence-band maximum (straight line, linear scale)",
      upperRegion?.label,
    );
    findings.warn(
      "valence-scales",
      logarithmicEv === null
        ? "the counts have no straight part on a logarithmic scale: the valence-band maximum is that of the linear scale only"
        : `the valence-band maximum by the straight line on a logarithmic scale lies ${
          (Math.abs(logarithmicEv.value - valence.positionEv.value) / gain.value).toFixed(3)
        } eV ${logarithmicEv.value > valence.positionEv.value ? "above" : "below"} that on a linear scale`,
      upperRegion?.label,
    );
    if (reference !== null && given === null) {
      findings.warn(
        "fermi-level-from-axis",
        `the Fermi level is read off the axis, not measured (${reference.how})`,
      );
    }
  }
  const conventions = cutoff?.converged ? cutoffConventions(cutoff) : null;
  if (conventions !== null && conventions.spreadEv > CONVENTION_SPREAD_EV) {
    findings.warn(
      "cutoff-conventions",
      `the corrected conventions for the cutoff differ by ${
        conventions.spreadEv.toFixed(3)
      } eV: say which one you quote`,
    );
  }
  if (satellites.length > 0) {
    findings.warn(
      "lamp-satellites",
      `${line?.name} has weaker lines ${
        satellites.map((s) => `${s.shiftEv.toFixed(2)} eV`).join(" and ")
      } above: ` +
        "their copies of the spectrum are part of the fit of the upper edge where the window reaches far enough",
    );
  }
  if (line === null) {
    findings.warn(
      "photon-energy-uncertainty",
      `${photonEnergyEv} eV is no line of the lamp table: its uncertainty is not included`,
    );
  }
  if (chosen.some((region) => region.rawCounts.some((count) => count !== Math.round(count)))) {
    findings.warn(
      "not-whole-counts",
      "the counts are not whole numbers: they are taken for Poisson counts, so if they were scaled or smoothed the " +
        "uncertainties are wrong by that factor",
    );
  }
  if (options.scaleGain === undefined) {
    findings.warn(
      "scale-not-included",
      "the gain of the energy scale is not known and not part of the uncertainty",
    );
  }
  for (const notice of overrides(chosen, options)) findings.warnings.push(notice);
  const { failed } = findings;
  const answer = <T>(value: T): T | null => failed ? null : value;
  const expanded = (quantity: Quantity) => [quantity, expandedUncertainty(budget, quantity)] as const;
  return {
    workFunctionEv: answer(workFunction),
    cutoffEv: cutoff?.converged ? known(combined(budget, "cutoffEv", cutoff.positionEv.value)) : null,
    fermiEdgeEv: fermi ? known(combined(budget, "fermiEdgeEv", fermi.edge.positionEv.value)) : null,
    valenceBandMaximumEv: valence && answer(combined(budget, "valenceBandMaximumEv", valenceMaximum)),
    valenceBandMaximumLogarithmicEv: answer(valenceMaximumLogarithmic),
    ionizationEnergyEv: answer(combined(budget, "ionizationEnergyEv", photonEnergyEv - edgeDifference)),
    maxKineticEnergyEv: answer(combined(budget, "maxKineticEnergyEv", maxKinetic)),
    verdict: findings.verdict,
    reasons: findings.reasons,
    warnings: findings.warnings,
    inputs: {
      regions: chosen.filter((region) => region === low?.region || region === upperRegion).map((region) => ({
        file: region.file,
        region: region.label,
        rangeEv: region.readRangeEv,
        use: [
          region === low?.region ? "secondary cutoff" : "",
          region === upperRegion ? upperName : "",
        ].filter((use) => use !== "").join(" and "),
      })),
      axis: { kind: fromBinding ? "binding" : "kinetic", from: chosen[0].axisFrom },
      photonEnergyEv: { value: photonEnergyEv, from: line ? `${photonFrom} (${line.name})` : photonFrom },
      biasV: { value: facts.biasV, from: facts.biasFrom },
      analyzerWorkFunctionEv: { value: facts.analyzerWorkFunctionEv, from: facts.analyzerFrom },
      temperatureK: { value: facts.temperatureK, from: facts.temperatureFrom },
      acceptanceHalfAngleDeg: { value: facts.acceptanceHalfAngleDeg, from: facts.acceptanceFrom },
      resolutionFwhmEv: { value: facts.resolutionFwhmEv, from: facts.resolutionFrom },
      scaleGain: { value: gain.value, from: options.scaleGain ? "reference lines" : "not known, 1 assumed" },
      fermiLevelEv: fermi
        ? { value: fermi.edge.positionEv.value, from: "the fitted Fermi edge" }
        : { value: reference?.usable ? reference.fermiLevelEv : null, from: reference?.how ?? "not known" },
    },
    conventions,
    patches: low?.patches ?? null,
    budget: failed ? [] : budget,
    expanded: failed ? {} : Object.fromEntries([
      expanded("workFunctionEv"),
      expanded("maxKineticEnergyEv"),
      expanded("ionizationEnergyEv"),
      ...(valence ? [expanded("valenceBandMaximumEv")] : []),
    ]),
    correlations: failed ? null : {
      workFunctionAndMaxKineticEnergy: budgetCorrelation(budget, "workFunctionEv", "maxKineticEnergyEv"),
      workFunctionAndIonizationEnergy: budgetCorrelation(budget, "workFunctionEv", "ionizationEnergyEv"),
    },
    bootstrapWorkFunctionEv: answer(
      bootstrapWorkFunction(photonEnergyEv, gain.value, cutoff, fermi?.edge ?? null, fermiLevelEv),
    ),
    cutoffFit: cutoff,
    upperFit: upper,
  };
}

/** The ramp of the cutoff, where acceptance angle and recorded kinetic energy are known. */
function acceptanceRamp(facts: CommonFacts, fromBinding: boolean): AcceptanceRamp | null {
  const { acceptanceHalfAngleDeg, asRecorded, biasV, analyzerWorkFunctionEv } = facts;
  if (acceptanceHalfAngleDeg === null || !asRecorded) return null;
  const perEv = Math.tan((acceptanceHalfAngleDeg * Math.PI) / 180) ** 2;
  if (!fromBinding) return { perEv, offsetEv: 0 };
  return biasV === null || analyzerWorkFunctionEv === null
    ? null
    : { perEv, offsetEv: -Math.abs(analyzerWorkFunctionEv) - biasV };
}

/** The cutoff and the upper edge draw from streams of their own. */
function intervalOptions({ profile, bootstrap }: MeasureOptions, stream: number): IntervalOptions {
  return { profile: profile ?? false, bootstrap: { replicates: 0, seed: 0, ...bootstrap, stream } };
}

/** Work functions of the bootstrap replicates; the Fermi level stays where it is when it was not fitted. */
function bootstrapWorkFunction(
  photonEnergyEv: number,
  gain: number,
  cutoff: FittedEdge | null,
  fermi: FittedEdge | null,
  fermiLevelEv: number,
): Estimate | null {
  const low = cutoff?.bootstrap;
  const high = fermi?.bootstrap;
  if (!cutoff || !low || (fermi !== null && !high)) return null;
  const mean = (high ? fermiLevelEv + high.biasEv : fermiLevelEv) - (cutoff.positionEv.value + low.biasEv);
  return {
    value: photonEnergyEv - mean / gain,
    standardUncertainty: Math.hypot(low.standardDeviationEv, high?.standardDeviationEv ?? 0) / gain,
  };
}

/** An estimate whose uncertainty is not known is none. */
function known(estimate: Estimate): Estimate | null {
  return Number.isFinite(estimate.standardUncertainty) ? estimate : null;
}
