/** Integral by Simpson's rule with 2n steps between neighboring breaks, where the integrand may have kinks. */
export function integrate(f: (x: number) => number, breaks: readonly number[], n = 200): number {
  let sum = 0;
  for (let b = 1; b < breaks.length; b++) {
    const step = (breaks[b] - breaks[b - 1]) / (2 * n);
    for (let i = 0; i <= 2 * n; i++) {
      const weight = i === 0 || i === 2 * n ? 1 : i % 2 === 1 ? 4 : 2;
      sum += weight * f(breaks[b - 1] + i * step) * step / 3;
    }
  }
  return sum;
}

/** Normal density, written out so that it shares nothing with what is tested. */
export function gaussian(x: number, sigma: number): number {
  return Math.exp(-(x * x) / (2 * sigma * sigma)) / (sigma * Math.sqrt(2 * Math.PI));
}

/** Where a falling or rising function crosses a level between two points, to the last digit. */
export function crossing(f: (x: number) => number, level: number, low: number, high: number): number {
  const sign = Math.sign(f(low) - level);
  for (let i = 0; i < 200; i++) {
    const middle = 0.5 * (low + high);
    if (Math.sign(f(middle) - level) === sign) low = middle;
    else high = middle;
  }
  return 0.5 * (low + high);
}
