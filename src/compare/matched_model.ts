import { FWHM_PER_SIGMA } from "../math/mod.ts";
import { curveAt, curveSlopeAt, foldGaussian } from "./curve.ts";
import { lagrangeWeights, type Template, type TemplateFamily } from "./template.ts";

/** Measured channels on the axis of the templates. */
export interface MatchChannels {
  /** Energies, eV, shape (n). */
  readonly energiesEv: Float64Array;
  /** Measured counts, shape (n). */
  readonly counts: Float64Array;
  /** Which region each channel belongs to, shape (n); every region has an intensity of its own. */
  readonly regions: Int32Array;
  /** Number of regions. */
  readonly regionCount: number;
}

/** Interpolated templates as a model with parameters. */
export interface MatchedModel {
  /** Names of the parameters: offset, gain, extra width, background, intensity of each region, value of each family. */
  readonly names: readonly string[];
  /** Fills `out` with the expected counts of the channels, shape (n). */
  readonly expected: (parameters: Float64Array, out: Float64Array) => void;
  /**
   * Fills `out` with the derivative by parameter number `index`, shape (n); `false` for the extra width, which is left to
   * finite differences.
   */
  readonly derivative: (index: number, parameters: Float64Array, out: Float64Array) => boolean;
  /**
   * What the finite number of histories does to the expected counts, shape (groups of all simulations)(n): the outer
   * products of these vectors add up to the covariance of the expectation.
   */
  readonly noise: (parameters: Float64Array) => Float64Array[];
}

/** Parameters before the intensities. */
export const OFFSET = 0;
export const GAIN = 1;
export const EXTRA_FWHM = 2;
export const BACKGROUND = 3;
export const FIRST_INTENSITY = 4;

const SIGMAS_PER_FWHM = 1 / FWHM_PER_SIGMA;

/**
 * Expected counts `intensity T((E - offset)/gain) + dark + background`, T without its dark counts: the gain about the Fermi edge, T folded with the extra
 * Gaussian and changed by the values of the families, its edges moved to where these put them.
 *
 * Changes of several families add up; what they do together beyond that is left out.
 *
 * @param base Template of the base scenario.
 * @param families Free scenario parameters.
 * @param channels Where to evaluate.
 * @returns The model; its functions share buffers and are not reentrant.
 */
export function matchedModel(
  base: Template,
  families: readonly TemplateFamily[],
  channels: MatchChannels,
): MatchedModel {
  const { energiesEv, regions, regionCount } = channels;
  const n = energiesEv.length;
  const firstValue = FIRST_INTENSITY + regionCount;
  const weights = families.map(({ values }) => new Float64Array(values.length));
  const slopes = families.map(({ values }) => new Float64Array(values.length));
  const raw = { ...base, values: new Float64Array(base.counts.length) };
  const folded = { ...base, values: new Float64Array(base.counts.length) };
  const baseWidthEv = base.fermiEdgeEv - base.cutoffEv;
  let cutoffEv = 0;
  let fermiEdgeEv = 0;

  /** Node weights and edges at the values of the families. */
  function place(parameters: Float64Array): void {
    cutoffEv = base.cutoffEv;
    fermiEdgeEv = base.fermiEdgeEv;
    for (let f = 0; f < families.length; f++) {
      const family = families[f];
      lagrangeWeights(family.values, parameters[firstValue + f], weights[f], slopes[f]);
      for (let k = 0; k < weights[f].length; k++) {
        cutoffEv += weights[f][k] * (family.cutoffsEv[k] - base.cutoffEv);
        fermiEdgeEv += weights[f][k] * (family.fermiEdgesEv[k] - base.fermiEdgeEv);
      }
    }
  }

  /** Energy of a channel on the scale of the scenario, offset and gain taken off. */
  function unscaled(parameters: Float64Array, i: number): number {
    return base.fermiEdgeEv + (energiesEv[i] - parameters[OFFSET] - base.fermiEdgeEv) / parameters[GAIN];
  }

  /** Energy of a channel among the energies of the base template. */
  function onBase(parameters: Float64Array, i: number): number {
    return base.cutoffEv + (unscaled(parameters, i) - cutoffEv) * baseWidthEv / (fermiEdgeEv - cutoffEv);
  }

  function addChanges(f: number, shares: Float64Array): void {
    for (let k = 0; k < shares.length; k++) {
      const share = shares[k];
      const change = families[f].changes[k];
      if (share !== 0) { for (let i = 0; i < change.length; i++) raw.values[i] += share * change[i]; }
    }
  }

  function fold(parameters: Float64Array): void {
    foldGaussian(raw.values, parameters[EXTRA_FWHM] * SIGMAS_PER_FWHM / base.stepEv, folded.values);
  }

  /** Leaves the spectrum at the parameters in `folded`. */
  function evaluate(parameters: Float64Array): void {
    place(parameters);
    raw.values.set(base.counts);
    for (let f = 0; f < families.length; f++) addChanges(f, weights[f]);
    fold(parameters);
  }

  function electronsAt(parameters: Float64Array, i: number): number {
    return curveAt(folded, onBase(parameters, i)) - base.darkCounts;
  }

  function expected(parameters: Float64Array, out: Float64Array): void {
    evaluate(parameters);
    for (let i = 0; i < n; i++) {
      out[i] = parameters[FIRST_INTENSITY + regions[i]] * electronsAt(parameters, i) + base.darkCounts +
        parameters[BACKGROUND];
    }
  }

  /** Adds intensity x dT/dE x rate, the rate being that of the channel's energy among those of the template. */
  function addMotion(parameters: Float64Array, rateOf: (i: number) => number, out: Float64Array): void {
    for (let i = 0; i < n; i++) {
      out[i] += parameters[FIRST_INTENSITY + regions[i]] * rateOf(i) *
        curveSlopeAt(folded, onBase(parameters, i));
    }
  }

  function derivative(index: number, parameters: Float64Array, out: Float64Array): boolean {
    if (index === EXTRA_FWHM) return false;
    if (index === BACKGROUND) {
      out.fill(1);
      return true;
    }
    evaluate(parameters);
    const stretch = baseWidthEv / (fermiEdgeEv - cutoffEv);
    out.fill(0);
    if (index === OFFSET) addMotion(parameters, () => -stretch / parameters[GAIN], out);
    else if (index === GAIN) {
      const rate = -stretch / parameters[GAIN];
      addMotion(parameters, (i) => rate * (unscaled(parameters, i) - base.fermiEdgeEv), out);
    } else if (index < firstValue) {
      for (let i = 0; i < n; i++) {
        if (regions[i] === index - FIRST_INTENSITY) out[i] = electronsAt(parameters, i);
      }
    } else {
      const f = index - firstValue;
      const { cutoffsEv, fermiEdgesEv } = families[f];
      const cutoffSlope = slopes[f].reduce((sum, slope, k) => sum + slope * cutoffsEv[k], 0);
      const fermiSlope = slopes[f].reduce((sum, slope, k) => sum + slope * fermiEdgesEv[k], 0);
      const widening = (fermiSlope - cutoffSlope) / (fermiEdgeEv - cutoffEv);
      addMotion(
        parameters,
        (i) => -stretch * (cutoffSlope + (unscaled(parameters, i) - cutoffEv) * widening),
        out,
      );
      raw.values.fill(0);
      addChanges(f, slopes[f]);
      fold(parameters);
      for (let i = 0; i < n; i++) {
        out[i] += parameters[FIRST_INTENSITY + regions[i]] * curveAt(folded, onBase(parameters, i));
      }
    }
    return true;
  }

  function noise(parameters: Float64Array): Float64Array[] {
    place(parameters);
    const vector = (group: Float64Array, mean: Float64Array, count: number, weight: number): Float64Array => {
      const share = weight / Math.sqrt(count * (count - 1));
      for (let i = 0; i < mean.length; i++) raw.values[i] = share * (group[i] - mean[i]);
      fold(parameters);
      return Float64Array.from(
        regions,
        (region, i) => parameters[FIRST_INTENSITY + region] * curveAt(folded, onBase(parameters, i)),
      );
    };
    return [
      ...base.groups.map((group) => vector(group, base.counts, base.groups.length, 1)),
      ...families.flatMap(({ changes, changeGroups }, f) =>
        changeGroups.flatMap((groups, k) =>
          groups.map((group) => vector(group, changes[k], groups.length, weights[f][k]))
        )
      ),
    ];
  }

  return {
    names: [
      "offsetEv",
      "gain",
      "extraFwhmEv",
      "backgroundCounts",
      ...Array.from({ length: regionCount }, (_, r) => `intensity${r + 1}`),
      ...families.map(({ name }) => name),
    ],
    expected,
    derivative,
    noise,
  };
}
