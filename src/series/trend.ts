import { cannot, type Estimate } from "../base/mod.ts";
import { judgeResiduals, type Judgment } from "./judgment.ts";
import { weightedMean, yorkLine } from "./york_line.ts";

/** Work functions measured while something else was changed. */
export interface WorkFunctionSeries {
  /** What was changed, ascending, shape (n): sample bias in V or temperature in K. */
  readonly settings: ArrayLike<number>;
  /** Work functions, eV, each with its standard uncertainty > 0 without what all have in common, shape (n). */
  readonly workFunctionsEv: readonly Estimate[];
}

/** Work function against bias. */
export interface BiasTrend extends Judgment {
  /** Weighted mean, eV; null when the work function moves with bias, as then no mean is one. */
  readonly workFunctionEv: Estimate | null;
  /** Change per volt of bias, eV/V. */
  readonly slopeEvPerV: Estimate;
}

/** Work function against temperature. */
export interface TemperatureTrend extends Judgment {
  /** Change per kelvin, eV/K. */
  readonly slopeEvPerK: Estimate;
  /** Work function at the mean temperature (weighted), eV. */
  readonly workFunctionEv: Estimate;
  /** That temperature, K. */
  readonly meanTemperatureK: number;
}

/** 99 % of constant series pass (normal distribution). */
const TREND_DOUBT = 2.576;

function lineOf({ settings, workFunctionsEv }: WorkFunctionSeries) {
  const wrong = workFunctionsEv.findIndex(({ standardUncertainty }) => !(standardUncertainty > 0));
  if (wrong >= 0) {
    throw new RangeError(
      cannot(
        "test a trend",
        `the standard uncertainty of work function ${wrong} must be > 0 eV`,
        workFunctionsEv[wrong].standardUncertainty,
      ),
    );
  }
  return yorkLine({
    x: settings,
    y: workFunctionsEv.map(({ value }) => value),
    xUncertainties: workFunctionsEv.map(() => 0),
    yUncertainties: workFunctionsEv.map(({ standardUncertainty }) => standardUncertainty),
  });
}

/**
 * Work function against sample bias: a true one does not move.
 *
 * A cutoff that is not the sample's (the analyzer's own, stray electrons, a field between sample and entrance that is not
 * flat) moves with bias. Doubtful, without a mean, when the slope differs from zero by more than 2.576 standard
 * uncertainties; doubtful with an enlarged uncertainty when the values scatter more than they may.
 *
 * @param series At least 3 biases, V.
 * @returns Mean, slope and verdict.
 * @throws {RangeError} If there are fewer than 3 values or a number is out of range.
 * @example A cutoff that follows the bias is exposed
 * ```ts
 * import { workFunctionAgainstBias } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const workFunctionsEv = [4.1, 4.6, 5.1].map((value) => ({ value, standardUncertainty: 0.02 }));
 * const trend = workFunctionAgainstBias({ settings: [-9, -6, -3], workFunctionsEv });
 * assert.deepEqual([trend.verdict, trend.workFunctionEv], ["doubtful", null]);
 * ```
 */
export function workFunctionAgainstBias(series: WorkFunctionSeries): BiasTrend {
  const { slope } = lineOf(series);
  const { mean, chiSquare, degreesOfFreedom } = weightedMean(series.workFunctionsEv);
  const z = slope.value / slope.standardUncertainty;
  const moves = Math.abs(z) > TREND_DOUBT;
  const judgment = judgeResiduals(
    chiSquare,
    degreesOfFreedom,
    series.workFunctionsEv.map(({ value }) => value - mean.value),
    moves
      ? [
        `the work function moves with bias by ${(1000 * slope.value).toFixed(1)} meV/V (${
          Math.abs(z).toFixed(1)
        } standard uncertainties): the cutoff is not the sample's alone; look for the analyzer's own cutoff and ` +
        "for stray electrons, and use biases beyond which it stays",
      ]
      : [],
  );
  return {
    ...judgment,
    workFunctionEv: moves ? null : {
      value: mean.value,
      standardUncertainty: mean.standardUncertainty * judgment.inflation,
    },
    slopeEvPerV: slope,
  };
}

/**
 * Work function against temperature: its slope.
 *
 * The line is a description over the measured range, not a law; surfaces that change while warming bend it, which makes
 * it doubtful.
 *
 * @param series At least 3 temperatures, K.
 * @returns Slope, value at the mean temperature, verdict.
 * @throws {RangeError} If there are fewer than 3 values or a number is out of range.
 */
export function workFunctionAgainstTemperature(series: WorkFunctionSeries): TemperatureTrend {
  const wrong = Array.from(series.settings).findIndex((temperature) => !(temperature >= 0));
  if (wrong >= 0) {
    throw new RangeError(
      cannot("test a trend", `temperature ${wrong} must be >= 0 K`, series.settings[wrong]),
    );
  }
  const line = lineOf(series);
  const judgment = judgeResiduals(line.chiSquare, line.degreesOfFreedom, line.residuals);
  const { mean } = weightedMean(series.workFunctionsEv);
  // Intercept and slope do not correlate at the weighted mean of the temperatures.
  const meanTemperatureK = -line.covariance / line.slope.standardUncertainty ** 2;
  return {
    ...judgment,
    slopeEvPerK: {
      value: line.slope.value,
      standardUncertainty: line.slope.standardUncertainty * judgment.inflation,
    },
    workFunctionEv: { value: mean.value, standardUncertainty: mean.standardUncertainty * judgment.inflation },
    meanTemperatureK,
  };
}
