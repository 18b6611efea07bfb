import { cannot } from "../base/mod.ts";
import { gaussLegendre, interpolateLinear } from "../math/mod.ts";
import { writeAliasRow } from "../rng/mod.ts";
import { type LossOscillator, oscillatorInverseMeanFreePath } from "./oscillators.ts";

/** Which formula or table gives the shape of the energy losses. */
export type LossModel =
  | {
    /** Tougaard's cross-section. */
    readonly kind: "tougaard";
    /** B, eV^2, > 0. */
    readonly bEv2: number;
    /** C, eV^2, > 0. */
    readonly cEv2: number;
    /** D, eV^2, > 0; null for the two-parameter form. */
    readonly dEv2: number | null;
    /** No losses below this energy, eV, >= 0. */
    readonly onsetEv: number;
  }
  | {
    /** Drude-Lindhard oscillators. */
    readonly kind: "oscillators";
    /** The oscillators, at least one. */
    readonly terms: readonly LossOscillator[];
    /** Dispersion as in {@link oscillatorInverseMeanFreePath}, 0..1. */
    readonly dispersion: number;
    /** No losses below this energy, eV, >= 0. */
    readonly onsetEv: number;
  }
  | {
    /** A table of the user, linear between its nodes and zero outside. */
    readonly kind: "table";
    /** Losses, eV, ascending, >= 0, shape (n). */
    readonly lossesEv: readonly number[];
    /** Relative probability density, >= 0, not all zero, shape (n). */
    readonly densities: readonly number[];
  };

/** A normalized distribution of single losses in equal bins. */
export interface LossDistribution {
  /** Width of a bin, eV; bin i covers `i stepEv..(i + 1) stepEv`. */
  readonly stepEv: number;
  /** Probability of each bin, sum 1, shape (n). */
  readonly probabilities: Float64Array;
  /** Probability of a loss below each edge, from 0 to 1, shape (n + 1). */
  readonly cumulative: Float64Array;
  /** Mean loss, eV. */
  readonly meanLossEv: number;
  /**
   * Integral before normalization: dimensionless (ideally 1) for Tougaard's forms, 1/nm (the inverse mean free path) for
   * oscillators, that of the table for a table.
   */
  readonly integralBefore: number;
}

/**
 * Tougaard's inelastic cross-section lambda K(T): `B T/(C + T^2)^2`, or `B T/((C - T^2)^2 + D T^2)` with three parameters.
 *
 * Sources: S. Tougaard, Surf. Interface Anal. 11, 453 (1988) (two parameters, universal 2866 and 1643 eV^2); 25, 137
 * (1997) (three).
 *
 * @param bEv2 B, eV^2.
 * @param cEv2 C, eV^2, > 0.
 * @param dEv2 D, eV^2, or null for two parameters.
 * @param lossEv Energy loss T, eV; zero or more.
 * @returns lambda K, 1/eV.
 */
export function tougaardCrossSection(
  bEv2: number,
  cEv2: number,
  dEv2: number | null,
  lossEv: number,
): number {
  const square = lossEv * lossEv;
  return dEv2 === null
    ? (bEv2 * lossEv) / (cEv2 + square) ** 2
    : (bEv2 * lossEv) / ((cEv2 - square) ** 2 + dEv2 * square);
}

const NODES = gaussLegendre(8);
const MOST_BINS = 65534;

/** Checks the model; gives its density, the losses between which it is not zero, and the width of its narrowest peak. */
function densityOf(model: LossModel, primaryEnergyEv: number): {
  density: (lossEv: number) => number;
  fromEv: number;
  toEv: number;
  narrowestEv: number;
} {
  const demand = (holds: boolean, rule: string, value: unknown): void => {
    if (!holds) throw new RangeError(cannot("use energy losses", rule, value));
  };
  if (model.kind === "table") {
    const { lossesEv, densities } = model;
    demand(
      lossesEv.length >= 2 && lossesEv.length === densities.length,
      "the table must have at least 2 rows of loss and density",
      `${lossesEv.length} losses, ${densities.length} densities`,
    );
    lossesEv.forEach((loss, i) =>
      demand(
        (i === 0 ? loss >= 0 : loss > lossesEv[i - 1]) && Number.isFinite(loss),
        "losses must be >= 0 eV and ascend",
        `${loss} eV in row ${i + 1}`,
      )
    );
    densities.forEach((y, i) =>
      demand(y >= 0 && Number.isFinite(y), "densities must be >= 0", `${y} in row ${i + 1}`)
    );
    return {
      density: (loss) => interpolateLinear(lossesEv, densities, loss),
      fromEv: lossesEv[0],
      toEv: lossesEv[lossesEv.length - 1],
      narrowestEv: Infinity,
    };
  }
  demand(model.onsetEv >= 0, "onsetEv must be >= 0 eV", `${model.onsetEv} eV`);
  if (model.kind === "tougaard") {
    const { bEv2, cEv2, dEv2 } = model;
    for (const [name, value] of [["bEv2", bEv2], ["cEv2", cEv2], ["dEv2", dEv2 ?? 1]] as const) {
      demand(value > 0 && Number.isFinite(value), `${name} must be > 0 eV^2`, `${value} eV^2`);
    }
    return {
      density: (loss) => tougaardCrossSection(bEv2, cEv2, dEv2, loss),
      fromEv: model.onsetEv,
      toEv: Infinity,
      narrowestEv: Math.sqrt(dEv2 ?? cEv2),
    };
  }
  const { terms, dispersion } = model;
  demand(terms.length > 0, "there must be at least one oscillator", terms.length);
  demand(dispersion >= 0 && dispersion <= 1, "dispersion must be in 0..1", dispersion);
  for (const term of terms) {
    for (const [name, value] of Object.entries(term)) {
      demand(value > 0 && Number.isFinite(value), `${name} of an oscillator must be > 0`, value);
    }
  }
  return {
    density: (loss) => oscillatorInverseMeanFreePath(terms, dispersion, primaryEnergyEv, loss),
    fromEv: model.onsetEv,
    toEv: primaryEnergyEv,
    narrowestEv: Math.min(...terms.map((term) => term.fwhmEv)),
  };
}

/**
 * The distribution of a single loss, normalized by numerical integration between the onset and the largest loss.
 *
 * Tougaard's forms integrate to 0.77..1.10 with the published B, so they are never taken as a probability as they are.
 *
 * @param model Formula or table.
 * @param options Energy of the electron from the band bottom (only oscillators depend on it), eV; largest loss counted,
 * eV, at most that energy; width of a bin, eV.
 * @returns The distribution.
 * @throws {RangeError} If a number is impossible or no loss remains between onset and largest loss.
 * @example Half of the losses of the universal cross-section are below sqrt(C), about 40.5 eV
 * ```ts
 * import { lossDistribution, lossQuantileEv } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const losses = lossDistribution({ kind: "tougaard", bEv2: 2866, cEv2: 1643, dEv2: null, onsetEv: 0 },
 *   { primaryEnergyEv: 1e5, maxLossEv: 5000, stepEv: 0.5 });
 * assert.equal(lossQuantileEv(losses, 0.5).toFixed(0), "41");
 * ```
 */
export function lossDistribution(model: LossModel, options: {
  readonly primaryEnergyEv: number;
  readonly maxLossEv: number;
  readonly stepEv: number;
}): LossDistribution {
  const { primaryEnergyEv, maxLossEv, stepEv } = options;
  if (!(maxLossEv > 0 && maxLossEv <= primaryEnergyEv && Number.isFinite(maxLossEv))) {
    throw new RangeError(
      cannot("use energy losses", `maxLossEv must be > 0 and <= ${primaryEnergyEv} eV`, `${maxLossEv} eV`),
    );
  }
  const bins = Math.ceil(maxLossEv / stepEv - 1e-9);
  if (!(stepEv > 0 && bins <= MOST_BINS)) {
    throw new RangeError(
      cannot("use energy losses", `stepEv must be > 0 and make at most ${MOST_BINS} bins`, `${stepEv} eV`),
    );
  }
  const { density, fromEv, toEv, narrowestEv } = densityOf(model, primaryEnergyEv);
  if (stepEv > 2 * narrowestEv) {
    throw new RangeError(
      cannot(
        "use energy losses",
        `stepEv must be <= ${(2 * narrowestEv).toPrecision(3)} eV for the narrowest peak`,
        `${stepEv} eV`,
      ),
    );
  }
  const lastEv = Math.min(toEv, maxLossEv);
  // Kinks of a table, onset and end: the rule is applied between them, so that it stays exact to rounding.
  const kinks = model.kind === "table" ? model.lossesEv : [fromEv];
  const probabilities = new Float64Array(bins);
  let total = 0;
  let moment = 0;
  let kink = 0;
  for (let bin = 0; bin < bins; bin++) {
    const bottom = Math.max(fromEv, bin * stepEv);
    const top = Math.min(lastEv, (bin + 1) * stepEv);
    for (let low = bottom; low < top;) {
      while (kink < kinks.length && kinks[kink] <= low) kink++;
      const high = kink < kinks.length ? Math.min(top, kinks[kink]) : top;
      const half = 0.5 * (high - low);
      for (let n = 0; n < NODES.nodes.length; n++) {
        const loss = low + half * (1 + NODES.nodes[n]);
        const share = half * NODES.weights[n] * density(loss);
        probabilities[bin] += share;
        moment += share * loss;
      }
      low = high;
    }
    total += probabilities[bin];
  }
  if (!(total > 0)) {
    throw new RangeError(
      cannot(
        "use energy losses",
        `some loss must be possible in ${fromEv}..${lastEv} eV`,
        `integral ${total}`,
      ),
    );
  }
  const cumulative = new Float64Array(bins + 1);
  for (let bin = 0; bin < bins; bin++) {
    probabilities[bin] /= total;
    cumulative[bin + 1] = cumulative[bin] + probabilities[bin];
  }
  cumulative.fill(1, bins);
  return { stepEv, probabilities, cumulative, meanLossEv: moment / total, integralBefore: total };
}

/**
 * The loss below which a given share of the losses lies; with a uniform random share it draws a loss.
 *
 * @param distribution The distribution.
 * @param share Share of the losses, 0..1.
 * @returns Loss, eV, linear inside a bin.
 */
export function lossQuantileEv(distribution: LossDistribution, share: number): number {
  const { cumulative, stepEv } = distribution;
  let low = 0;
  let high = cumulative.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (cumulative[middle] <= share) low = middle;
    else high = middle;
  }
  const width = cumulative[high] - cumulative[low];
  return stepEv * (low + (width > 0 ? (share - cumulative[low]) / width : 0));
}

/**
 * An alias row that draws a bin of the distribution with one random number: `sampleAlias(row, 0, row.length, generator)`.
 *
 * @param distribution The distribution.
 * @returns The row, shape (n).
 */
export function lossAlias(distribution: LossDistribution): Uint32Array {
  const row = new Uint32Array(distribution.probabilities.length);
  writeAliasRow(distribution.probabilities, row, 0);
  return row;
}
