import { normalCdf, normalPdf } from "../math/mod.ts";

/** The two moments of a broadened Fermi edge at one energy. */
export interface FermiEdgeShape {
  /** Fermi-Dirac occupation folded with the Gaussian, 0..1. */
  readonly occupation: number;
  /** `(E - E_F) f(E)` folded with the Gaussian, eV: what a linear density of states adds. */
  readonly slopeEv: number;
}

/** Below this share of sigma, kT enters by Sommerfeld's expansion: error of order (kT/sigma)^4, 1e-5. */
const COLD_SHARE = 0.05;
const REACH_SIGMAS = 6.5;

/**
 * Fermi-Dirac edge, and its first moment, folded with a Gaussian response.
 *
 * By the trapezoid rule over the Gaussian, which converges exponentially: with a step of `min(sigma, kT)` (and at most
 * sigma/1.2) the error is below 1e-7. For kT < sigma/20 by the Sommerfeld expansion (N. Ashcroft, N. Mermin, Solid State
 * Physics, app. C; cited from memory).
 *
 * @param energyEv Energy from the Fermi level, eV.
 * @param thermalEnergyEv kT, eV, >= 0.
 * @param sigmaEv Standard deviation of the response, eV, > 0.
 * @param out Receives the result, so that fits allocate nothing.
 */
export function broadenedFermiEdge(
  energyEv: number,
  thermalEnergyEv: number,
  sigmaEv: number,
  out: { -readonly [key in keyof FermiEdgeShape]: FermiEdgeShape[key] },
): void {
  if (thermalEnergyEv < COLD_SHARE * sigmaEv) {
    const x = energyEv / sigmaEv;
    const density = normalPdf(x);
    const thermal = (Math.PI * thermalEnergyEv) ** 2 / 6;
    out.occupation = normalCdf(-x) + (thermal * x * density) / (sigmaEv * sigmaEv);
    out.slopeEv = energyEv * normalCdf(-x) - sigmaEv * density - (thermal * density) / sigmaEv;
    return;
  }
  const step = Math.min(sigmaEv / 1.2, thermalEnergyEv);
  const half = Math.ceil((REACH_SIGMAS * sigmaEv) / step);
  let norm = 0;
  let occupation = 0;
  let slope = 0;
  for (let i = -half; i <= half; i++) {
    const t = (i * step) / sigmaEv;
    const weight = Math.exp(-0.5 * t * t);
    const shifted = energyEv - i * step;
    const filled = weight / (1 + Math.exp(shifted / thermalEnergyEv));
    norm += weight;
    occupation += filled;
    slope += filled * shifted;
  }
  out.occupation = occupation / norm;
  out.slopeEv = slope / norm;
}
