import { cannot } from "../base/mod.ts";

const MOST_ROUNDS = 100;

/**
 * Shirley's background: at each energy proportional to the area of the line above it in kinetic energy, found by
 * iteration, from the level at the upper end of the window to that at its lower end.
 *
 * For looking and comparing: it takes the levels at the ends as exact. In fits the background is part of the model.
 *
 * Source: D. A. Shirley, Phys. Rev. B 5, 4709 (1972); iterated as A. Proctor, P. Sherwood, Anal. Chem. 54, 13 (1982)
 * (from memory).
 *
 * @param kineticEnergiesEv Kinetic energies, eV, ascending, shape (n), n >= 3.
 * @param counts Counts, shape (n).
 * @param endChannels Channels averaged for the level at each end, 1..n/2.
 * @returns Background, shape (n).
 * @throws {RangeError} If there are too few channels or the iteration does not settle, as where there is no line.
 */
export function shirleyBackground(
  kineticEnergiesEv: ArrayLike<number>,
  counts: ArrayLike<number>,
  endChannels: number,
): Float64Array {
  const n = counts.length;
  if (!(n >= 3 && Number.isInteger(endChannels) && endChannels >= 1 && endChannels <= n / 2)) {
    throw new RangeError(
      cannot("compute a Shirley background", `endChannels must be in 1..${Math.floor(n / 2)}`, endChannels),
    );
  }
  const data = Float64Array.from(counts);
  const level = (part: Float64Array): number => part.reduce((a, b) => a + b, 0) / part.length;
  const upper = level(data.slice(n - endChannels));
  const rise = level(data.slice(0, endChannels)) - upper;
  let background = new Float64Array(n).fill(upper);
  for (let round = 0; round < MOST_ROUNDS; round++) {
    const above = areaAbove(kineticEnergiesEv, data.map((value, i) => value - background[i]));
    const next = above.map((area) => upper + (rise * area) / above[0]);
    const change = next.reduce((most, value, i) => Math.max(most, Math.abs(value - background[i])), 0);
    background = next;
    if (change <= 1e-10 * Math.abs(rise)) return background;
  }
  throw new RangeError(
    cannot("compute a Shirley background", "the iteration must settle, which needs a line", "no line"),
  );
}

/**
 * Area of a curve above each energy, by trapezoids.
 *
 * @param energiesEv Energies, ascending, shape (n).
 * @param curve Ordinates, shape (n).
 * @returns Areas, shape (n); the last is 0.
 */
export function areaAbove(energiesEv: ArrayLike<number>, curve: Float64Array): Float64Array {
  const area = new Float64Array(curve.length);
  for (let i = curve.length - 2; i >= 0; i--) {
    area[i] = area[i + 1] + 0.5 * (curve[i] + curve[i + 1]) * (energiesEv[i + 1] - energiesEv[i]);
  }
  return area;
}
