import { cannot } from "../base/mod.ts";
import { type Curve, curveAt } from "./curve.ts";

/** An expected spectrum on a wide window and a fine step. */
export interface Template {
  /** Energy of the first channel, as recorded, eV. */
  readonly startEv: number;
  /** Channel step, eV. */
  readonly stepEv: number;
  /** Expected counts, shape (n). */
  readonly counts: Float64Array;
  /** The part of `counts` that needs no histories and so has no noise, dark counts included, shape (n). */
  readonly direct: Float64Array;
  /** Expected counts from each of several equal groups of histories, shape (groups)(n); empty where they are not needed. */
  readonly groups: readonly Float64Array[];
  /** Dark counts of a channel, which do not grow with the intensity. */
  readonly darkCounts: number;
  /** Where the secondary cutoff is recorded, eV. */
  readonly cutoffEv: number;
  /** Where the Fermi edge is recorded, eV. */
  readonly fermiEdgeEv: number;
}

/** A template simulated at another value of one parameter. */
export interface TemplateNode {
  /** Value of the parameter. */
  readonly value: number;
  /** The spectrum there. */
  readonly template: Template;
  /**
   * The base scenario simulated with the same random numbers as `template` and in the same number of groups, or null
   * where `template` comes from the histories of the base itself.
   */
  readonly reference: Template | null;
}

/** How the spectrum changes with one parameter; made by {@link templateFamily}. */
export interface TemplateFamily {
  /** Name of the parameter. */
  readonly name: string;
  /** Its unit; empty for a number. */
  readonly unit: string;
  /** Value of the base scenario. */
  readonly baseValue: number;
  /** Least value that a fit may take. */
  readonly lower: number;
  /** Largest value that a fit may take. */
  readonly upper: number;
  /** Nodes, ascending, the base value among them. */
  readonly values: readonly number[];
  /** Change of the counts from the base at each node, on the energies of the base, both edges in line; shape (nodes)(n). */
  readonly changes: readonly Float64Array[];
  /** Changes from each group of histories; no group where the histories are those of the base; shape (nodes)(groups)(n). */
  readonly changeGroups: readonly (readonly Float64Array[])[];
  /** Secondary cutoff at each node, eV. */
  readonly cutoffsEv: readonly number[];
  /** Fermi edge at each node, eV. */
  readonly fermiEdgesEv: readonly number[];
}

/** Scattered counts below this share of their highest change by the ratio of the sums: their own is a ratio of noise. */
const LEAST_SCATTERED = 1e-4;
/** Polynomials that may describe a ratio of scattered counts, and how significant each must be to be kept. */
const MOST_POLYNOMIALS = 13;
const SIGNIFICANT = 3;
/** Noise of a change, as a share of the counting variance, that is taken as it is. */
const SMALL_NOISE = 0.05;

/**
 * Prepares the interpolation in one parameter.
 *
 * Spectra are registered first: the energy axis of each node is mapped straight so that its two edges, known from its
 * scenario, fall on those of the base. What is left changes smoothly with the parameter and is interpolated channel by
 * channel by Lagrange's polynomial through the nodes, and so are the positions of the edges. Every node is scaled to
 * the same sum of counts, since the intensity is free in every match.
 *
 * Where a parameter changes the histories, common random numbers keep little of their promise: after the first different
 * event two histories are strangers. Then the ratio of scattered counts of the pair (node, base) is taken, since it varies
 * slowly with energy, in polynomials orthogonal over the spectrum, of which only those are kept that are larger than
 * three standard errors (from the scatter of the groups); hard thresholding: D. Donoho, I. Johnstone, Biometrika 81, 425
 * (1994). The direct part has no noise and is taken as it is.
 *
 * @param parameter Name, unit, value of the base and the range of a fit.
 * @param base Template of the base scenario.
 * @param nodes At least one, at values other than that of the base.
 * @returns The family.
 * @throws {RangeError} If two nodes have one value, or there is none.
 */
export function templateFamily(
  parameter: Pick<TemplateFamily, "name" | "unit" | "baseValue" | "lower" | "upper">,
  base: Template,
  nodes: readonly TemplateNode[],
): TemplateFamily {
  const all = [...nodes, { value: parameter.baseValue, template: base, reference: null }]
    .sort((a, b) => a.value - b.value);
  const twice = all.find(({ value }, i) => i > 0 && value === all[i - 1].value);
  if (nodes.length === 0 || twice !== undefined) {
    throw new RangeError(
      cannot(
        `interpolate in ${parameter.name}`,
        "there must be nodes of different values beside the base",
        twice?.value ?? "none",
      ),
    );
  }
  const changes = all.map(({ template, reference }) => changeOf(base, template, reference));
  return {
    ...parameter,
    values: all.map(({ value }) => value),
    changes: changes.map(({ mean }) => mean),
    changeGroups: changes.map(({ groups }) => groups),
    cutoffsEv: all.map(({ template }) => template.cutoffEv),
    fermiEdgesEv: all.map(({ template }) => template.fermiEdgeEv),
  };
}

/**
 * Weights of the nodes in Lagrange's interpolation polynomial.
 *
 * @param nodes Nodes, all different.
 * @param value Where.
 * @param weights Filled with the weights, shape (nodes).
 * @param slopes Filled with their derivatives by the value, shape (nodes).
 */
export function lagrangeWeights(
  nodes: readonly number[],
  value: number,
  weights: Float64Array,
  slopes: Float64Array,
): void {
  for (let k = 0; k < nodes.length; k++) {
    let weight = 1;
    let slope = 0;
    for (let j = 0; j < nodes.length; j++) {
      if (j === k) continue;
      const width = nodes[k] - nodes[j];
      slope = (slope * (value - nodes[j]) + weight) / width;
      weight *= (value - nodes[j]) / width;
    }
    weights[k] = weight;
    slopes[k] = slope;
  }
}

interface Change {
  readonly mean: Float64Array;
  readonly groups: readonly Float64Array[];
}

function changeOf(base: Template, template: Template, reference: Template | null): Change {
  if (template === base) return { mean: new Float64Array(base.counts.length), groups: [] };
  const onBase = registration(template, base);
  if (reference === null) {
    const mean = minus(onBase(template.counts), base.counts);
    return { mean: ofEqualSum(base, mean, scaleOf(base, mean)), groups: [] };
  }
  const direct = minus(onBase(template.direct), base.direct);
  const scattered = minus(base.counts, base.direct);
  const ratioOf = (node: Float64Array, of: Float64Array): Float64Array => {
    const above = onBase(minus(node, template.direct));
    const below = minus(of, reference.direct);
    const least = LEAST_SCATTERED * below.reduce((a, b) => Math.max(a, b), 0);
    const overall = sumOf(above) / sumOf(below) - 1;
    return above.map((value, i) => (below[i] > least ? value / below[i] - 1 : overall));
  };
  let ratio = ratioOf(template.counts, reference.counts);
  let groups: readonly Float64Array[] = template.groups.map((group, g) =>
    ratioOf(group, reference.groups[g])
  );
  const noise = standardErrors(groups, ratio);
  const share = noise.reduce(
    (sum, error, i) => sum + (error * scattered[i]) ** 2 / Math.max(1, base.counts[i]),
    0,
  ) / noise.length;
  if (share > SMALL_NOISE) {
    const smooth = significantPart(ratio, groups, noise, scattered);
    ratio = smooth.mean;
    groups = smooth.groups;
  }
  const toChange = (values: Float64Array): Float64Array =>
    values.map((value, i) => direct[i] + scattered[i] * value);
  const mean = toChange(ratio);
  const scale = scaleOf(base, mean);
  return {
    mean: ofEqualSum(base, mean, scale),
    groups: groups.map((group) => ofEqualSum(base, toChange(group), scale)),
  };
}

/** By how much a changed spectrum must be multiplied to have as many counts as the base. */
function scaleOf({ counts }: Template, change: Float64Array): number {
  return sumOf(counts) / (sumOf(counts) + sumOf(change));
}

/** A change after the changed spectrum was scaled: intensities are free, and without them changes are smoother. */
function ofEqualSum({ counts }: Template, change: Float64Array, scale: number): Float64Array {
  return change.map((value, i) => scale * value + (scale - 1) * counts[i]);
}

/** Reads values of a template at the energies of the base, both edges in line. */
function registration(template: Template, base: Template): (values: Float64Array) => Float64Array {
  const stretch = (template.fermiEdgeEv - template.cutoffEv) / (base.fermiEdgeEv - base.cutoffEv);
  return (values) => {
    const curve: Curve = { ...template, values };
    return base.counts.map((_, i) =>
      curveAt(curve, template.cutoffEv + (base.startEv + i * base.stepEv - base.cutoffEv) * stretch)
    );
  };
}

/** The polynomials in a ratio that stand out from the noise. */
function significantPart(
  ratio: Float64Array,
  groups: readonly Float64Array[],
  errors: Float64Array,
  scattered: Float64Array,
): Change {
  const least = LEAST_SCATTERED * scattered.reduce((a, b) => Math.max(a, b), 0);
  const weights = errors.map((error, i) => (error > 0 && scattered[i] > least ? 1 / (error * error) : 0));
  const polynomials = orthogonalPolynomials(weights);
  const mean = ratio.map((value, i) => (weights[i] === 0 ? value : 0));
  const parts = groups.map((group) => group.map((value, i) => (weights[i] === 0 ? value : 0)));
  const product = (a: Float64Array, b: Float64Array): number =>
    a.reduce((sum, value, i) => sum + weights[i] * value * b[i], 0);
  for (const polynomial of polynomials) {
    const coefficient = product(polynomial, ratio);
    const ofGroups = groups.map((group) => product(polynomial, group));
    const scatter = ofGroups.reduce((sum, value) => sum + (value - coefficient) ** 2, 0);
    const error = Math.sqrt(scatter / (groups.length * (groups.length - 1)));
    if (Math.abs(coefficient) < SIGNIFICANT * error) continue;
    for (let i = 0; i < mean.length; i++) {
      if (weights[i] === 0) continue;
      mean[i] += coefficient * polynomial[i];
      for (let g = 0; g < parts.length; g++) parts[g][i] += ofGroups[g] * polynomial[i];
    }
  }
  return { mean, groups: parts };
}

/**
 * Polynomials of the channel number, orthonormal under the weights, by the three-term recurrence (G. Forsythe, J. SIAM 5,
 * 74 (1957)).
 */
function orthogonalPolynomials(weights: Float64Array): Float64Array[] {
  const n = weights.length;
  const x = Float64Array.from(weights, (_, i) => (2 * i) / (n - 1) - 1);
  const polynomials: Float64Array[] = [];
  const product = (a: Float64Array, b: Float64Array): number =>
    a.reduce((sum, value, i) => sum + weights[i] * value * b[i], 0);
  while (polynomials.length < MOST_POLYNOMIALS) {
    const previous = polynomials.at(-1);
    const next = previous === undefined
      ? new Float64Array(n).fill(1)
      : previous.map((value, i) => value * x[i]);
    // Twice, so that rounding errors stay out.
    for (let pass = 0; pass < 2; pass++) {
      for (const polynomial of polynomials.slice(-2)) {
        const share = product(next, polynomial);
        for (let i = 0; i < n; i++) next[i] -= share * polynomial[i];
      }
    }
    const norm = Math.sqrt(product(next, next));
    if (!(norm > 0)) break;
    polynomials.push(next.map((value) => value / norm));
  }
  return polynomials;
}

/** Standard errors of a mean of groups. */
function standardErrors(groups: readonly Float64Array[], mean: Float64Array): Float64Array {
  const squares = new Float64Array(mean.length);
  for (const group of groups) group.forEach((value, i) => squares[i] += (value - mean[i]) ** 2);
  return squares.map((sum) => Math.sqrt(sum / (groups.length * (groups.length - 1))));
}

function sumOf(values: Float64Array): number {
  return values.reduce((sum, value) => sum + value, 0);
}

function minus(a: Float64Array, b: Float64Array): Float64Array {
  return a.map((value, i) => value - b[i]);
}
