import { fastErfcx, normalCdf, normalPdf } from "../math/mod.ts";

/** Standard deviations below a step where less than 1e-18 of it is left. */
const NOTHING_BELOW = -9;

/**
 * Step with an exponentially decaying top, `exp(-x / decay)` for x > 0, folded with a Gaussian: the exponentially
 * modified Gaussian `1/2 exp(s^2/2d^2 - x/d) erfc((s/d - x/s)/sqrt 2)` without overflow (E. Grushka, Anal. Chem. 44, 1733
 * (1972)).
 *
 * @param x Distance above the step, eV.
 * @param sigmaEv Standard deviation of the response, eV, > 0.
 * @param decayEv Decay length of the top, eV, > 0.
 * @returns Height, 0..1.
 */
export function broadenedTopStep(x: number, sigmaEv: number, decayEv: number): number {
  if (x < NOTHING_BELOW * sigmaEv) return 0;
  const ratio = sigmaEv / decayEv;
  const argument = (ratio - x / sigmaEv) * Math.SQRT1_2;
  return argument > 0
    ? 0.5 * Math.exp(-0.5 * (x / sigmaEv) ** 2) * fastErfcx(argument)
    : Math.exp(0.5 * ratio * ratio - x / decayEv) * normalCdf(x / sigmaEv - ratio);
}

/**
 * Integral of {@link broadenedTopStep} from minus infinity to x.
 *
 * @param x Distance above the step, eV.
 * @param sigmaEv Standard deviation, eV, > 0.
 * @param decayEv Decay length, eV, > 0.
 * @returns Integral, eV.
 */
function topStepIntegral(x: number, sigmaEv: number, decayEv: number): number {
  return decayEv * (normalCdf(x / sigmaEv) - broadenedTopStep(x, sigmaEv, decayEv));
}

/**
 * Straight onset folded with a Gaussian: 0 below x = 0, slope 1 above.
 *
 * @param x Distance above the onset, eV.
 * @param sigmaEv Standard deviation, eV, > 0.
 * @returns Height, eV.
 */
export function broadenedHinge(x: number, sigmaEv: number): number {
  const t = x / sigmaEv;
  return x * normalCdf(t) + sigmaEv * normalPdf(t);
}

/**
 * Secondary cutoff as an accelerated analyzer sees it: rises linearly over `rampEv` from x = 0 while its acceptance
 * cone still takes in every direction, then a top of which the share `decaying` decays exponentially and the rest stays,
 * all folded with a Gaussian.
 *
 * A ramp of width r is a step averaged over positions 0..r; on the decaying part that differs from a product with the
 * ramp by terms of order r / decay.
 *
 * @param x Distance above the cutoff, eV.
 * @param sigmaEv Standard deviation of the response, eV, > 0.
 * @param rampEv Width of the rise, eV, >= 0.
 * @param decayEv Decay length of the top, eV, > 0.
 * @param decaying Share of the top that decays; may lie outside 0..1 for tops that first rise.
 * @returns Height, 1 at the undecayed top.
 */
export function broadenedRampStep(
  x: number,
  sigmaEv: number,
  rampEv: number,
  decayEv: number,
  decaying: number,
): number {
  if (rampEv < 1e-3 * sigmaEv) {
    return decaying * broadenedTopStep(x - 0.5 * rampEv, sigmaEv, decayEv) +
      (1 - decaying) * normalCdf((x - 0.5 * rampEv) / sigmaEv);
  }
  const falling = topStepIntegral(x, sigmaEv, decayEv) - topStepIntegral(x - rampEv, sigmaEv, decayEv);
  const flat = broadenedHinge(x, sigmaEv) - broadenedHinge(x - rampEv, sigmaEv);
  return (decaying * falling + (1 - decaying) * flat) / rampEv;
}
