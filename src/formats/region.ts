/** One measured or simulated spectrum with what its file says about how it was taken. */
export interface SpectrumRegion {
  /** Block identifier (ISO 14976) or the metadata value `region` (CSV); empty when the file gives none. */
  readonly label: string;
  /** Species and transition labels joined by a blank (ISO 14976); empty for CSV. */
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
  /** Everything else the file says, by readable keys; items the file leaves blank or unknown are absent. */
  readonly metadata: Readonly<Record<string, string>>;
  /**
   * Numeric columns by name, in the order of `energiesEv`: for CSV all of them, for ISO 14976 the corresponding
   * variables. An unknown number of ISO 14976 (1E37) is NaN here.
   */
  readonly columns: Readonly<Record<string, Float64Array>>;
}

/** A spectrum file as read: at least one region. */
export interface SpectrumFile {
  /** The format found by content, not by file name. */
  readonly format: "csv" | "ISO 14976";
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
