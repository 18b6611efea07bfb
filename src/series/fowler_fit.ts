import { cannot, type Estimate } from "../base/mod.ts";
import { fowlerYieldEv2 } from "../emission/mod.ts";
import { correlation, minimize } from "../fit/mod.ts";
import { FWHM_PER_SIGMA, gaussLegendre, normalPdf } from "../math/mod.ts";
import { judgeFit, type Judgment } from "./judgment.ts";

/** Yield against photon energy. */
export interface FowlerSeries {
  /** Photon energies, eV, ascending, shape (n). */
  readonly photonEnergiesEv: ArrayLike<number>;
  /** Electrons per absorbed photon in any unit, dark current and stray light subtracted, shape (n). */
  readonly yields: ArrayLike<number>;
  /** Standard uncertainties in the same unit, each > 0, shape (n). */
  readonly yieldUncertainties: ArrayLike<number>;
  /** Temperature of the emitter, K, >= 0. */
  readonly temperatureK: number;
  /** Full width at half maximum of the light's Gaussian band, eV, >= 0. */
  readonly bandFwhmEv: number;
}

/** The answer of a Fowler plot. */
export interface FowlerFit extends Judgment {
  /** Work function, eV; null when the fit failed. */
  readonly workFunctionEv: Estimate | null;
  /** Whose work function it is: the yield's threshold belongs to the emitter. */
  readonly workFunctionOf: "emitter";
  /** Yield per eV^2 of Fowler's `(kT)^2 f`, in the unit of the yields per eV^2; null when the fit failed. */
  readonly amplitudePerEv2: Estimate | null;
  /** Correlation coefficient of the two; null when the fit failed. */
  readonly correlation: number | null;
  /** Fitted yields, shape (n). */
  readonly fitted: Float64Array;
}

/** Above this distance from threshold Fowler's constant probability of emission is no longer believed (common practice). */
const FOWLER_REACH_EV = 1.5;
const BAND_RULE = gaussLegendre(24);
const BAND_REACH_SIGMAS = 5;
const SIGMAS_PER_FWHM = 1 / FWHM_PER_SIGMA;

/**
 * Work function of a metal from its photoelectric yield near threshold at a known temperature.
 *
 * Fits `A (kT)^2 f((h nu - W)/kT)` to the yields themselves (a Fowler plot is the same on a logarithmic scale, where
 * weights are lost and points below the noise cannot be drawn), averaged over the band of the light.
 *
 * Doubtful also when the highest photon energy is more than 1.5 eV above threshold, or fewer than 3 yields differ from
 * zero by 3 standard uncertainties. A good fit does not prove that Fowler's picture holds.
 *
 * Source: R. H. Fowler, Phys. Rev. 38, 45 (1931).
 *
 * @param series At least 4 points.
 * @returns The work function with its covariance and verdict.
 * @throws {RangeError} If lengths differ or a number is out of range.
 * @example Exact yields give the work function back
 * ```ts
 * import { fitFowler, fowlerYieldEv2 } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const photonEnergiesEv = [4.4, 4.6, 4.8, 5, 5.2];
 * const yields = photonEnergiesEv.map((energy) => 7 * fowlerYieldEv2(energy, 4.5, 300));
 * const yieldUncertainties = yields.map(() => 0.01);
 * const fit = fitFowler({ photonEnergiesEv, yields, yieldUncertainties, temperatureK: 300, bandFwhmEv: 0 });
 * assert.equal(fit.workFunctionEv?.value.toFixed(6), "4.500000");
 * ```
 */
export function fitFowler(series: FowlerSeries): FowlerFit {
  check(series);
  const { photonEnergiesEv, temperatureK } = series;
  const data = Float64Array.from(series.yields);
  const sigma = Float64Array.from(series.yieldUncertainties);
  const band = bandNodes(series.bandFwhmEv);
  const start = squareLawStart(photonEnergiesEv, data);
  const fit = minimize({
    parameters: [
      { name: "work function", start: start.workFunctionEv, scale: 0.1 },
      { name: "amplitude", start: start.amplitudePerEv2 },
    ],
    model: ([workFunctionEv, amplitude], out) => {
      for (let i = 0; i < out.length; i++) {
        let mean = 0;
        for (let k = 0; k < band.weights.length; k++) {
          mean += band.weights[k] *
            fowlerYieldEv2(photonEnergiesEv[i] + band.shiftsEv[k], workFunctionEv, temperatureK);
        }
        out[i] = amplitude * mean;
      }
    },
    data,
    sigma,
  });
  const [workFunctionEv] = fit.values;
  const reachEv = photonEnergiesEv[photonEnergiesEv.length - 1] - workFunctionEv;
  const seen = data.filter((value, i) => value > 3 * sigma[i]).length;
  const judgment = judgeFit(fit, data, [
    ...(reachEv > FOWLER_REACH_EV
      ? [
        `the photon energies go ${
          reachEv.toFixed(1)
        } eV above threshold, where the probability of emission ` +
        `changes; leave out those more than ${FOWLER_REACH_EV} eV above it`,
      ]
      : []),
    ...(seen < 3 ? [`only ${seen} yields stand out of their uncertainties`] : []),
  ]);
  const estimate = (index: number): Estimate => ({
    value: fit.values[index],
    standardUncertainty: fit.standardErrors[index] * judgment.inflation,
  });
  const isGood = judgment.verdict !== "failed";
  return {
    ...judgment,
    workFunctionEv: isGood ? estimate(0) : null,
    workFunctionOf: "emitter",
    amplitudePerEv2: isGood ? estimate(1) : null,
    correlation: isGood ? correlation(fit, "work function", "amplitude") : null,
    fitted: fit.fitted,
  };
}

/** Nodes of the light's band and their weights, sum 1. */
function bandNodes(fwhmEv: number): { shiftsEv: Float64Array; weights: Float64Array } {
  if (fwhmEv === 0) return { shiftsEv: Float64Array.of(0), weights: Float64Array.of(1) };
  const density = BAND_RULE.weights.map((weight, i) =>
    weight * normalPdf(BAND_REACH_SIGMAS * BAND_RULE.nodes[i])
  );
  const sum = density.reduce((a, b) => a + b, 0);
  return {
    shiftsEv: BAND_RULE.nodes.map((node) => node * BAND_REACH_SIGMAS * fwhmEv * SIGMAS_PER_FWHM),
    weights: density.map((value) => value / sum),
  };
}

/** The square law `Y = A (h nu - W)^2/2`: a straight line of the root of the yield through its upper points. */
function squareLawStart(
  photonEnergiesEv: ArrayLike<number>,
  yields: Float64Array,
): { workFunctionEv: number; amplitudePerEv2: number } {
  const highest = Math.max(...yields);
  const upper = Array.from(
    yields,
    (value, i) => [photonEnergiesEv[i], Math.sqrt(Math.max(0, value))] as const,
  )
    .filter(([, root]) => root > 0.3 * Math.sqrt(highest));
  const mean = (index: 0 | 1): number => upper.reduce((sum, pair) => sum + pair[index], 0) / upper.length;
  const [meanEv, meanRoot] = [mean(0), mean(1)];
  const slope = upper.reduce((sum, [ev, root]) => sum + (ev - meanEv) * (root - meanRoot), 0) /
    upper.reduce((sum, [ev]) => sum + (ev - meanEv) ** 2, 0);
  const last = photonEnergiesEv[photonEnergiesEv.length - 1];
  // Points that do not rise, or a single one: begin at the middle of the range and let the fit decide.
  const isRising = slope > 0 && Number.isFinite(slope);
  const workFunctionEv = isRising ? meanEv - meanRoot / slope : (photonEnergiesEv[0] + last) / 2;
  return { workFunctionEv, amplitudePerEv2: 2 * highest / Math.max(0.01, (last - workFunctionEv) ** 2) };
}

function check(series: FowlerSeries): void {
  const { photonEnergiesEv, yields, yieldUncertainties, temperatureK, bandFwhmEv } = series;
  const fail = (rule: string, value: unknown) => new RangeError(cannot("fit a Fowler plot", rule, value));
  const n = photonEnergiesEv.length;
  if (n < 4) throw fail("there must be at least 4 points", n);
  if (yields.length !== n || yieldUncertainties.length !== n) {
    throw fail(
      `there must be ${n} yields and uncertainties`,
      `${yields.length}, ${yieldUncertainties.length}`,
    );
  }
  for (let i = 0; i < n; i++) {
    if (!(photonEnergiesEv[i] > (photonEnergiesEv[i - 1] ?? 0) && photonEnergiesEv[i] < Infinity)) {
      throw fail(`photonEnergiesEv[${i}] must be > 0 eV and ascending`, photonEnergiesEv[i]);
    }
  }
  if (!Array.from(yields).some((value) => value > 0)) throw fail("a yield must be > 0", "none");
  if (!(temperatureK >= 0 && temperatureK < Infinity)) {
    throw fail("temperatureK must be >= 0 K", temperatureK);
  }
  if (!(bandFwhmEv >= 0 && bandFwhmEv < Infinity)) throw fail("bandFwhmEv must be >= 0 eV", bandFwhmEv);
}
