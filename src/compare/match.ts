import { cannot } from "../base/mod.ts";
import { type FitParameter, minimizePoisson, type PoissonFit } from "../fit/mod.ts";
import { curveAt } from "./curve.ts";
import {
  BACKGROUND,
  EXTRA_FWHM,
  FIRST_INTENSITY,
  GAIN,
  type MatchChannels,
  type MatchedModel,
  matchedModel,
  OFFSET,
} from "./matched_model.ts";
import type { Template, TemplateFamily } from "./template.ts";

/** What of the instrument is free in a match beside the offset of the axis and the intensities. */
export interface MatchFreedom {
  /** Gain of the energy scale. */
  readonly gain: boolean;
  /** Gaussian width beyond that of the scenario. */
  readonly extraFwhm: boolean;
  /** Constant background beyond the dark counts of the scenario. */
  readonly background: boolean;
}

/** A fitted parameter. */
export interface MatchedValue {
  /** Name. */
  readonly name: string;
  /** Best value. */
  readonly value: number;
  /** Standard uncertainty, statistical and of the simulation together; null at a bound or where it is not determined. */
  readonly standardUncertainty: number | null;
  /** Its part from counting, likewise. */
  readonly fromCounting: number | null;
  /** Its part from the finite number of histories. */
  readonly fromSimulation: number;
}

/** Templates fitted to counts. */
export interface Match {
  /** Free parameters; the offset is relative to the axis of the channels. */
  readonly values: readonly MatchedValue[];
  /** Expected counts, shape (n). */
  readonly expected: Float64Array;
  /** Standard errors of the expectation from the finite number of histories, shape (n). */
  readonly standardErrors: Float64Array;
  /** Deviance of the counts. */
  readonly deviance: number;
  /** Sum of (counts - expectation)^2 over variance, the variance of the simulation included. */
  readonly chiSquare: number;
  /** Channels minus free parameters. */
  readonly degreesOfFreedom: number;
  /** `true` when the fit converged. */
  readonly converged: boolean;
  /** Parameters at a bound. */
  readonly atBound: readonly string[];
  /** Why the fit stopped. */
  readonly reason: string;
}

/** Offsets that a fit may add to where the axis was placed, eV. */
export const MOST_OFFSET_EV = 1.5;
/** Gains that a fit may take. */
export const GAIN_RANGE = [0.9, 1.1] as const;
const MOST_EXTRA_FWHM_EV = 2;
/** Relative step of the one derivative that is taken by differences. */
const WIDTH_STEP = 1e-3;
/** Smallest variance of a channel, counts, as in the fit. */
const LEAST_VARIANCE = 0.05;

/**
 * Fits a template to counts by maximum likelihood, with free parameters of the scenario where families are given.
 *
 * The noise of the simulation is carried through the fit to first order: a group of histories that raises the expectation
 * by d moves the parameters by `C J^T W d`, with the covariance C, the derivatives J and the weights W of the fit, and the
 * scatter of the groups is added to the covariance of the counting.
 *
 * @param base Template of the scenario.
 * @param families Free parameters of the scenario.
 * @param channels Measured counts.
 * @param freedom What of the instrument is free.
 * @param offsetEv Offset to start from, eV. Values start from the node of each family that fits best by itself.
 * @returns The match.
 * @throws {RangeError} If all expected or all measured counts of a region are zero.
 */
export function matchTemplate(
  base: Template,
  families: readonly TemplateFamily[],
  channels: MatchChannels,
  freedom: MatchFreedom,
  offsetEv = 0,
): Match {
  const model = matchedModel(base, families, channels);
  const parameters: FitParameter[] = model.names.map((name, index) => {
    if (index === OFFSET) {
      return { name, start: offsetEv, lower: -MOST_OFFSET_EV, upper: MOST_OFFSET_EV, scale: 0.01 };
    }
    if (index === GAIN) {
      const [lower, upper] = GAIN_RANGE;
      return { name, start: 1, lower, upper, scale: 1e-3, fixed: !freedom.gain };
    }
    if (index === EXTRA_FWHM) {
      const value = freedom.extraFwhm ? 2 * base.stepEv : 0;
      return {
        name,
        start: value,
        lower: 0,
        upper: MOST_EXTRA_FWHM_EV,
        scale: 0.01,
        fixed: !freedom.extraFwhm,
      };
    }
    if (index === BACKGROUND) return { name, start: 0, scale: 1, fixed: !freedom.background };
    const family = families[index - FIRST_INTENSITY - channels.regionCount];
    if (family === undefined) {
      const value = startIntensity(base, channels, index - FIRST_INTENSITY, offsetEv);
      return { name, start: value, lower: 1e-6 * value, scale: value };
    }
    const { lower, upper } = family;
    return { name, start: startValue(base, family, channels, offsetEv), lower, upper, scale: upper - lower };
  });
  const fit = minimizePoisson({
    parameters,
    model: model.expected,
    derivative: model.derivative,
    data: channels.counts,
  });
  const noise = model.noise(fit.values);
  const standardErrors = new Float64Array(fit.fitted.length);
  for (const vector of noise) vector.forEach((value, i) => standardErrors[i] += value * value);
  standardErrors.forEach((sum, i) => standardErrors[i] = Math.sqrt(sum));
  const ofSimulation = noiseOfParameters(fit, parameters, model, noise);
  const values = fit.names.flatMap((name, j): MatchedValue[] => {
    if (parameters[j].fixed) return [];
    const fromCounting = Number.isFinite(fit.standardErrors[j]) ? fit.standardErrors[j] : null;
    return [{
      name,
      value: fit.values[j],
      standardUncertainty: fromCounting === null ? null : Math.hypot(fromCounting, ofSimulation[j]),
      fromCounting,
      fromSimulation: ofSimulation[j],
    }];
  });
  return {
    values,
    expected: fit.fitted,
    standardErrors,
    deviance: fit.deviance,
    chiSquare: channels.counts.reduce(
      (sum, count, i) => sum + (count - fit.fitted[i]) ** 2 / varianceOf(fit.fitted[i], standardErrors[i]),
      0,
    ),
    degreesOfFreedom: channels.counts.length - values.length,
    converged: fit.converged,
    atBound: fit.atBound,
    reason: fit.reason,
  };
}

/**
 * Variance of a channel about an expectation that is itself uncertain.
 *
 * @param expected Expected counts.
 * @param standardError Standard error of the expectation.
 * @returns Variance, > 0.
 */
export function varianceOf(expected: number, standardError: number): number {
  return Math.max(expected, LEAST_VARIANCE) + standardError * standardError;
}

/** Standard deviations of the parameters that the noise of the expectation makes, shape (p). */
function noiseOfParameters(
  fit: PoissonFit,
  parameters: readonly FitParameter[],
  model: MatchedModel,
  noise: readonly Float64Array[],
): Float64Array {
  const count = parameters.length;
  const n = fit.fitted.length;
  const weights = fit.fitted.map((mean) => 1 / Math.max(mean, LEAST_VARIANCE));
  const column = new Float64Array(n);
  const products = parameters.map(({ fixed }, j) => {
    if (fixed) return noise.map(() => 0);
    if (!model.derivative(j, fit.values, column)) {
      const step = WIDTH_STEP * Math.max(WIDTH_STEP, fit.values[j]);
      model.expected(fit.values.with(j, fit.values[j] + step), column);
      for (let i = 0; i < n; i++) column[i] = (column[i] - fit.fitted[i]) / step;
    }
    return noise.map((vector) => vector.reduce((sum, value, i) => sum + value * weights[i] * column[i], 0));
  });
  return Float64Array.from(parameters, (_, a) => {
    let sum = 0;
    for (let g = 0; g < noise.length; g++) {
      let moved = 0;
      for (let b = 0; b < count; b++) moved += fit.covariance[a * count + b] * products[b][g];
      sum += moved * moved;
    }
    return Math.sqrt(sum);
  });
}

/** The node that fits best with the intensities of the base scaled to the counts. */
function startValue(
  base: Template,
  family: TemplateFamily,
  channels: MatchChannels,
  offsetEv: number,
): number {
  const model = matchedModel(base, [family], channels);
  const parameters = new Float64Array(model.names.length);
  const expected = new Float64Array(channels.counts.length);
  const measured = channels.counts.reduce((sum, count) => sum + count, 0);
  let best = { value: family.baseValue, deviance: Infinity };
  for (const value of family.values) {
    if (value < family.lower || value > family.upper) continue;
    parameters.fill(0);
    parameters[OFFSET] = offsetEv;
    parameters[GAIN] = 1;
    for (let r = 0; r < channels.regionCount; r++) {
      parameters[FIRST_INTENSITY + r] = startIntensity(base, channels, r, offsetEv);
    }
    parameters[FIRST_INTENSITY + channels.regionCount] = value;
    model.expected(parameters, expected);
    const scale = measured / expected.reduce((sum, mean) => sum + mean, 0);
    const deviance = channels.counts.reduce((sum, count, i) => {
      const mean = Math.max(LEAST_VARIANCE, scale * expected[i]);
      return sum + (count > 0 ? 2 * count * Math.log(count / mean) : 0);
    }, 0);
    if (deviance < best.deviance) best = { value, deviance };
  }
  return best.value;
}

/** The intensity that gives a region as many expected counts as it has. */
function startIntensity(base: Template, channels: MatchChannels, region: number, offsetEv: number): number {
  const curve = { ...base, values: base.counts };
  let measured = 0;
  let expected = 0;
  channels.regions.forEach((of, i) => {
    if (of !== region) return;
    measured += channels.counts[i] - base.darkCounts;
    expected += curveAt(curve, channels.energiesEv[i] - offsetEv) - base.darkCounts;
  });
  if (!(measured > 0 && expected > 0)) {
    throw new RangeError(
      cannot(
        "match a spectrum",
        `measured and expected counts of region ${region + 1} must be above the dark counts`,
        `${measured} measured, ${expected.toPrecision(3)} expected`,
      ),
    );
  }
  return measured / expected;
}
