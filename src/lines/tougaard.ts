import { cannot } from "../base/mod.ts";
import { tougaardCrossSection } from "../losses/mod.ts";

/** Shape of Tougaard's energy-loss cross-section. */
export interface TougaardShape {
  /** C, eV^2, > 0; universal 1643. */
  readonly cEv2: number;
  /** D, eV^2, > 0 and < 4 C; null for the two-parameter form. */
  readonly dEv2: number | null;
  /** No losses below this energy, eV, >= 0. */
  readonly onsetEv: number;
}

/**
 * Tougaard's cross-section as a probability density of the energy loss, normalized in closed form from the onset to
 * infinity (with the published factors B it is not).
 *
 * Source: S. Tougaard, Surf. Interface Anal. 11, 453 (1988) and 25, 137 (1997).
 *
 * @param lossEv Energy loss, eV.
 * @param shape Two or three parameters.
 * @returns Density, 1/eV.
 * @throws {RangeError} If a parameter is out of range.
 * @example The universal form has its maximum at sqrt(C/3)
 * ```ts
 * import { tougaardDensityPerEv } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const density = (lossEv: number) => tougaardDensityPerEv(lossEv, { cEv2: 1643, dEv2: null, onsetEv: 0 });
 * assert.ok(density(23.4) > density(23) && density(23.4) > density(23.8));
 * ```
 */
export function tougaardDensityPerEv(lossEv: number, shape: TougaardShape): number {
  const { cEv2, dEv2, onsetEv } = shape;
  if (!(cEv2 > 0 && onsetEv >= 0 && (dEv2 === null || (dEv2 > 0 && dEv2 < 4 * cEv2)))) {
    throw new RangeError(
      cannot(
        "use Tougaard's cross-section",
        "cEv2 must be > 0, dEv2 in 0..4 cEv2 and onsetEv >= 0",
        `${cEv2}, ${dEv2}, ${onsetEv}`,
      ),
    );
  }
  if (!(lossEv > onsetEv)) return 0;
  return tougaardCrossSection(1, cEv2, dEv2, lossEv) / integral(shape);
}

/** Integral of T/(C + T^2)^2, or of T/((C - T^2)^2 + D T^2), from the onset to infinity. */
function integral({ cEv2, dEv2, onsetEv }: TougaardShape): number {
  const square = onsetEv * onsetEv;
  if (dEv2 === null) return 1 / (2 * (cEv2 + square));
  const s = Math.sqrt(cEv2 * cEv2 - (cEv2 - dEv2 / 2) ** 2);
  return (Math.PI / 2 - Math.atan((square - cEv2 + dEv2 / 2) / s)) / (2 * s);
}

/**
 * Tougaard's background: electrons that lost energy once more than those above them,
 * `scale times the integral of K(E' - E) J(E')` over the energies above.
 *
 * For looking and comparing; in fits the background is part of the model.
 *
 * Source: S. Tougaard, Surf. Interface Anal. 11, 453 (1988).
 *
 * @param kineticEnergiesEv Kinetic energies, eV, ascending, shape (n).
 * @param counts Counts above the level of the upper end, shape (n).
 * @param shape The cross-section.
 * @param scale Inelastic events per electron that leaves; 1 for emission from deep in a homogeneous solid.
 * @returns Background, shape (n).
 * @throws {RangeError} If a parameter is out of range.
 */
export function tougaardBackground(
  kineticEnergiesEv: ArrayLike<number>,
  counts: ArrayLike<number>,
  shape: TougaardShape,
  scale: number,
): Float64Array {
  const kernel = lossKernel(kineticEnergiesEv, shape);
  return Float64Array.from(counts, (_, i) => scale * lossesInto(i, counts, kernel));
}

/** Density of the loss from channel j to channel i times the width of j: rows i, columns j > i. */
export function lossKernel(energiesEv: ArrayLike<number>, shape: TougaardShape): Float64Array[] {
  const n = energiesEv.length;
  return Array.from(energiesEv, (energy, i) => {
    const row = new Float64Array(n - i);
    for (let j = i + 1; j < n; j++) {
      const width = 0.5 * ((energiesEv[j + 1] ?? energiesEv[j]) - energiesEv[j - 1]);
      row[j - i] = width * tougaardDensityPerEv(energiesEv[j] - energy, shape);
    }
    return row;
  });
}

/** Electrons that arrive in channel i by one loss. */
export function lossesInto(i: number, counts: ArrayLike<number>, kernel: readonly Float64Array[]): number {
  const row = kernel[i];
  let sum = 0;
  for (let k = 1; k < row.length; k++) sum += row[k] * counts[i + k];
  return sum;
}
