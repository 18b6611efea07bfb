import type { Estimate } from "../base/mod.ts";
import { explainFit, type FittedEdge, type WorkFunctionResult } from "../edges/mod.ts";
import { formatEstimate } from "../report/mod.ts";
import { noticeText } from "./fit.ts";

/** Columns of a terminal that words are wrapped to. */
const LINE_LETTERS = 100;

/**
 * The answer as text for a terminal.
 *
 * @param result The answer.
 * @returns Lines; tables within 80 columns.
 */
export function fitText(result: WorkFunctionResult): string {
  const row = (name: string, estimate: Estimate | null): string[] =>
    estimate === null ? [] : [`  ${name.padEnd(31)}${formatEstimate(estimate, "eV")}`];
  const { inputs } = result;
  const resolution = inputs.resolutionFwhmEv;
  return [
    `Verdict: ${result.verdict}`,
    ...result.reasons.map((reason) => `  because ${reason}`),
    ...row("work function", result.workFunctionEv),
    ...row("maximum kinetic energy", result.maxKineticEnergyEv),
    ...row("ionization energy", result.ionizationEnergyEv),
    ...row("valence-band maximum", result.valenceBandMaximumEv),
    ...row("  the same, logarithmic scale", result.valenceBandMaximumLogarithmicEv),
    ...row("secondary cutoff", result.cutoffEv),
    ...row("Fermi edge", result.fermiEdgeEv),
    ...conventionLines(result),
    ...intervalLines("cutoff", result.cutoffFit),
    ...intervalLines(result.fermiEdgeEv ? "Fermi edge" : "valence edge", result.upperFit),
    ...row("work function by bootstrap", result.bootstrapWorkFunctionEv),
    "Used:",
    ...inputs.regions.map((use) =>
      `  ${use.file}${use.region ? ` region ${use.region}` : ""}, ${use.rangeEv[0]} to ${
        use.rangeEv[1]
      } eV: ${use.use}`
    ),
    `  photon energy ${shortEv(inputs.photonEnergyEv.value)}, ${inputs.photonEnergyEv.from}`,
    `  bias ${inputs.biasV.value === null ? "" : `${inputs.biasV.value} V, `}${inputs.biasV.from}`,
    `  ${inputs.axis.kind} energy axis, ${inputs.axis.from}; temperature ${inputs.temperatureK.value} K, ${inputs.temperatureK.from}`,
    `  resolution ${
      resolution.value === null ? "" : `${shortEv(resolution.value)} FWHM, `
    }${resolution.from}; ` +
    `gain of the energy scale ${Number(inputs.scaleGain.value.toFixed(6))}, ${inputs.scaleGain.from}`,
    `  Fermi level ${
      inputs.fermiLevelEv.value === null ? "" : `at ${inputs.fermiLevelEv.value.toFixed(3)} eV, `
    }${inputs.fermiLevelEv.from}`,
    ...budgetLines(result),
    ...result.warnings.map((warning) => `Warning: ${noticeText(warning)}`),
  ].join("\n");
}

function conventionLines({ conventions, patches }: WorkFunctionResult): string[] {
  const lines = patches === null ? [] : [
    "Two cutoffs:",
    `  lower ${formatEstimate(patches.lowerEv, "eV")}, upper ${
      formatEstimate(patches.upperEv, "eV")
    }, heights as ` +
    `1 : ${formatEstimate(patches.upperShare, "")}`,
  ];
  if (conventions === null) return lines;
  return [
    ...lines,
    `Cutoff by convention (edge ${
      (1000 * conventions.edgeFwhmEv).toFixed(0)
    } meV FWHM), uncorrected and corrected:`,
    ...conventions.rows.map(({ name, uncorrectedEv, correctedEv }) =>
      `  ${name.padEnd(31)}${formatEstimate(uncorrectedEv, "eV").padEnd(20)}${
        formatEstimate(correctedEv, "eV")
      }`
    ),
    `  ${"spread".padEnd(31)}${`${conventions.uncorrectedSpreadEv.toFixed(3)} eV`.padEnd(20)}${
      conventions.spreadEv.toFixed(3)
    } eV`,
  ];
}

function intervalLines(name: string, edge: FittedEdge | null): string[] {
  if (edge === null || (edge.profileEv === null && edge.bootstrap === null)) return [];
  const meV = (ev: number | null): string =>
    ev === null ? "none" : `${ev < 0 ? "" : "+"}${(1000 * ev).toFixed(1)}`;
  const from = (end: number | null): number | null => end === null ? null : end - edge.positionEv.value;
  const { profileEv, bootstrap } = edge;
  return [
    ...(profileEv === null ? [] : [
      `  ${`${name}, profile (k = 1)`.padEnd(31)}${meV(from(profileEv.lower))}, ${
        meV(from(profileEv.upper))
      } meV`,
    ]),
    ...(bootstrap === null ? [] : [
      `  ${`${name}, bootstrap`.padEnd(31)}${meV(bootstrap.quantilesEv[0])}, ${
        meV(bootstrap.quantilesEv[1])
      } meV, bias ${meV(bootstrap.biasEv)} meV, ${
        bootstrap.positionsEv.length - bootstrap.failures
      } of ${bootstrap.positionsEv.length} fits`,
    ]),
  ];
}

function budgetLines({ budget, workFunctionEv, expanded }: WorkFunctionResult): string[] {
  if (workFunctionEv === null) return [];
  const line = (name: string, ev: number): string => `  ${name.padEnd(44)}${meV(ev)} meV`;
  const meV = (ev: number): string => (1000 * ev).toFixed(1).padStart(7);
  const of = expanded.workFunctionEv;
  return [
    "Uncertainty budget (k = 1):",
    ...budget.map((term) => line(term.name, term.standardUncertaintyEv)),
    line("work function, combined", workFunctionEv.standardUncertainty),
    ...(of === undefined ? [] : [
      line("work function, expanded (k = 2)", of.expandedEv) +
      (of.effectiveDegreesOfFreedom < 30
        ? `; ${of.effectiveDegreesOfFreedom.toFixed(0)} degrees of freedom, 95 % needs k = ${
          of.coverageFactorFor95.toFixed(2)
        }`
        : ""),
    ]),
  ];
}

/**
 * What was done and why, as wrapped paragraphs.
 *
 * @param result The answer.
 * @returns Lines.
 */
export function explanationText(result: WorkFunctionResult): string {
  return explainFit(result).map((sentence) => {
    const lines = [""];
    for (const word of sentence.split(" ")) {
      const last = lines.length - 1;
      if (lines[last].length + word.length < LINE_LETTERS) lines[last] += `${lines[last] ? " " : ""}${word}`;
      else lines.push(word);
    }
    return `- ${lines.join("\n  ")}`;
  }).join("\n");
}

/** An energy for people: at most five decimals. */
export function shortEv(energyEv: number): string {
  return `${Number(energyEv.toFixed(5))} eV`;
}
