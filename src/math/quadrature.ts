/** Nodes and weights of a quadrature rule on [-1, 1]. */
export interface QuadratureRule {
  /** Nodes, ascending, shape (n). */
  readonly nodes: Float64Array;
  /** Weights, positive, sum 2, shape (n). */
  readonly weights: Float64Array;
}

/**
 * Gauss-Legendre rule on [-1, 1], exact for polynomials of degree 2n - 1.
 *
 * Source: M. Abramowitz, I. Stegun, Handbook of Mathematical Functions (1964), eq. 25.4.29; nodes by Newton iteration
 * on the Legendre recurrence, eq. 8.5.3.
 *
 * @param count Number of nodes, a whole number >= 1.
 * @returns Nodes and weights.
 */
export function gaussLegendre(count: number): QuadratureRule {
  const nodes = new Float64Array(count);
  const weights = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    let x = -Math.cos((Math.PI * (i + 0.75)) / (count + 0.5));
    let slope = 1;
    for (let iteration = 0; iteration < 50; iteration++) {
      let previous = 1;
      let value = x;
      for (let n = 2; n <= count; n++) {
        [previous, value] = [value, ((2 * n - 1) * x * value - (n - 1) * previous) / n];
      }
      slope = (count * (x * value - previous)) / (x * x - 1);
      const step = value / slope;
      x -= step;
      if (Math.abs(step) < 1e-15) break;
    }
    nodes[i] = x;
    weights[i] = 2 / ((1 - x * x) * slope * slope);
  }
  return { nodes, weights };
}
