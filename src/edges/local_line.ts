/** A straight line through the counts about a channel. */
export interface LocalLine {
  /** Slope, counts per eV. */
  readonly slope: number;
  /** Standard error of the slope for Poisson counts. */
  readonly slopeError: number;
  /** Height of the line at the channel, counts. */
  readonly height: number;
  /** Standard error of the height for Poisson counts. */
  readonly heightError: number;
}

/**
 * Straight line through the counts within a distance of a channel, by ordinary least squares.
 *
 * @param energiesEv Energies, ascending, eV.
 * @param counts Counts.
 * @param channel Channel in the middle.
 * @param halfEv Distance on each side, eV; at least the two neighbors are taken where there are any.
 * @returns The line; slope 0 where there is a single channel.
 */
export function localLine(
  energiesEv: Float64Array,
  counts: Float64Array,
  channel: number,
  halfEv: number,
): LocalLine {
  const center = energiesEv[channel];
  let from = channel;
  while (from > 0 && (from === channel || center - energiesEv[from - 1] <= halfEv)) from--;
  let to = channel;
  while (to < counts.length - 1 && (to === channel || energiesEv[to + 1] - center <= halfEv)) to++;
  let n = 0, sumX = 0, sumY = 0, sumXX = 0, sumXY = 0;
  for (let i = from; i <= to; i++) {
    const x = energiesEv[i] - center;
    n++;
    sumX += x;
    sumY += counts[i];
    sumXX += x * x;
    sumXY += x * counts[i];
  }
  const denominator = n * sumXX - sumX * sumX;
  if (!(denominator > 0)) {
    return {
      slope: 0,
      slopeError: Infinity,
      height: counts[channel],
      heightError: Math.sqrt(counts[channel]),
    };
  }
  let slopeVariance = 0, heightVariance = 0;
  for (let i = from; i <= to; i++) {
    const x = energiesEv[i] - center;
    slopeVariance += ((n * x - sumX) / denominator) ** 2 * Math.max(1, counts[i]);
    heightVariance += ((sumXX - sumX * x) / denominator) ** 2 * Math.max(1, counts[i]);
  }
  return {
    slope: (n * sumXY - sumX * sumY) / denominator,
    slopeError: Math.sqrt(slopeVariance),
    height: (sumXX * sumY - sumX * sumXY) / denominator,
    heightError: Math.sqrt(heightVariance),
  };
}
