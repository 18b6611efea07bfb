import { EigenvalueDecomposition, Matrix } from "ml-matrix";

/** The plane that touches a model's surface at a point, spanned by the columns of its whitened Jacobian. */
export interface Tangent {
  /** Lengths of the columns, 1 for a column of zeros. */
  readonly norms: readonly number[];
  /** Length of the projection of the residuals on the plane: expected distance to the minimum, in standard errors. */
  readonly offset: number;
  /**
   * Linear problem of p equations with the same normal equations as the n of the scaled Jacobian: `R^T R = J^T J` and
   * `R^T target = J^T residuals`, from `R = sqrt(eigenvalues) V^T`.
   */
  readonly reduced: { readonly rows: readonly (readonly number[])[]; readonly target: readonly number[] };
  /** Inverse of J^T J, shape (p x p); null when a column depends on the others. */
  readonly covariance: Matrix | null;
  /** Column with the largest share in the direction that is least determined. */
  readonly weakest: number;
}

/** The minimizing library takes no fewer equations; those missing are 0 = 0. */
const LEAST_EQUATIONS = 3;

/** Smallest eigenvalue of the scaled J^T J, relative to the largest, that still determines a direction. */
const SINGULAR = 1e-13;

/**
 * Solves the normal equations by eigenvalues of J^T J with its diagonal scaled to 1.
 *
 * @param columns Whitened derivatives, one column for each parameter, at least one.
 * @param residuals Whitened data minus model.
 * @returns The plane.
 */
export function tangent(columns: readonly Float64Array[], residuals: Float64Array): Tangent {
  const norms = columns.map((column) => Math.sqrt(dot(column, column)) || 1);
  const scaled = Matrix.zeros(columns.length, columns.length);
  columns.forEach((column, a) => {
    for (let b = 0; b <= a; b++) {
      const product = dot(column, columns[b]) / norms[a] / norms[b];
      scaled.set(a, b, product);
      scaled.set(b, a, product);
    }
  });
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(scaled, {
    assumeSymmetric: true,
  });
  const least = SINGULAR * Math.max(...realEigenvalues);
  const gradient = columns.map((column, a) => dot(column, residuals) / norms[a]);
  const covariance = Matrix.zeros(columns.length, columns.length);
  const rows: number[][] = [];
  const target: number[] = [];
  let squaredOffset = 0;
  realEigenvalues.forEach((eigenvalue, e) => {
    if (!(eigenvalue > least)) return;
    const direction = eigenvectorMatrix.getColumn(e);
    rows.push(direction.map((value) => Math.sqrt(eigenvalue) * value));
    target.push(dot(direction, gradient) / Math.sqrt(eigenvalue));
    squaredOffset += dot(direction, gradient) ** 2 / eigenvalue;
    for (let a = 0; a < columns.length; a++) {
      for (let b = 0; b < columns.length; b++) {
        const share = direction[a] * direction[b] / eigenvalue / norms[a] / norms[b];
        covariance.set(a, b, covariance.get(a, b) + share);
      }
    }
  });
  while (rows.length < LEAST_EQUATIONS) {
    rows.push(columns.map(() => 0));
    target.push(0);
  }
  const smallest = Math.min(...realEigenvalues);
  const shares = eigenvectorMatrix.getColumn(realEigenvalues.indexOf(smallest)).map(Math.abs);
  return {
    norms,
    offset: Math.sqrt(squaredOffset),
    reduced: { rows, target },
    covariance: smallest > least ? covariance : null,
    weakest: shares.indexOf(Math.max(...shares)),
  };
}

/** Scalar product. */
export function dot(a: ArrayLike<number>, b: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i];
  return sum;
}
