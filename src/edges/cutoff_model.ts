import type { FitParameter, PoissonProblem } from "../fit/mod.ts";
import { broadenedHinge, broadenedRampStep, broadenedTopStep } from "../spectrum/mod.ts";

/** Decay lengths of the two falling parts of the top, eV: together they follow any smooth top over the window. */
const FAST_DECAY_EV = 0.3;
const SLOW_DECAY_EV = 1.5;

/** Parts of the model beyond one step. */
export type CutoffExtra = "none" | "foot" | "second step";

/** The rise of a cutoff that the acceptance cone of half-angle theta makes under bias. */
export interface AcceptanceRamp {
  /** `tan^2(theta)`: width of the rise per eV of recorded kinetic energy. */
  readonly perEv: number;
  /** Recorded kinetic energy less the energy on the axis, eV. */
  readonly offsetEv: number;
}

/** Width of the rise for a cutoff at a position on the axis, eV. */
export function rampWidthEv({ perEv, offsetEv }: AcceptanceRamp, positionEv: number): number {
  return Math.max(0, perEv * (positionEv + offsetEv));
}

/** Start values of a cutoff: a step of width sigma from base to top. */
export interface CutoffStart {
  readonly positionEv: number;
  readonly sigmaEv: number;
  readonly top: number;
  readonly base: number;
}

/** Parameters of the step itself, shared by all models. */
export const STEP_PARAMETERS = 7;

/**
 * Start parameters of a cutoff in a window.
 *
 * @param window Energies, eV.
 * @param start Start values.
 * @returns Position, sigma, three parts of the top, two of the background.
 */
export function stepParameters(window: Float64Array, start: CutoffStart): FitParameter[] {
  const { positionEv, top, base } = start;
  const last = window[window.length - 1];
  const stepEv = (last - window[0]) / (window.length - 1);
  const sigmaEv = Math.min(2, Math.max(0.2 * stepEv, start.sigmaEv));
  return [
    { name: "position", start: positionEv, lower: window[0], upper: last, scale: sigmaEv },
    { name: "sigma", start: sigmaEv, lower: 0.15 * stepEv, upper: 2, scale: sigmaEv },
    { name: "flat", start: top, scale: top },
    { name: "fast", start: 0.1 * top, scale: top },
    { name: "slow", start: 0.1 * top, scale: top },
    { name: "base", start: base, lower: 0, scale: Math.max(base, 1) },
    { name: "slope", start: 0, scale: Math.max(base, 1) },
  ];
}

/** Background below the edge, and the top extrapolated to the edge, counts. */
export function levels(values: Float64Array): readonly [base: number, top: number] {
  return [values[5], values[2] + values[3] + values[4]];
}

/** How much a top rises over the first 0.3 eV above the edge, as a share of itself there; 0 where it falls. */
export function lateRise(values: Float64Array): number {
  const [, , flat, fast, slow] = values;
  const topOver = flat + fast * Math.exp(-1) + slow * Math.exp(-FAST_DECAY_EV / SLOW_DECAY_EV);
  return Math.max(0, 1 - (flat + fast + slow) / topOver);
}

/**
 * A step with a ramp and a decaying top, folded with a Gaussian, on a background that may slope below the edge; with an
 * exponential foot below the edge (parameters foot, footLength), or with a second step of the same form above it
 * (parameters separation, share).
 *
 * The ramp: parallel momentum is kept in the bias field, so a cone of half-angle theta takes in every direction up to
 * `E_out = tan^2(theta) E_kin`, and only a constant share above. Source: kinematics of a flat emitter; see A. Baddorf,
 * Sci. Rep. 13, 13452 (2023) and Y. Ishida et al., Commun. Phys. 3 (2020) for what it does to measured cutoffs.
 *
 * @param window Energies, eV, shape (n).
 * @param acceptance Ramp of the acceptance cone, or null for none.
 * @param extra Which parts beyond one step.
 * @returns Model and derivatives.
 */
export function cutoffModel(
  window: Float64Array,
  acceptance: AcceptanceRamp | null,
  extra: CutoffExtra,
): Required<Pick<PoissonProblem, "model" | "derivative">> {
  const hasFoot = extra === "foot";
  const hasSecond = extra === "second step";
  const rampAt = (position: number): number => acceptance === null ? 0 : rampWidthEv(acceptance, position);
  /** One part of the top, 1 where undecayed. */
  const part = (index: number, x: number, sigmaEv: number, ramp: number): number =>
    index === 2
      ? broadenedRampStep(x, sigmaEv, ramp, 1, 0)
      : broadenedRampStep(x, sigmaEv, ramp, index === 3 ? FAST_DECAY_EV : SLOW_DECAY_EV, 1);
  const top = (p: Float64Array, x: number, ramp: number): number =>
    p[2] * part(2, x, p[1], ramp) + p[3] * part(3, x, p[1], ramp) + p[4] * part(4, x, p[1], ramp);
  return {
    model: (p, out) => {
      const ramp = rampAt(p[0]);
      for (let i = 0; i < window.length; i++) {
        const x = window[i] - p[0];
        out[i] = top(p, x, ramp) + p[5] + p[6] * broadenedHinge(-x, p[1]);
        if (hasFoot) out[i] += p[7] * broadenedTopStep(-x, p[1], p[8]);
        if (hasSecond) out[i] += p[8] * top(p, x - p[7], ramp);
      }
    },
    derivative: (index, p, out) => {
      if (index < 2 || (hasFoot && index === 8) || (hasSecond && index === 7)) return false;
      const ramp = rampAt(p[0]);
      for (let i = 0; i < window.length; i++) {
        const x = window[i] - p[0];
        if (index === 5) out[i] = 1;
        else if (index === 6) out[i] = broadenedHinge(-x, p[1]);
        else if (index === 7) out[i] = broadenedTopStep(-x, p[1], p[8]);
        else if (index === 8) out[i] = top(p, x - p[7], ramp);
        else {
          out[i] = part(index, x, p[1], ramp);
          if (hasSecond) out[i] += p[8] * part(index, x - p[7], p[1], ramp);
        }
      }
      return true;
    },
  };
}
