import type { WorkFunctionResult } from "./result.ts";

/**
 * What a fit did and why, in words.
 *
 * @param result The answer.
 * @returns Sentences, in the order of the steps.
 */
export function explainFit(result: WorkFunctionResult): string[] {
  const { inputs, cutoffFit, upperFit, conventions, patches, budget } = result;
  const ev = (value: number): string => `${value.toFixed(3)} eV`;
  const sentences = [
    `The photon energy is ${
      ev(inputs.photonEnergyEv.value)
    } (${inputs.photonEnergyEv.from}); energies are on a ` +
    `${inputs.axis.kind} axis (${inputs.axis.from})${
      inputs.axis.kind === "binding"
        ? ", turned into photon energy less binding energy so that both edges lie on an ascending axis"
        : ""
    }.`,
    ...inputs.regions.map((use) =>
      `The ${use.use} ${use.use.includes(" and ") ? "were" : "was"} taken from ${use.file}${
        use.region === "" ? "" : `, region ${use.region}`
      }: for the cutoff the lowest rise that is at least half as significant as the strongest, for the upper edge the ` +
      "highest significant fall that is no satellite's copy of a stronger one."
    ),
  ];
  if (cutoffFit !== null) {
    sentences.push(
      `The cutoff was fitted from ${ev(cutoffFit.energiesEv[0])} to ${
        ev(cutoffFit.energiesEv[cutoffFit.energiesEv.length - 1])
      } by Poisson likelihood with: ${cutoffFit.model}. Chi-square is ${
        cutoffFit.tests.reducedChiSquare.toFixed(2)
      } per degree of freedom; the signs of the residuals make ${cutoffFit.tests.runs.runs} runs where ${
        cutoffFit.tests.runs.expectedRuns.toFixed(0)
      } are expected.`,
    );
    if (inputs.acceptanceHalfAngleDeg.value === null) {
      sentences.push(
        "The acceptance angle is not known, so the cutoff has no ramp: under bias a wide cone moves it up unseen.",
      );
    }
  }
  sentences.push(
    patches === null
      ? "One cutoff is enough: where one described the counts badly, two were tried, and taken only if the Bayesian " +
        "information criterion fell by more than 10."
      : `Two cutoffs describe the counts better (Bayesian information criterion lower by ${
        patches.bicGain.toFixed(0)
      }); the lower one, ${
        ev(patches.lowerEv.value)
      }, is that of the lowest work function on the surface and was taken.`,
  );
  if (conventions !== null) {
    sentences.push(
      `Other conventions, corrected for the ${ev(conventions.edgeFwhmEv)} width (FWHM) of the edge, give ${
        conventions.rows.slice(1).map((row) => `${ev(row.correctedEv.value)} by ${row.name}`).join(" and ") ||
        "nothing"
      }; uncorrected they spread over ${ev(conventions.uncorrectedSpreadEv)}. The model is the one quoted.`,
    );
  }
  if (upperFit !== null) {
    const isMetal = result.fermiEdgeEv !== null;
    sentences.push(
      `The upper edge was fitted with: ${upperFit.model}. ${
        isMetal
          ? `It is a Fermi edge: converged, significant, no wider than the response, and the end of the spectrum. Temperature ${inputs.temperatureK.value} K (${inputs.temperatureK.from}).`
          : "No Fermi edge was found where one could be, so the leading edge is a valence-band maximum, by a straight line."
      }`,
    );
  }
  sentences.push(
    result.fermiEdgeEv !== null
      ? "The work function is the photon energy less the distance of the two edges: bias, analyzer work function and the " +
        "offset of the scale cancel."
      : `The work function needs the Fermi level on the axis (${inputs.fermiLevelEv.from}); the ionization energy does not.`,
    `The gain of the energy scale is ${inputs.scaleGain.value} (${inputs.scaleGain.from}).`,
  );
  const largest = budget.filter((term) => term.sensitivities.workFunctionEv !== undefined)
    .sort((a, b) => b.standardUncertaintyEv - a.standardUncertaintyEv)[0];
  if (largest !== undefined) {
    sentences.push(
      `The largest uncertainty of the work function is "${largest.name}", ${
        (1000 * largest.standardUncertaintyEv).toFixed(1)
      } meV: ${largest.note}.`,
    );
  }
  sentences.push(
    result.verdict === "good"
      ? "Nothing speaks against the answer: the fits converged, describe the counts, and the edges lie where they should."
      : `The verdict is ${result.verdict}: ${result.reasons.join("; ")}.`,
  );
  return sentences;
}
