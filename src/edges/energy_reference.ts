/** Where the Fermi level lies on the energy axis, and how that is known. */
export interface EnergyReference {
  /** Position of the Fermi level on the (ascending kinetic) axis, eV. */
  readonly fermiLevelEv: number;
  /** How far off a measured Fermi edge may be and still be taken for it, eV. */
  readonly toleranceEv: number;
  /** `true` when the position is good enough to reference a valence band to; `false` for a search range only. */
  readonly usable: boolean;
  /** In words, for the record. */
  readonly how: string;
}

/** What is known about the axis. */
export interface AxisKnowledge {
  /** Photon energy, eV. */
  readonly photonEnergyEv: number;
  /** `true` for a binding-energy axis, which was turned into `h nu - E_B`. */
  readonly fromBinding: boolean;
  /** Given by the user. */
  readonly fermiLevelEv: number | null;
  /** Bias, V. */
  readonly biasV: number | null;
  /** `true` when the bias has our sign (negative accelerates) and the axis is as recorded. */
  readonly asRecorded: boolean;
  /** Analyzer work function, eV, sign ignored. */
  readonly analyzerWorkFunctionEv: number | null;
}

/** An analyzer work function is hardly ever outside 4.5 +- 1 eV (common practice): enough to look for an edge. */
const TYPICAL_ANALYZER_EV = 4.5;
const SEARCH_EV = 1.2;
const KNOWN_EV = 0.4;
/** Work functions that any surface may have, eV. */
const LEAST_WORK_FUNCTION_EV = 1.2;
const MOST_WORK_FUNCTION_EV = 9;

/**
 * All readings of the axis that the facts allow, best known first.
 *
 * A data file may hold energies as recorded (Fermi level at `h nu - W_A - e U`), with the bias taken off
 * (`h nu - W_A`), or with both taken off (`h nu`), and often does not say which. A reading is dropped when it would
 * give a work function outside 1.2..9 eV or electrons from above the Fermi level.
 *
 * @param axis What is known.
 * @param cutoffEv Position of the secondary cutoff on the axis, eV.
 * @param onsetEv Highest position at which electrons of the main line set in, eV, or null if unknown.
 * @returns Possible references; several mean that the file does not settle it.
 */
export function energyReferences(
  axis: AxisKnowledge,
  cutoffEv: number,
  onsetEv: number | null,
): EnergyReference[] {
  const { photonEnergyEv } = axis;
  const workFunction = axis.analyzerWorkFunctionEv === null ? null : Math.abs(axis.analyzerWorkFunctionEv);
  if (axis.fermiLevelEv !== null) {
    return [{
      fermiLevelEv: axis.fermiLevelEv,
      toleranceEv: KNOWN_EV,
      usable: true,
      how: "given by the user",
    }];
  }
  if (axis.fromBinding) {
    return [{
      fermiLevelEv: photonEnergyEv,
      toleranceEv: KNOWN_EV,
      usable: true,
      how: "binding-energy axis: the Fermi level is its zero",
    }];
  }
  if (axis.asRecorded && axis.biasV !== null) {
    return [{
      fermiLevelEv: photonEnergyEv - (workFunction ?? TYPICAL_ANALYZER_EV) - axis.biasV,
      toleranceEv: workFunction === null ? SEARCH_EV : KNOWN_EV,
      usable: workFunction !== null,
      how: `kinetic energies as recorded: photon energy - analyzer work function (${
        workFunction === null ? `not known, ${TYPICAL_ANALYZER_EV} eV for the search` : `${workFunction} eV`
      }) - bias (${axis.biasV} V)`,
    }];
  }
  const readings: EnergyReference[] = [{
    fermiLevelEv: photonEnergyEv,
    toleranceEv: KNOWN_EV,
    usable: true,
    how:
      "kinetic energies with bias and analyzer work function taken off: the Fermi level is at the photon energy",
  }];
  if (workFunction !== null) {
    readings.push({
      fermiLevelEv: photonEnergyEv - workFunction,
      toleranceEv: KNOWN_EV,
      usable: true,
      how: `kinetic energies with the bias taken off, analyzer work function ${workFunction} eV not`,
    });
    if (axis.biasV !== null && axis.biasV !== 0) {
      readings.push({
        fermiLevelEv: photonEnergyEv - workFunction + Math.abs(axis.biasV),
        toleranceEv: KNOWN_EV,
        usable: true,
        how: `kinetic energies as recorded at ${
          Math.abs(axis.biasV)
        } V accelerating bias, analyzer work function ${workFunction} eV`,
      });
    }
  }
  return readings.filter((reading) => {
    const implied = photonEnergyEv - (reading.fermiLevelEv - cutoffEv);
    const possible = implied >= LEAST_WORK_FUNCTION_EV && implied <= MOST_WORK_FUNCTION_EV;
    return possible && (onsetEv === null || onsetEv <= reading.fermiLevelEv + KNOWN_EV);
  });
}
