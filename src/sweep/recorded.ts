/** Values of `result.json` that a sweep can keep, by their path there; each ends in its unit where it has one. */
export const SIMULATED_VALUES = [
  "truth.workFunctionEv",
  "truth.maxKineticEnergyEv",
  "truth.cutoffEv",
  "truth.fermiEdgeEv",
  "electronsPerPhoton.forced",
  "electronsPerPhoton.analogue",
  "electronsPerPhoton.analogueStandardError",
  "peakCounts",
  "worstRelativeStandardError",
] as const;

/** Quantities of a fit of the counts that a sweep can keep, each with its standard uncertainty. */
export const FITTED_QUANTITIES = [
  "workFunctionEv",
  "cutoffEv",
  "fermiEdgeEv",
  "maxKineticEnergyEv",
  "ionizationEnergyEv",
  "valenceBandMaximumEv",
] as const;

/** Name of a value of a point that can be recorded. */
export type RecordedName = typeof SIMULATED_VALUES[number] | `fit.${typeof FITTED_QUANTITIES[number]}`;

/** All names that can be recorded. */
export const RECORDED_NAMES: readonly RecordedName[] = [
  ...SIMULATED_VALUES,
  ...FITTED_QUANTITIES.map((quantity) => `fit.${quantity}` as const),
];

/**
 * Name of the standard uncertainty that goes with a recorded value.
 *
 * @param name A recorded name.
 * @returns Such as `fit.workFunctionStandardUncertaintyEv`; null for values that have none.
 */
export function uncertaintyName(name: RecordedName): string | null {
  return name.startsWith("fit.") ? name.replace(/Ev$/, "StandardUncertaintyEv") : null;
}
