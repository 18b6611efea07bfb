/** A surface plasmon of a free-electron metal has the bulk plasmon's energy divided by this (R. Ritchie, Phys. Rev. 106, 874 (1957)). */
const SURFACE_RATIO = Math.SQRT2;
/** Probability of more surface excitations than are followed is below 1e-5 for a mean below 0.5. */
const MOST_EXCITATIONS = 5;

/**
 * Losses of an electron that crosses the surface once: a Poisson number of surface excitations, each with the loss
 * spectrum of the uppermost layer drawn together by sqrt(2).
 *
 * @param mean Mean number of excitations, >= 0.
 * @param bulkLosses Probability of each bulk loss in steps, shape (n).
 * @param count Steps wanted.
 * @returns Probability of each loss: entry 0 is none at all, entry j > 0 a loss of j - 1/2 steps, shape (count + 1).
 */
export function surfaceLosses(mean: number, bulkLosses: ArrayLike<number>, count: number): Float64Array {
  const all = new Float64Array(count + 1);
  all[0] = Math.exp(-mean);
  if (mean === 0) return all;
  const single = new Float64Array(count);
  for (let k = 0; k < bulkLosses.length; k++) {
    const j = Math.floor((k + 0.5) / SURFACE_RATIO);
    if (j < count) single[j] += bulkLosses[k];
  }
  let fold = single;
  let probability = all[0];
  for (let n = 1; n <= MOST_EXCITATIONS; n++) {
    probability *= mean / n;
    for (let j = 0; j < count; j++) all[j + 1] += probability * fold[j];
    const next = new Float64Array(count);
    // The middle of a sum of two bins is half a step above the lower one; the halves alternate and cancel.
    const half = n % 2;
    for (let a = 0; a < count; a++) {
      if (fold[a] === 0) continue;
      for (let b = 0; a + b + half < count; b++) next[a + b + half] += fold[a] * single[b];
    }
    fold = next;
  }
  return all;
}
