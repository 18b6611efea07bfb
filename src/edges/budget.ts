import type { Estimate } from "../base/mod.ts";
import { coverageFactor } from "../fit/mod.ts";

/** The results of a fit that have an uncertainty. */
export type Quantity =
  | "workFunctionEv"
  | "cutoffEv"
  | "fermiEdgeEv"
  | "maxKineticEnergyEv"
  | "ionizationEnergyEv"
  | "valenceBandMaximumEv"
  | "valenceBandMaximumLogarithmicEv";

/** One line of the uncertainty budget (JCGM 100, ch. 4 and 5). */
export interface BudgetTerm {
  /** What it is. */
  readonly name: string;
  /** Standard uncertainty, eV; 0 where it cancels. */
  readonly standardUncertaintyEv: number;
  /** Sensitivity of each result it enters: by how many eV that changes when the term changes by 1 eV. */
  readonly sensitivities: Readonly<Partial<Record<Quantity, number>>>;
  /** Degrees of freedom of the uncertainty itself; Infinity (null in JSON) where it is taken as known. */
  readonly degreesOfFreedom: number;
  /** How it was found: A by statistics, B otherwise (JCGM 100, 3.3.4). */
  readonly evaluation: "A" | "B";
  /** Where it comes from. */
  readonly note: string;
}

/** A combined uncertainty spread to an interval. */
export interface ExpandedUncertainty {
  /** Twice the combined standard uncertainty, eV. */
  readonly expandedEv: number;
  /** Coverage factor, always 2. */
  readonly coverageFactor: 2;
  /** Welch-Satterthwaite degrees of freedom; Infinity (null in JSON) where no term has few. */
  readonly effectiveDegreesOfFreedom: number;
  /** Coverage factor that 95.45 % needs with so many degrees of freedom (Student); 2 for many. */
  readonly coverageFactorFor95: number;
}

/**
 * Combined standard uncertainty of independent terms (JCGM 100, eq. 10).
 *
 * @param budget The terms.
 * @param quantity Which result.
 * @returns Standard uncertainty, eV.
 */
export function combinedUncertaintyEv(budget: readonly BudgetTerm[], quantity: Quantity): number {
  return Math.sqrt(combinedCovariance(budget, quantity, quantity));
}

/** Covariance of two results: the terms they share, with their signs (JCGM 100, eq. F.2). */
function combinedCovariance(budget: readonly BudgetTerm[], a: Quantity, b: Quantity): number {
  return budget.reduce(
    (sum, { sensitivities, standardUncertaintyEv }) =>
      sum + (sensitivities[a] ?? 0) * (sensitivities[b] ?? 0) * standardUncertaintyEv ** 2,
    0,
  );
}

/**
 * Correlation of two results through the terms they share.
 *
 * @param budget The terms.
 * @param a One result.
 * @param b Another.
 * @returns Coefficient, -1..1; 0 where one has no uncertainty.
 */
export function budgetCorrelation(budget: readonly BudgetTerm[], a: Quantity, b: Quantity): number {
  const product = combinedUncertaintyEv(budget, a) * combinedUncertaintyEv(budget, b);
  return product > 0 ? combinedCovariance(budget, a, b) / product : 0;
}

/**
 * Expanded uncertainty with k = 2, and what k would have to be where degrees of freedom are few.
 *
 * Source: JCGM 100:2008, 6.2 and G.4.1, eq. G.2b (Welch-Satterthwaite; truncated to a whole number for Student's factor).
 *
 * @param budget The terms.
 * @param quantity Which result.
 * @returns Expanded uncertainty.
 * @example Two equal terms, one with 4 degrees of freedom: u^4 / (u1^4 / 4) = 16
 * ```ts
 * import { expandedUncertainty } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const term = (degreesOfFreedom: number) => ({
 *   name: "", standardUncertaintyEv: 1, sensitivities: { cutoffEv: 1 }, degreesOfFreedom, evaluation: "A", note: "",
 * } as const);
 * const { effectiveDegreesOfFreedom } = expandedUncertainty([term(4), term(Infinity)], "cutoffEv");
 * assert.equal(effectiveDegreesOfFreedom.toFixed(9), "16.000000000");
 * ```
 */
export function expandedUncertainty(budget: readonly BudgetTerm[], quantity: Quantity): ExpandedUncertainty {
  const combined = combinedUncertaintyEv(budget, quantity);
  const spread = budget.reduce(
    (sum, { sensitivities, standardUncertaintyEv, degreesOfFreedom }) =>
      sum + ((sensitivities[quantity] ?? 0) * standardUncertaintyEv) ** 4 / degreesOfFreedom,
    0,
  );
  const effectiveDegreesOfFreedom = spread > 0 ? combined ** 4 / spread : Infinity;
  return {
    expandedEv: 2 * combined,
    coverageFactor: 2,
    effectiveDegreesOfFreedom,
    coverageFactorFor95: coverageFactor(Math.max(1, Math.floor(effectiveDegreesOfFreedom))),
  };
}

/**
 * A value with its combined uncertainty.
 *
 * @param budget The terms.
 * @param quantity Which result.
 * @param value Its value, eV.
 * @returns Value and combined standard uncertainty.
 */
export function combined(budget: readonly BudgetTerm[], quantity: Quantity, value: number): Estimate {
  return { value, standardUncertainty: combinedUncertaintyEv(budget, quantity) };
}
