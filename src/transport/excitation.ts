import type { EnergyGrid } from "./grid.ts";

/**
 * Fermi-Dirac occupation.
 *
 * @param energyEv Energy from the Fermi level, eV.
 * @param thermalEnergyEv kT, eV, >= 0; at 0 a step that is 1/2 at the Fermi level.
 * @returns Probability that the state is filled, 0..1.
 */
export function fermiOccupation(energyEv: number, thermalEnergyEv: number): number {
  if (thermalEnergyEv === 0) return energyEv < 0 ? 1 : energyEv > 0 ? 0 : 0.5;
  return 1 / (1 + Math.exp(energyEv / thermalEnergyEv));
}

/** Points per bin where the occupation is smooth, and where it changes. */
const SMOOTH_POINTS = 2;
const EDGE_POINTS = 32;

/**
 * Probability that a photon lifts an electron into each final bin: non-direct transitions with constant matrix
 * element, `D(E_i) f(E_i) D(E_f) [1 - f(E_f)]` with `E_f = E_i + h nu`, averaged over the bin.
 *
 * Source: C. Berglund, W. Spicer, Phys. Rev. 136, A1030 (1964).
 *
 * @param grid Final energies.
 * @param photonEnergyEv Photon energy, eV, > 0.
 * @param states Density of states D at an energy from the Fermi level (any constant factor).
 * @param thermalEnergyEv kT, eV, >= 0.
 * @returns Weights, not normalized, shape (grid.count).
 */
export function excitationWeights(
  grid: EnergyGrid,
  photonEnergyEv: number,
  states: (energyEv: number) => number,
  thermalEnergyEv: number,
): Float64Array {
  const weights = new Float64Array(grid.count);
  const edgeReach = (grid.thermalBins + 1) * grid.stepEv;
  for (let k = 0; k < grid.count; k++) {
    const finalCenter = (k + 0.5) * grid.stepEv;
    const nearEdge = Math.abs(finalCenter - photonEnergyEv) < edgeReach || finalCenter < edgeReach;
    const points = nearEdge ? EDGE_POINTS : SMOOTH_POINTS;
    let sum = 0;
    for (let i = 0; i < points; i++) {
      const finalEv = (k + (i + 0.5) / points) * grid.stepEv;
      const initialEv = finalEv - photonEnergyEv;
      const filled = fermiOccupation(initialEv, thermalEnergyEv);
      if (filled === 0) continue;
      sum += states(initialEv) * filled * states(finalEv) * (1 - fermiOccupation(finalEv, thermalEnergyEv));
    }
    weights[k] = sum / points;
  }
  return weights;
}
