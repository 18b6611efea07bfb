/** One photon energy of a light source: a line with its widths, or a point of a continuous spectrum (widths 0). */
export interface LightPoint {
  /** Name of the line, or of the source for a point of a continuous spectrum. */
  readonly name: string;
  /** Photon energy, eV. */
  readonly energyEv: number;
  /** Share of the photons of the source, 0..1; all shares add to 1. */
  readonly weight: number;
  /** Natural full width at half maximum (Lorentzian), eV. */
  readonly lorentzFwhmEv: number;
  /** Full width at half maximum of a Gaussian band, eV. */
  readonly gaussFwhmEv: number;
}

/** Makes the weights add to 1. */
export function normalized(points: readonly LightPoint[]): readonly LightPoint[] {
  const total = points.reduce((sum, point) => sum + point.weight, 0);
  return points.map((point) => ({ ...point, weight: point.weight / total }));
}

/**
 * Mean photon energy.
 *
 * @param points Points of a source, weights adding to 1.
 * @returns Mean, eV.
 */
export function meanPhotonEnergyEv(points: readonly LightPoint[]): number {
  return points.reduce((sum, point) => sum + point.weight * point.energyEv, 0);
}

/**
 * Photon energy of the strongest point.
 *
 * @param points Points of a source, at least one.
 * @returns Energy, eV.
 */
export function mainPhotonEnergyEv(points: readonly LightPoint[]): number {
  return points.reduce((best, point) => (point.weight > best.weight ? point : best)).energyEv;
}
