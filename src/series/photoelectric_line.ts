import { cannot, type Estimate } from "../base/mod.ts";
import { HC_EV_NM } from "../data/mod.ts";
import { judgeResiduals, type Judgment } from "./judgment.ts";
import { weightedMean, yorkLine } from "./york_line.ts";

/** h/e of the International System of Units (2019), V s, exact. */
export const PLANCK_EV_S: number = HC_EV_NM / 299792458e9;

/** What was measured against frequency, which also says whose work function the line gives. */
export type PhotoelectricQuantity = "stopping potential" | "maximum kinetic energy";

/** Largest electron energies at several frequencies. */
export interface PhotoelectricSeries {
  /** Light frequencies, Hz, shape (n). */
  readonly frequenciesHz: ArrayLike<number>;
  /** Standard uncertainties of the frequencies, Hz, each >= 0, shape (n). */
  readonly frequencyUncertaintiesHz: ArrayLike<number>;
  /** Stopping potentials, V, or maximum kinetic energies just outside the emitter, eV, shape (n). */
  readonly energiesEv: ArrayLike<number>;
  /** Standard uncertainties of the energies, eV, each >= 0, shape (n). */
  readonly energyUncertaintiesEv: ArrayLike<number>;
  /** Which of the two. */
  readonly quantity: PhotoelectricQuantity;
}

/** The line of Einstein's photoelectric equation. */
export interface PhotoelectricLine extends Judgment {
  /** Slope h/e, V s. */
  readonly planckEvS: Estimate;
  /** Slope minus the exact value of the International System of Units, in standard uncertainties. */
  readonly planckDeviation: number;
  /** Work function from the line's intercept alone, eV: independent of the value of h, and less certain. */
  readonly workFunctionFromInterceptEv: Estimate;
  /** Work function with the exact h, eV: the weighted mean of h nu minus energy. */
  readonly workFunctionEv: Estimate;
  /**
   * Whose work function it is. Emitter and collector wired together share a Fermi level, so that stopping potentials
   * give the collector's; kinetic energies just outside the emitter give the emitter's.
   */
  readonly workFunctionOf: "collector" | "emitter";
  /** Frequency at which the line meets zero, Hz. */
  readonly thresholdHz: number;
}

/** 99 % of right scales pass (normal distribution). */
const PLANCK_DOUBT = 2.576;

/**
 * Straight line of stopping potential or maximum kinetic energy against light frequency: its slope is h/e, a check of the
 * energy scale, and its intercept is minus the work function.
 *
 * A slope that disagrees with the exact h/e makes the answer doubtful: then the energy scale, the frequencies or the
 * uncertainties are wrong, and so is the work function.
 *
 * Source: A. Einstein, Ann. Phys. 17, 132 (1905); R. A. Millikan, Phys. Rev. 7, 355 (1916); the line as
 * {@link yorkLine}.
 *
 * @param series At least 3 frequencies.
 * @returns Line, work function and verdict.
 * @throws {RangeError} As {@link yorkLine}, or if a frequency is not > 0.
 */
export function fitPhotoelectricLine(series: PhotoelectricSeries): PhotoelectricLine {
  const { frequenciesHz, frequencyUncertaintiesHz, energiesEv, energyUncertaintiesEv, quantity } = series;
  const wrong = Array.from(frequenciesHz).findIndex((value) => !(value > 0));
  if (wrong >= 0) {
    throw new RangeError(
      cannot("fit a photoelectric line", `frequenciesHz[${wrong}] must be > 0 Hz`, frequenciesHz[wrong]),
    );
  }
  const line = yorkLine({
    x: frequenciesHz,
    y: energiesEv,
    xUncertainties: frequencyUncertaintiesHz,
    yUncertainties: energyUncertaintiesEv,
  });
  const plain = judgeResiduals(line.chiSquare, line.degreesOfFreedom, line.residuals);
  const grown = ({ value, standardUncertainty }: Estimate): Estimate => ({
    value,
    standardUncertainty: standardUncertainty * plain.inflation,
  });
  const planckEvS = grown(line.slope);
  const planckDeviation = (planckEvS.value - PLANCK_EV_S) / planckEvS.standardUncertainty;
  const percent = (100 * (planckEvS.value / PLANCK_EV_S - 1)).toFixed(2);
  const { mean } = weightedMean(Array.from(energiesEv, (energyEv, i) => ({
    value: PLANCK_EV_S * frequenciesHz[i] - energyEv,
    standardUncertainty: Math.hypot(PLANCK_EV_S * frequencyUncertaintiesHz[i], energyUncertaintiesEv[i]),
  })));
  const reasons = Math.abs(planckDeviation) > PLANCK_DOUBT
    ? [
      `the slope differs from h/e by ${percent} %, ${Math.abs(planckDeviation).toFixed(1)} standard ` +
      "uncertainties: check energy scale, frequencies and back-current",
    ]
    : [];
  return {
    ...judgeResiduals(line.chiSquare, line.degreesOfFreedom, line.residuals, reasons),
    planckEvS,
    planckDeviation,
    workFunctionFromInterceptEv: grown({ ...line.intercept, value: -line.intercept.value }),
    workFunctionEv: grown(mean),
    workFunctionOf: quantity === "stopping potential" ? "collector" : "emitter",
    thresholdHz: -line.intercept.value / line.slope.value,
  };
}
