import { writeAliasRow } from "../rng/mod.ts";
import { fermiOccupation } from "./excitation.ts";
import type { EnergyGrid } from "./grid.ts";

/** How the inelastic mean free path is fixed: one value from which the model's own energy dependence follows, or all. */
export type MeanFreePath =
  | { readonly kind: "reference"; readonly energyEv: number; readonly lengthNm: number }
  | { readonly kind: "function"; readonly lengthNm: (energyEv: number) => number };

/** What the pair kernel is made of. */
export interface PairTablesInput {
  /** Energies. */
  readonly grid: EnergyGrid;
  /** Density of states at an energy from the Fermi level, any constant factor. */
  readonly states: (energyEv: number) => number;
  /** Depth of the band bottom below the Fermi level, eV, > 0: the electron's speed is that of E + bottom. */
  readonly bandBottomBelowFermiEv: number;
  /** kT, eV, >= 0. */
  readonly thermalEnergyEv: number;
  /** Inelastic mean free path. */
  readonly inelasticMeanFreePath: MeanFreePath;
  /** Transport mean free path of elastic and quasi-elastic events, nm, or null for none. */
  readonly transportMeanFreePathNm: number | null;
}

/** Sampling tables of the pair kernel, all indexed by energy bin or by energy transfer in steps. */
export interface PairTables {
  /** Energies. */
  readonly grid: EnergyGrid;
  /** Inelastic mean free path at the center of each bin, nm, shape (count); Infinity where no event is possible. */
  readonly inelasticMeanFreePathNm: Float64Array;
  /** Mean free path for any event, nm, shape (count). */
  readonly totalMeanFreePathNm: Float64Array;
  /** Probability that an event is inelastic, shape (count). */
  readonly inelasticShare: Float64Array;
  /** Alias rows of the energy loss in steps, one for each bin at or above the vacuum level. */
  readonly lossTable: Uint32Array;
  /** First word of each bin's row, shape (count). */
  readonly lossOffset: Int32Array;
  /** Outcomes in each bin's row, shape (count). */
  readonly lossCount: Int32Array;
  /**
   * Alias rows of the struck electron for each energy transfer: outcome i < length - 1 is bin vacuumBin + i, the last
   * one is an electron that stays below the vacuum level.
   */
  readonly struckTable: Uint32Array;
  /** First word of each transfer's row, shape (count + thermalBins + 1). */
  readonly struckOffset: Int32Array;
  /** Outcomes in each row, 0 where the struck electron cannot come out, same shape. */
  readonly struckCount: Int32Array;
}

/**
 * Electron-electron scattering without momentum conservation, as sampling tables.
 *
 * The rate from E to E' = E - T is `D(E') [1 - f(E')] J(T)`, `J(T) = integral D(e) f(e) D(e + T) [1 - f(e + T)] de`, and
 * the struck electron rises from e to e + T with the weight of J's integrand. The constant in front is fixed by one
 * mean free path, `lambda(E) = v(E) / rate(E)`.
 *
 * Source: E. Kane, Phys. Rev. 159, 624 (1967); C. Berglund, W. Spicer, Phys. Rev. 136, A1030 (1964).
 *
 * @param input Grid, states, temperature and mean free paths.
 * @returns The tables.
 * @throws {RangeError} If a mean free path is not > 0 or its reference energy is outside the grid.
 */
export function pairTables(input: PairTablesInput): PairTables {
  const { grid } = input;
  const { count, vacuumBin, thermalBins } = grid;
  const transfers = count + thermalBins + 1;
  const { filled, empty, zero, pairStrength, rate } = scattering(input);

  const lossOffset = new Int32Array(count);
  const lossCount = new Int32Array(count);
  let lossWords = 0;
  for (let k = 0; k < count; k++) {
    if (k < vacuumBin || rate[k] === 0) continue;
    lossOffset[k] = lossWords;
    lossCount[k] = k + thermalBins + 1;
    lossWords += lossCount[k];
  }
  const lossTable = new Uint32Array(lossWords);
  const weights = new Float64Array(transfers);
  for (let k = vacuumBin; k < count; k++) {
    if (lossCount[k] === 0) continue;
    for (let transfer = 0; transfer < lossCount[k]; transfer++) {
      weights[transfer] = empty[k - transfer + zero] * pairStrength[transfer];
    }
    writeAliasRow(weights.subarray(0, lossCount[k]), lossTable, lossOffset[k]);
  }

  const struckOffset = new Int32Array(transfers);
  const struckCount = new Int32Array(transfers);
  let struckWords = 0;
  for (let transfer = 0; transfer < transfers; transfer++) {
    const highest = Math.min(transfer + thermalBins, count - 1);
    if (highest < vacuumBin || pairStrength[transfer] === 0) continue;
    struckOffset[transfer] = struckWords;
    struckCount[transfer] = highest - vacuumBin + 2;
    struckWords += struckCount[transfer];
  }
  const struckTable = new Uint32Array(struckWords);
  for (let transfer = 0; transfer < transfers; transfer++) {
    const outcomes = struckCount[transfer];
    if (outcomes === 0) continue;
    let above = 0;
    for (let i = 0; i < outcomes - 1; i++) {
      const final = vacuumBin + i + zero;
      weights[i] = filled[final - transfer] * empty[final];
      above += weights[i];
    }
    weights[outcomes - 1] = Math.max(0, pairStrength[transfer] - above);
    writeAliasRow(weights.subarray(0, outcomes), struckTable, struckOffset[transfer]);
  }

  const inelasticMeanFreePathNm = inelasticLengths(input, rate);
  const elasticRate = input.transportMeanFreePathNm === null ? 0 : 1 / input.transportMeanFreePathNm;
  if (!(elasticRate >= 0) || elasticRate === Infinity) {
    throw new RangeError(
      `Cannot build pair tables as transportMeanFreePathNm must be > 0 nm: current value is ${input.transportMeanFreePathNm} nm`,
    );
  }
  return {
    grid,
    inelasticMeanFreePathNm,
    totalMeanFreePathNm: inelasticMeanFreePathNm.map((length) => 1 / (1 / length + elasticRate)),
    inelasticShare: inelasticMeanFreePathNm.map((length) =>
      length === Infinity ? 0 : 1 / length / (1 / length + elasticRate)
    ),
    lossTable,
    lossOffset,
    lossCount,
    struckTable,
    struckOffset,
    struckCount,
  };
}

/** Band filling, J(T) and the total rate (up to a constant) for every bin that the tables or the reference need. */
function scattering(input: PairTablesInput): {
  /** D f, the bin m at index m + zero. */
  filled: Float64Array;
  /** D (1 - f), the bin m at index m + zero. */
  empty: Float64Array;
  zero: number;
  pairStrength: Float64Array;
  rate: Float64Array;
} {
  const { stepEv, thermalBins } = input.grid;
  const count = Math.max(input.grid.count, referenceBin(input) + 1);
  const zero = count + 2 * thermalBins + 1;
  const filled = new Float64Array(zero + count);
  const empty = new Float64Array(zero + count);
  for (let i = 0; i < filled.length; i++) {
    const energyEv = (i - zero + 0.5) * stepEv;
    const density = input.states(energyEv);
    const occupation = fermiOccupation(energyEv, input.thermalEnergyEv);
    filled[i] = density * occupation;
    empty[i] = density * (1 - occupation);
  }
  const pairStrength = new Float64Array(count + thermalBins + 1);
  for (let transfer = 0; transfer < pairStrength.length; transfer++) {
    const highest = Math.min(thermalBins, count - 1 - transfer);
    let sum = 0;
    for (let m = -transfer - thermalBins; m <= highest; m++) {
      sum += filled[m + zero] * empty[m + transfer + zero];
    }
    pairStrength[transfer] = sum;
  }
  const rate = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    for (let transfer = 0; transfer <= k + thermalBins; transfer++) {
      rate[k] += empty[k - transfer + zero] * pairStrength[transfer];
    }
  }
  return { filled, empty, zero, pairStrength, rate };
}

/** Bin of the reference energy of the mean free path, which may lie above the grid; -1 where there is none. */
function referenceBin(input: PairTablesInput): number {
  const path = input.inelasticMeanFreePath;
  return path.kind === "reference" ? Math.floor(path.energyEv / input.grid.stepEv) : -1;
}

function inelasticLengths(input: PairTablesInput, rate: Float64Array): Float64Array {
  const { grid, inelasticMeanFreePath: path } = input;
  const center = (k: number): number => (k + 0.5) * grid.stepEv;
  const speedOverRate = (k: number): number => Math.sqrt(center(k) + input.bandBottomBelowFermiEv) / rate[k];
  const lengths = Float64Array.from({ length: grid.count }, (_, k) => {
    if (rate[k] === 0) return Infinity;
    return path.kind === "function"
      ? path.lengthNm(center(k))
      : path.lengthNm * (speedOverRate(k) / speedOverRate(referenceBin(input)));
  });
  const bad = lengths.findIndex((length) => !(length > 0));
  if (bad >= 0) {
    throw new RangeError(
      `Cannot build pair tables as the inelastic mean free path must be > 0 nm: current value is ${
        lengths[bad]
      } nm at ${center(bad)} eV`,
    );
  }
  return lengths;
}
