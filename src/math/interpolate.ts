/**
 * Value of a piecewise linear function through given nodes.
 *
 * @param xs Abscissas, ascending, shape (n), n >= 1.
 * @param ys Ordinates, shape (n).
 * @param x Where to evaluate; outside the nodes the nearest end value is returned.
 * @returns Interpolated ordinate.
 */
export function interpolateLinear(xs: ArrayLike<number>, ys: ArrayLike<number>, x: number): number {
  const last = xs.length - 1;
  if (x <= xs[0]) return ys[0];
  if (x >= xs[last]) return ys[last];
  let low = 0;
  let high = last;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (xs[middle] <= x) low = middle;
    else high = middle;
  }
  const share = (x - xs[low]) / (xs[high] - xs[low]);
  return ys[low] + share * (ys[high] - ys[low]);
}
