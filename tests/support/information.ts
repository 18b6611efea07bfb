/** Standard normal density. */
export function density(t: number): number {
  return Math.exp(-0.5 * t * t) / Math.sqrt(2 * Math.PI);
}

/** A function folded with a Gaussian, by Simpson's rule over eight standard deviations on both sides. */
export function folded(shape: (x: number) => number, sigma: number): (x: number) => number {
  const n = 1600;
  const weights = Array.from({ length: n + 1 }, (_, i) => {
    const t = -8 + (16 * i) / n;
    return [t, ((i === 0 || i === n ? 1 : i % 2 === 1 ? 4 : 2) * 16 * density(t)) / (3 * n)] as const;
  });
  return (x) => weights.reduce((sum, [t, weight]) => sum + weight * shape(x - sigma * t), 0);
}

/**
 * Cramer-Rao bound of the first parameter, times the time in the window: the inverse of the Fisher information
 * `sum_channels dr/dp dr/dq / r x (time in a channel)` of Poisson counts, by Gauss-Jordan elimination.
 *
 * @param energies Channels.
 * @param rate Counts per second.
 * @param derivatives Of the rate, by each parameter; the first is that of the position.
 * @returns Variance of the position times the time in all channels.
 */
export function boundTimesTime(
  energies: ArrayLike<number>,
  rate: (energy: number) => number,
  derivatives: readonly ((energy: number) => number)[],
): number {
  const p = derivatives.length;
  const rows = derivatives.map((
    _,
    i,
  ) => [...new Array(p).fill(0), ...derivatives.map((_, j) => (i === j ? 1 : 0))]);
  for (const energy of Array.from(energies)) {
    const columns = derivatives.map((derivative) => derivative(energy));
    for (let i = 0; i < p; i++) {
      for (let j = 0; j < p; j++) rows[i][j] += (columns[i] * columns[j]) / rate(energy) / energies.length;
    }
  }
  for (let i = 0; i < p; i++) {
    const pivot = rows[i][i];
    rows[i] = rows[i].map((value) => value / pivot);
    for (let k = 0; k < p; k++) {
      if (k === i) continue;
      const factor = rows[k][i];
      rows[k] = rows[k].map((value, j) => value - factor * rows[i][j]);
    }
  }
  return rows[0][p];
}
