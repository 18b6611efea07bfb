import { gaussLegendre } from "../math/mod.ts";
import type { EnergyGrid } from "./grid.ts";

/** The surface barrier and what the analyzer accepts, all energies in eV, angles in rad. */
export interface DetectionInput {
  /** Electron energies. */
  readonly grid: EnergyGrid;
  /** Work function W of the emitting surface, eV, >= 0. */
  readonly workFunctionEv: number;
  /** Depth of the band bottom below the Fermi level, eV, >= 0; the barrier seen inside is W + bottom. */
  readonly bandBottomBelowFermiEv: number;
  /** Transmission of the barrier: 1 above it, or that of a quantum step. */
  readonly barrier: "classical" | "quantum";
  /** Energy the electrons gain between the surface and a flat analyzer entrance, `A = -e U + W - W_A`, eV. */
  readonly accelerationEv: number;
  /** Half-angle of the acceptance cone at the analyzer, rad, 0..pi/2; pi/2 at normal emission collects everything. */
  readonly acceptanceHalfAngleRad: number;
  /** Angle between the surface normal and the analyzer axis, rad, 0..pi/2. */
  readonly emissionAngleRad: number;
  /** Tilt of the emitting facet from the mean surface, rad, 0..pi/2, only at emission angle 0. Default: 0. */
  readonly facetTiltRad?: number;
  /** Cells per mean free path of the depth table, and how many mean free paths deep it goes. */
  readonly cellsPerPath: number;
  /** Depth in mean free paths beyond which nothing is scored. */
  readonly deepestPaths: number;
}

/** Probability of reaching the analyzer without another event, by energy bin and depth. */
export interface DetectionTable {
  /** Probabilities, averaged over the bin and the depth cell, shape (bins from the vacuum level) x (cells). */
  readonly probability: Float32Array;
  /** Depth cells of one row. */
  readonly cells: number;
  /** What the table was made from. */
  readonly input: DetectionInput;
}

const ENERGY_RULE = gaussLegendre(4);
const DIRECTION_RULE = gaussLegendre(32);

/**
 * Probability that an electron that meets the surface passes it: 1 above the barrier, or the quantum step
 * `4 k1 k2 / (k1 + k2)^2` of the normal momenta (textbook formula).
 *
 * @param input The barrier.
 * @param energyEv Energy above the Fermi level, eV.
 * @param cosInside Cosine between the direction inside and the surface normal, either sign.
 * @returns Probability, 0..1; 0 where the normal energy stays below the barrier.
 */
export function barrierTransmission(input: DetectionInput, energyEv: number, cosInside: number): number {
  const normalInside = (energyEv + input.bandBottomBelowFermiEv) * cosInside * cosInside;
  const normalOutside = normalInside - (input.workFunctionEv + input.bandBottomBelowFermiEv);
  if (!(normalOutside > 0)) return 0;
  if (input.barrier === "classical") return 1;
  const inside = Math.sqrt(normalInside);
  const outside = Math.sqrt(normalOutside);
  return (4 * inside * outside) / ((inside + outside) * (inside + outside));
}

/**
 * Share of azimuths at which an electron that leaves is accepted by the analyzer. Parallel momentum is kept through
 * the barrier and the bias field, so `sin^2 theta_an = E_in sin^2 theta_in / (E_out + A)`. A tilted facet keeps its own
 * parallel momentum at its barrier; the field acts along the mean normal.
 *
 * @param input The acceptance.
 * @param energyEv Energy above the Fermi level, eV.
 * @param cosInside Cosine between the direction inside and the surface normal.
 * @returns Share, 0..1; at normal emission 0 or 1.
 */
export function acceptedShare(input: DetectionInput, energyEv: number, cosInside: number): number {
  const outside = energyEv - input.workFunctionEv;
  const arriving = outside + input.accelerationEv;
  const tilt = input.facetTiltRad ?? 0;
  const axis = tilt > 0 ? tilt : input.emissionAngleRad;
  const half = tilt > 0 ? coneBeforeField(input, outside, arriving) : input.acceptanceHalfAngleRad;
  const frame = tilt > 0 ? outside : arriving;
  const parallel = (energyEv + input.bandBottomBelowFermiEv) * (1 - cosInside * cosInside);
  if (!(arriving > 0) || parallel > frame) return 0;
  const sine = Math.sqrt(parallel / frame);
  const angle = Math.asin(sine);
  if (angle + axis <= half) return 1;
  if (Math.abs(angle - axis) > half) return 0;
  const crossing = Math.sin(axis) * sine;
  if (crossing === 0) return 1;
  const cosAzimuth = (Math.cos(half) - Math.cos(axis) * Math.cos(angle)) / crossing;
  return cosAzimuth >= 1 ? 0 : cosAzimuth <= -1 ? 1 : Math.acos(cosAzimuth) / Math.PI;
}

/**
 * Half-angle, just outside the surface, of the cone about the mean normal that the bias field narrows into the
 * acceptance: `E_out sin^2 = (E_out + A) sin^2(acceptance)`; all of the half-space where that exceeds E_out.
 */
function coneBeforeField(input: DetectionInput, outsideEv: number, arrivingEv: number): number {
  const sine = Math.sqrt(arrivingEv / outsideEv) * Math.sin(input.acceptanceHalfAngleRad);
  return sine < 1 ? Math.asin(sine) : Math.PI / 2;
}

/**
 * Values of `sqrt(E_out cos^2 theta_out)` between which the accepted share is smooth and not zero, ascending: where a cone
 * that holds the normal is not centered on it, all azimuths are accepted below the middle value's angle.
 */
function normalMomentumPieces(input: DetectionInput, energyEv: number): number[] {
  const outside = energyEv - input.workFunctionEv;
  const arriving = outside + input.accelerationEv;
  if (!(outside > 0) || !(arriving > 0)) return [];
  const tilt = input.facetTiltRad ?? 0;
  const axis = tilt > 0 ? tilt : input.emissionAngleRad;
  const half = tilt > 0 ? coneBeforeField(input, outside, arriving) : input.acceptanceHalfAngleRad;
  const frame = tilt > 0 ? outside : arriving;
  const steepest = Math.min(Math.PI / 2, axis + half);
  const angles = axis > 0 && axis < half ? [steepest, half - axis, 0] : [steepest, Math.max(0, axis - half)];
  const momenta = angles.map((angle) => Math.sqrt(Math.max(0, outside - frame * Math.sin(angle) ** 2)));
  return momenta.filter((momentum, i) => i === 0 || momentum > momenta[i - 1]);
}

/**
 * Next-event (forced-detection) scores of an isotropic electron, tabulated over energy and depth.
 *
 * Each entry is `1/2 integral T(E, mu) a(E, mu) exp(-z / (lambda mu)) dmu` over the inside direction cosine mu, with
 * barrier transmission T and accepted share of azimuths a. Refraction keeps the parallel momentum,
 * `E_in sin^2 theta_in = E_out sin^2 theta_out`, and so does the bias field,
 * `sin^2 theta_an = E_out sin^2 theta_out / (E_out + A)`. A quantum step transmits `4 k1 k2 / (k1 + k2)^2`.
 *
 * The integral runs over `q = sqrt(E_in mu^2 - V0)`, in which T is smooth, with the ends drawn together by
 * `q = middle - half cos(pi t)`; the depth cells follow by recurrence.
 *
 * Source: next-event estimator, M. Kalos, Nucl. Sci. Eng. 16, 111 (1963); step: any textbook of quantum mechanics.
 *
 * @param input Barrier, acceptance and table size.
 * @returns The table.
 */
export function detectionTable(input: DetectionInput): DetectionTable {
  const { grid, workFunctionEv, bandBottomBelowFermiEv } = input;
  const cells = Math.ceil(input.cellsPerPath * input.deepestPaths);
  const barrierEv = workFunctionEv + bandBottomBelowFermiEv;
  const rows = Math.max(0, grid.count - grid.vacuumBin);
  const probability = new Float32Array(rows * cells);
  const row = new Float64Array(cells);
  for (let r = 0; r < rows; r++) {
    const bottom = (grid.vacuumBin + r) * grid.stepEv;
    const low = Math.max(bottom, workFunctionEv);
    const width = bottom + grid.stepEv - low;
    if (!(width > 0)) continue;
    row.fill(0);
    for (let e = 0; e < ENERGY_RULE.nodes.length; e++) {
      const energyEv = low + 0.5 * width * (1 + ENERGY_RULE.nodes[e]);
      const energyShare = 0.5 * ENERGY_RULE.weights[e] * (width / grid.stepEv);
      const insideEv = energyEv + bandBottomBelowFermiEv;
      const pieces = normalMomentumPieces(input, energyEv);
      for (let p = 0; p < pieces.length - 1; p++) {
        const [from, to] = [pieces[p], pieces[p + 1]];
        const halfRange = 0.5 * (to - from);
        for (let d = 0; d < DIRECTION_RULE.nodes.length; d++) {
          const t = 0.5 * (1 + DIRECTION_RULE.nodes[d]);
          const q = 0.5 * (from + to) - halfRange * Math.cos(Math.PI * t);
          const mu = Math.sqrt((barrierEv + q * q) / insideEv);
          const slope = halfRange * Math.PI * Math.sin(Math.PI * t) * (q / (insideEv * mu));
          const weight = 0.5 * energyShare * 0.5 * DIRECTION_RULE.weights[d] * slope *
            barrierTransmission(input, energyEv, mu) * acceptedShare(input, energyEv, mu);
          if (weight === 0) continue;
          const decay = Math.exp(-1 / (input.cellsPerPath * mu));
          let value = weight * (1 - decay) * mu * input.cellsPerPath;
          for (let c = 0; c < cells && value > 1e-30; c++) {
            row[c] += value;
            value *= decay;
          }
        }
      }
    }
    probability.set(row, r * cells);
  }
  return { input, probability, cells };
}
