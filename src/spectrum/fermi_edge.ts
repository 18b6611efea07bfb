import { normalCdf, normalPdf } from "../math/mod.ts";

/** The moments of a broadened Fermi edge at one energy. */
export interface FermiEdgeShape {
  /** Fermi-Dirac occupation folded with the Gaussian, 0..1. */
  readonly occupation: number;
  /** `(E - E_F) f(E)` folded with the Gaussian, eV: what a linear density of states adds. */
  readonly slopeEv: number;
  /** `(E - E_F)^2 f(E)` folded with the Gaussian, eV^2: what a curved density of states adds. */
  readonly curveEv2: number;
}

/** Below this share of sigma, kT enters by Sommerfeld's expansion: error of order (kT/sigma)^4, 1e-5. */
const COLD_SHARE = 0.05;
const REACH_SIGMAS = 6.5;

/** Beyond this many kT and standard deviations from the edge it is a full or an empty band, to 1e-10. */
const REACH_THERMAL = 24;

/**
 * Fermi-Dirac edge, and its first two moments, folded with a Gaussian response.
 *
 * By the trapezoid rule over the Gaussian, which converges exponentially: with a step of `min(sigma, kT)` (and at most
 * sigma/1.2) the error is below 1e-7. For kT < sigma/20 by the Sommerfeld expansion (N. Ashcroft, N. Mermin, Solid State
 * Physics, app. C; cited from memory).
 *
 * @param thermalEnergyEv kT, eV, >= 0.
 * @param sigmaEv Standard deviation of the response, eV, > 0.
 * @returns A function that writes the shape at an energy from the Fermi level (eV) into `out`, so that fits allocate
 * nothing per channel.
 */
export function broadenedFermiEdge(
  thermalEnergyEv: number,
  sigmaEv: number,
): (energyEv: number, out: { -readonly [key in keyof FermiEdgeShape]: FermiEdgeShape[key] }) => void {
  if (thermalEnergyEv < COLD_SHARE * sigmaEv) {
    const thermal = (Math.PI * thermalEnergyEv) ** 2 / 6;
    return (energyEv, out) => {
      const x = energyEv / sigmaEv;
      const density = normalPdf(x);
      const filled = normalCdf(-x);
      out.occupation = filled + (thermal * x * density) / (sigmaEv * sigmaEv);
      out.slopeEv = energyEv * filled - sigmaEv * density + (thermal * density) / sigmaEv;
      out.curveEv2 = (energyEv * energyEv + sigmaEv * sigmaEv) * filled - energyEv * sigmaEv * density;
    };
  }
  const step = Math.min(sigmaEv / 1.2, thermalEnergyEv);
  const half = Math.ceil((REACH_SIGMAS * sigmaEv) / step);
  const weights = Float64Array.from(
    { length: 2 * half + 1 },
    (_, i) => normalPdf(((i - half) * step) / sigmaEv),
  );
  const norm = weights.reduce((sum, weight) => sum + weight, 0);
  // exp((E - s)/kT) of all nodes from one exponential; at most e^24 e^(2 x 6.5 sigma/kT), below e^300 here.
  const factors = weights.map((_, i) => Math.exp((-(i - half) * step) / thermalEnergyEv));
  const reach = REACH_THERMAL * thermalEnergyEv + REACH_SIGMAS * sigmaEv;
  return (energyEv, out) => {
    if (Math.abs(energyEv) > reach) {
      out.occupation = energyEv < 0 ? 1 : 0;
      out.slopeEv = energyEv < 0 ? energyEv : 0;
      out.curveEv2 = energyEv < 0 ? energyEv * energyEv + sigmaEv * sigmaEv : 0;
      return;
    }
    const boltzmann = Math.exp(energyEv / thermalEnergyEv);
    let occupation = 0;
    let slope = 0;
    let curve = 0;
    for (let i = 0; i < weights.length; i++) {
      const shifted = energyEv - (i - half) * step;
      const filled = weights[i] / (1 + boltzmann * factors[i]);
      occupation += filled;
      slope += filled * shifted;
      curve += filled * shifted * shifted;
    }
    out.occupation = occupation / norm;
    out.slopeEv = slope / norm;
    out.curveEv2 = curve / norm;
  };
}
