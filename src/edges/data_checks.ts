/** Something wrong with single channels of a region. */
export interface BadChannels {
  /** Channels with far fewer counts than both neighbors, such as a lost reading. */
  readonly dropouts: readonly number[];
  /** Channels with far more counts than both neighbors, such as a discharge. */
  readonly spikes: readonly number[];
  /** First and last channel of the longest row of equal counts at the very top, or null when it is short. */
  readonly flatTop: readonly [number, number] | null;
}

/**
 * A channel must leave the range of its four neighbors by this many standard deviations: by chance less than once in
 * 10^7 channels, since a normal deviation of 5.2 has probability 10^-7 (normal table) and the neighbors scatter too.
 */
const LONE_DEVIATIONS = 7;
/** And by this factor, so that the top of a steep peak measured in coarse steps is none. */
const LONE_FACTOR = 1.5;
/** So many equal counts in a row at the top do not happen by chance where counts scatter by 10 or more. */
const FLAT_TOP_CHANNELS = 4;
const FLAT_TOP_COUNTS = 100;

/**
 * Looks for channels that cannot be counting statistics: dropouts, spikes, and a clipped top.
 *
 * @param counts Counts, shape (n).
 * @returns What was found.
 */
export function badChannels(counts: Float64Array): BadChannels {
  const dropouts: number[] = [];
  const spikes: number[] = [];
  for (let i = 2; i + 2 < counts.length; i++) {
    const beside = [counts[i - 2], counts[i - 1], counts[i + 1], counts[i + 2]];
    const low = Math.min(...beside);
    const high = Math.max(...beside);
    const isFarBelow = low - counts[i] > LONE_DEVIATIONS * Math.sqrt(low);
    const isFarAbove = counts[i] - high > LONE_DEVIATIONS * Math.sqrt(high + 1) + 3;
    if (isFarBelow && LONE_FACTOR * counts[i] < low) dropouts.push(i);
    if (isFarAbove && counts[i] > LONE_FACTOR * high) spikes.push(i);
  }
  const top = counts.reduce((a, b) => Math.max(a, b), 0);
  let flatTop: [number, number] | null = null;
  for (let i = 0; i < counts.length && top >= FLAT_TOP_COUNTS; i++) {
    if (counts[i] !== top) continue;
    const from = i;
    while (counts[i + 1] === top) i++;
    const isLongest = flatTop === null || i - from > flatTop[1] - flatTop[0];
    if (i - from + 1 >= FLAT_TOP_CHANNELS && isLongest) flatTop = [from, i];
  }
  return { dropouts, spikes, flatTop };
}

/**
 * Counts with dropouts and spikes replaced by the mean of their neighbors.
 *
 * @param counts Counts.
 * @param bad From {@link badChannels}.
 * @returns The same array when nothing is bad.
 */
export function withoutBadChannels(counts: Float64Array, bad: BadChannels): Float64Array {
  const lone = [...bad.dropouts, ...bad.spikes];
  if (lone.length === 0) return counts;
  const clean = counts.slice();
  for (const i of lone) clean[i] = 0.5 * (counts[i - 1] + counts[i + 1]);
  return clean;
}

/**
 * Counts that a counter without dead time would have given: `n = m / (1 - m tau)` (non-paralyzable).
 *
 * Their variance is above n by about the share that was lost, which is left out.
 *
 * Source: G. Knoll, Radiation Detection and Measurement, ch. 4 (cited from memory).
 *
 * @param counts Counts, shape (n).
 * @param deadTimeS Dead time, s, >= 0.
 * @param countingTimeS Time a channel was counted, s, > 0.
 * @returns Corrected counts and the largest share lost; the counts as they are where more than half was lost.
 */
export function deadTimeCorrected(
  counts: Float64Array,
  deadTimeS: number,
  countingTimeS: number,
): { counts: Float64Array; deadShare: number } {
  const perCount = deadTimeS / countingTimeS;
  const deadShare = perCount * counts.reduce((a, b) => Math.max(a, b), 0);
  return {
    counts: deadShare > 0.5 ? counts : counts.map((count) => count / (1 - count * perCount)),
    deadShare,
  };
}
