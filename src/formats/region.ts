/** One measured or simulated spectrum with what its file says about how it was taken. */
export interface SpectrumRegion {
  /** Block identifier (ISO 14976), `region` (CSV) or title (NeXus); empty when the file gives none. */
  readonly label: string;
  /** Species and transition labels joined by a blank (ISO 14976), or `species` (CSV); empty when not given. */
  readonly species: string;
  /** The kind of the energy axis as the file names it. */
  readonly energyKind: "kinetic" | "binding" | "unknown";
  /** Energies, eV, strictly ascending; a descending file is reversed, which loses nothing. */
  readonly energiesEv: Float64Array;
  /** Counts, same length, finite and >= 0; not always whole numbers. */
  readonly counts: Float64Array;
  /** Photon energy, eV, or `null` when the file does not say (or names a source that is not photons). */
  readonly photonEnergyEv: number | null;
  /** Target bias, V, exactly as written, sign included. */
  readonly biasV: number | null;
  /**
   * `true` when the file says that its energies are as the analyzer records them and that a negative bias accelerates.
   * Our own CSV says so by giving a bias; a file of another format does not, unless it was converted from such a CSV.
   */
  readonly asRecorded: boolean;
  /** Analyzer work function, eV, exactly as written, sign included: real files hold both signs. */
  readonly analyzerWorkFunctionEv: number | null;
  /** Pass energy, eV; `null` when the analyzer ran at a fixed retard ratio. */
  readonly passEnergyEv: number | null;
  /** Collection time per channel and sweep, s. */
  readonly dwellS: number | null;
  /** Number of sweeps added up. */
  readonly sweeps: number | null;
  /** Comment lines in the order of the file. */
  readonly comments: readonly string[];
  /**
   * Everything that the file says beyond the other fields, by readable keys that differ also in lower case; what the
   * file leaves blank or unknown is absent. Keys and values are one line without surrounding blanks.
   */
  readonly metadata: Readonly<Record<string, string>>;
  /**
   * Further numeric columns by name, in the order of `energiesEv`: neither the energies nor the counts. NaN where the
   * file has no number (an empty cell of CSV, 1E37 of ISO 14976).
   */
  readonly columns: Readonly<Record<string, Float64Array>>;
}

/** Most points of a spectrum that are read. */
export const MAX_POINTS = 1_000_000;

/** A spectrum file as read: at least one region. */
export interface SpectrumFile {
  /** The format found by content, not by file name. */
  readonly format: "csv" | "ISO 14976" | "NXmpes";
  /** Regions in the order of the file. */
  readonly regions: readonly SpectrumRegion[];
}

/**
 * Index of the first energy that does not go on in the direction of the first two, or -1 when all do.
 *
 * @param energiesEv Energies, eV, in the order of the file.
 * @returns Index into `energiesEv`, or -1.
 */
export function firstOutOfOrder(energiesEv: ArrayLike<number>): number {
  const direction = Math.sign(energiesEv[1] - energiesEv[0]);
  for (let i = 1; i < energiesEv.length; i++) {
    if (!((energiesEv[i] - energiesEv[i - 1]) * direction > 0)) return i;
  }
  return -1;
}

/** The kind of energy a column or abscissa name speaks of. */
export function energyKindOf(name: string): SpectrumRegion["energyKind"] {
  if (/kinetic/i.test(name)) return "kinetic";
  return /binding/i.test(name) ? "binding" : "unknown";
}

/** The same values in ascending order of the energies. */
export function ascending(values: Float64Array, isDescending: boolean): Float64Array {
  return isDescending ? values.toReversed() : values;
}
