/**
 * Uniform grid of electron energies above the Fermi level: bin k covers [k, k + 1) steps, its center is k + 1/2 steps.
 *
 * Energy transfers are whole steps, so energy is conserved exactly in every pair event.
 */
export interface EnergyGrid {
  /** Width of a bin, eV. */
  readonly stepEv: number;
  /** Number of bins from the Fermi level up. */
  readonly count: number;
  /** First bin above the vacuum level; electrons below it never come out and are dropped. */
  readonly vacuumBin: number;
  /** Bins below the Fermi level (or above, for holes) that thermal smearing reaches. */
  readonly thermalBins: number;
}

/** Thermal tails are followed to exp(-16), 1e-7 of the states. */
const THERMAL_REACH = 16;

/**
 * Grid that holds every electron a photon of the given energy can make.
 *
 * The vacuum level is made a bin edge, so that no bin mixes electrons that can leave with electrons that cannot: at
 * T = 0 nothing comes out below threshold, by however little.
 *
 * @param widestStepEv Widest bin allowed, eV, > 0.
 * @param limits Highest photon energy and work function, eV, and thermal energy kT, eV, >= 0.
 * @throws {RangeError} If the step is not > 0.
 * @returns The grid; without room for an electron above the vacuum level `vacuumBin >= count`.
 */
export function energyGrid(
  widestStepEv: number,
  limits: {
    readonly photonEnergyEv: number;
    readonly workFunctionEv: number;
    readonly thermalEnergyEv: number;
  },
): EnergyGrid {
  if (!(widestStepEv > 0)) {
    throw new RangeError(
      `Cannot make an energy grid as widestStepEv must be > 0 eV: current value is ${widestStepEv} eV`,
    );
  }
  const vacuumBin = Math.ceil(limits.workFunctionEv / widestStepEv - 1e-9);
  const stepEv = vacuumBin > 0 ? limits.workFunctionEv / vacuumBin : widestStepEv;
  const thermalBins = Math.ceil((THERMAL_REACH * limits.thermalEnergyEv) / stepEv);
  return {
    stepEv,
    count: Math.ceil(limits.photonEnergyEv / stepEv) + thermalBins + 1,
    vacuumBin,
    thermalBins,
  };
}
