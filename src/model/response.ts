/** How an engine's tally becomes a spectral density at the channels; densities are per photon and eV. */
export interface EngineResponse {
  /** Photons per second that the tally is normalized to. */
  readonly photonsPerS: number;
  /** Density of the part that needs no histories, shape (channels). */
  readonly direct: Float64Array;
  /** Electrons per photon of that part, all energies. */
  readonly directTotal: number;
  /** Density of the contents of a tally, shape (channels). */
  readonly densityOf: (contents: Float64Array) => Float64Array;
  /** Electrons in the contents of a tally, all energies, shape (1). */
  readonly totalOf: (contents: Float64Array) => Float64Array;
}
