/** A function on equidistant energies. */
export interface Curve {
  /** Energy of the first value, eV. */
  readonly startEv: number;
  /** Distance of the energies, eV, > 0. */
  readonly stepEv: number;
  /** Values, shape (n), n >= 4. */
  readonly values: Float64Array;
}

/**
 * Value of a curve between its energies by the cubic of E. Catmull, R. Rom, in Computer Aided Geometric Design (1974),
 * p. 317: through all values, with a continuous slope.
 *
 * @param curve The curve.
 * @param energyEv Where, eV; outside, the nearest end value.
 * @returns The value.
 */
export function curveAt({ startEv, stepEv, values }: Curve, energyEv: number): number {
  const position = (energyEv - startEv) / stepEv;
  const last = values.length - 1;
  if (position <= 0) return values[0];
  if (position >= last) return values[last];
  const i = Math.floor(position);
  const t = position - i;
  const before = values[Math.max(0, i - 1)];
  const low = values[i];
  const high = values[i + 1];
  const after = values[Math.min(last, i + 2)];
  const slope = 0.5 * (high - before);
  const curvature = before - 2.5 * low + 2 * high - 0.5 * after;
  const cubic = 0.5 * (after - before) + 1.5 * (low - high);
  return low + t * (slope + t * (curvature + t * cubic));
}

/**
 * Slope of {@link curveAt}.
 *
 * @param curve The curve.
 * @param energyEv Where, eV; outside, 0.
 * @returns Value per eV.
 */
export function curveSlopeAt({ startEv, stepEv, values }: Curve, energyEv: number): number {
  const position = (energyEv - startEv) / stepEv;
  const last = values.length - 1;
  if (position <= 0 || position >= last) return 0;
  const i = Math.floor(position);
  const t = position - i;
  const before = values[Math.max(0, i - 1)];
  const low = values[i];
  const high = values[i + 1];
  const after = values[Math.min(last, i + 2)];
  const slope = 0.5 * (high - before);
  const curvature = before - 2.5 * low + 2 * high - 0.5 * after;
  const cubic = 0.5 * (after - before) + 1.5 * (low - high);
  return (slope + t * (2 * curvature + 3 * t * cubic)) / stepEv;
}

const REACH_SIGMAS = 5;

/**
 * Folds values on equidistant energies with a Gaussian; beyond the ends the end values go on.
 *
 * @param values Values, shape (n).
 * @param sigmaSteps Standard deviation in steps, >= 0.
 * @param out Where to write, shape (n), another array than `values`.
 */
export function foldGaussian(values: Float64Array, sigmaSteps: number, out: Float64Array): void {
  const last = values.length - 1;
  const reach = Math.ceil(REACH_SIGMAS * sigmaSteps);
  if (reach === 0) return out.set(values);
  const weights = Float64Array.from(
    { length: reach + 1 },
    (_, k) => Math.exp(-0.5 * (k / sigmaSteps) ** 2),
  );
  const norm = weights.reduce((sum, weight, k) => sum + (k === 0 ? weight : 2 * weight), 0);
  for (let i = 0; i <= last; i++) {
    let sum = weights[0] * values[i];
    for (let k = 1; k <= reach; k++) {
      sum += weights[k] * (values[i - k < 0 ? 0 : i - k] + values[i + k > last ? last : i + k]);
    }
    out[i] = sum / norm;
  }
}
