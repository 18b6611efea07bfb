import { FWHM_PER_SIGMA, normalCdf } from "../math/mod.ts";

/** Response is followed out to this many standard deviations. */
const REACH_SIGMAS = 7;

/**
 * Energy resolution of a hemispherical analyzer at constant pass energy, `E_p (w / (2 R0) + alpha^2 / 4)`.
 *
 * Textbook formula (for example D. Roy, D. Tremblay, Rep. Prog. Phys. 53, 1621 (1990); cited from memory).
 *
 * @param passEnergyEv Pass energy, eV, > 0.
 * @param slitWidthMm Mean of entrance and exit slit width, mm, > 0.
 * @param meanRadiusMm Mean radius of the hemispheres, mm, > 0.
 * @param halfAngleRad Half-angle in the dispersive plane at the entrance slit, rad, >= 0.
 * @returns Full width at half maximum, eV.
 */
export function hemisphereResolutionEv(
  passEnergyEv: number,
  slitWidthMm: number,
  meanRadiusMm: number,
  halfAngleRad: number,
): number {
  return passEnergyEv * (slitWidthMm / (2 * meanRadiusMm) + (halfAngleRad * halfAngleRad) / 4);
}

/**
 * Width of a rectangular window that passes as much as a Gaussian response of peak 1.
 *
 * @param fwhmEv Full width at half maximum, eV, > 0.
 * @returns `FWHM sqrt(pi / (4 ln 2))`, eV.
 */
export function windowEv(fwhmEv: number): number {
  return fwhmEv * Math.sqrt(Math.PI / (4 * Math.LN2));
}

/** Linear map from energy bins to spectral density at the channels, stored as one run of weights per channel. */
export interface ResponseMatrix {
  /** First bin of each channel's run, shape (channels). */
  readonly first: Int32Array;
  /** Start of each run in `weights`, shape (channels + 1). */
  readonly offset: Int32Array;
  /** Weights, 1/eV: a bin's content times its weight adds to the density at the channel. */
  readonly weights: Float64Array;
}

/**
 * Gaussian resolution as a matrix: uniform density inside each bin, response sampled at each channel's energy.
 *
 * @param channelsEv Channel energies on the same scale as the bins, eV, shape (channels).
 * @param bins Energy of the lower edge of bin 0, width of a bin, eV, and number of bins.
 * @param fwhmEv Full width at half maximum, eV, > 0.
 * @returns The matrix; a spectrum of bin contents m gives the density `sum of weights x m`, electrons per eV.
 */
export function responseMatrix(
  channelsEv: Float64Array,
  bins: { readonly startEv: number; readonly stepEv: number; readonly count: number },
  fwhmEv: number,
): ResponseMatrix {
  const sigma = fwhmEv / FWHM_PER_SIGMA;
  const channels = channelsEv.length;
  const first = new Int32Array(channels);
  const offset = new Int32Array(channels + 1);
  const limit = (bin: number): number => Math.min(bins.count, Math.max(0, bin));
  for (let c = 0; c < channels; c++) {
    const low = limit(Math.floor((channelsEv[c] - REACH_SIGMAS * sigma - bins.startEv) / bins.stepEv));
    const high = limit(Math.ceil((channelsEv[c] + REACH_SIGMAS * sigma - bins.startEv) / bins.stepEv));
    first[c] = low;
    offset[c + 1] = offset[c] + high - low;
  }
  const weights = new Float64Array(offset[channels]);
  for (let c = 0; c < channels; c++) {
    const edge = (bin: number): number =>
      normalCdf((bins.startEv + bin * bins.stepEv - channelsEv[c]) / sigma);
    let below = edge(first[c]);
    for (let i = offset[c]; i < offset[c + 1]; i++) {
      const above = edge(first[c] + i - offset[c] + 1);
      weights[i] = (above - below) / bins.stepEv;
      below = above;
    }
  }
  return { first, offset, weights };
}

/**
 * Applies a response to bin contents.
 *
 * @param matrix The response.
 * @param contents Bin contents, shape (bins).
 * @returns Density at the channels, 1/eV, shape (channels).
 */
export function applyResponse(matrix: ResponseMatrix, contents: Float64Array): Float64Array {
  const { first, offset, weights } = matrix;
  return Float64Array.from(first, (start, c) => {
    let sum = 0;
    for (let i = offset[c], bin = start; i < offset[c + 1]; i++, bin++) sum += weights[i] * contents[bin];
    return sum;
  });
}
