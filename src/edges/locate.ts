/** A place where the counts change, found before any fit. */
export interface EdgeCandidate {
  /** Channel at the middle of the change. */
  readonly channel: number;
  /** Energy there, eV. */
  readonly energyEv: number;
  /** Change between the channels on both sides in units of its own counting noise; positive for a rise. */
  readonly significance: number;
}

/** Widths on each side over which counts are added to look for an edge, eV: for sharp edges, and for slow or faint ones. */
export const SHARP_EV = 0.1;
/** See {@link SHARP_EV}. */
export const SLOW_EV = 0.4;

/** An edge must stand this many standard deviations above the noise to be considered. */
const LEAST_SIGNIFICANCE = 6;

/**
 * Local extrema of the change of counts: for each channel the sum of the counts on the right minus that on the left,
 * divided by the square root of both together, its Poisson standard deviation.
 *
 * @param energiesEv Energies, ascending, shape (n).
 * @param counts Counts, shape (n).
 * @param sideEv Width on each side, eV. Default: 0.1 eV.
 * @returns Rises (positive) and falls (negative), ascending in energy.
 */
export function edgeCandidates(
  energiesEv: Float64Array,
  counts: Float64Array,
  sideEv: number = SHARP_EV,
): EdgeCandidate[] {
  const n = counts.length;
  const step = (energiesEv[n - 1] - energiesEv[0]) / (n - 1);
  const side = Math.max(2, Math.min(Math.round(sideEv / step), Math.floor(n / 4)));
  const sums = new Float64Array(n + 1);
  for (let i = 0; i < n; i++) sums[i + 1] = sums[i] + counts[i];
  const change = new Float64Array(n);
  for (let i = side; i + side <= n; i++) {
    const left = sums[i] - sums[i - side];
    const right = sums[i + side] - sums[i];
    change[i] = (right - left) / Math.sqrt(right + left + 1);
  }
  const candidates: EdgeCandidate[] = [];
  for (let i = side; i + side <= n; i++) {
    if (Math.abs(change[i]) < LEAST_SIGNIFICANCE) continue;
    let largest = true;
    for (let j = Math.max(0, i - side); j <= Math.min(n - 1, i + side) && largest; j++) {
      if (Math.sign(change[j]) !== Math.sign(change[i])) continue;
      largest = j < i
        ? Math.abs(change[j]) < Math.abs(change[i])
        : Math.abs(change[j]) <= Math.abs(change[i]);
    }
    if (!largest) continue;
    candidates.push({
      channel: i,
      energyEv: 0.5 * (energiesEv[i - 1] + energiesEv[i]),
      significance: change[i],
    });
  }
  return candidates;
}

/**
 * The secondary cutoff: the lowest rise that is at least half as significant as the strongest one.
 *
 * @param candidates From {@link edgeCandidates}.
 * @returns The candidate, or undefined when nothing rises.
 */
export function cutoffCandidate(candidates: readonly EdgeCandidate[]): EdgeCandidate | undefined {
  const strongest = Math.max(0, ...candidates.map((candidate) => candidate.significance));
  return candidates.find((candidate) =>
    candidate.significance > 0 && candidate.significance >= 0.5 * strongest
  );
}

/**
 * Mean counts in an energy range.
 *
 * @param energiesEv Energies, ascending.
 * @param counts Counts.
 * @param fromEv Lower end, eV.
 * @param toEv Upper end, eV.
 * @returns Mean, or NaN without a channel there.
 */
export function meanCounts(
  energiesEv: Float64Array,
  counts: Float64Array,
  fromEv: number,
  toEv: number,
): number {
  let sum = 0;
  let channels = 0;
  for (let i = 0; i < counts.length; i++) {
    if (energiesEv[i] < fromEv || energiesEv[i] > toEv) continue;
    sum += counts[i];
    channels++;
  }
  return sum / channels;
}
