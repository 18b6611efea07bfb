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
  /** Resolution, full width at half maximum, eV. */
  readonly resolutionFwhmEv: number;
  /** `true` where the scattered part has no lines of its own: a ratio of two such spectra varies slowly with energy. */
  readonly isSlow: boolean;
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

/** Of scattered counts below this share of their highest the difference is taken, since their ratio would be of noise. */
const LEAST_SCATTERED = 1e-4;
/** Polynomials that may describe a ratio of scattered counts, and how significant each must be to be kept. */
const POLYNOMIALS = 13;
const SIGNIFICANT = 3;
/** Functions are about the cutoff where it may change its shape by itself (patches, spread of the work function), eV. */
const CUTOFF_REACH_EV = 0.6;
/** Standard deviation and distance of those Gaussians, in widths of the resolution: a little narrower than its Gaussian. */
const BUMP_FWHM = 0.4;
/** A function of which less than this is left after those before it says nothing new. */
const INDEPENDENT = 1e-3;
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
 * event two histories are strangers. Then the ratio of scattered counts of the pair (node, base), which varies slowly with
 * energy, is taken as a sum of polynomials, and what is left about the cutoff as a sum of Gaussians as narrow as the
 * resolution (neither under X-rays, where lines change by themselves); of both only those are kept that are larger than three standard errors (from the scatter of the groups).
 * Hard thresholding: D. Donoho, I. Johnstone, Biometrika 81, 425 (1994). The direct part has no noise and is taken as it is.
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
  const scattered = changeOfScattered(base, template, reference, onBase);
  const mean = direct.map((value, i) => value + scattered.mean[i]);
  const scale = scaleOf(base, mean);
  return {
    mean: ofEqualSum(base, mean, scale),
    groups: scattered.groups.map((group) =>
      ofEqualSum(base, direct.map((value, i) => value + group[i]), scale)
    ),
  };
}

/** Change of the scattered counts of the base, from a pair with common random numbers. */
function changeOfScattered(
  base: Template,
  template: Template,
  reference: Template,
  onBase: (values: Float64Array) => Float64Array,
): Change {
  const scattered = minus(base.counts, base.direct);
  const least = LEAST_SCATTERED * scattered.reduce((a, b) => Math.max(a, b), 0);
  const pairOf = (node: Float64Array, of: Float64Array) => ({
    above: onBase(minus(node, template.direct)),
    below: minus(of, reference.direct),
  });
  const pair = pairOf(template.counts, reference.counts);
  const pairs = template.groups.map((group, g) => pairOf(group, reference.groups[g]));
  const ratioOf = ({ above, below }: typeof pair): Float64Array =>
    above.map((value, i) => (pair.below[i] > least && below[i] > 0 ? value / below[i] - 1 : 0));
  const raw = (of: typeof pair): Float64Array =>
    ratioOf(of).map((ratio, i) => pair.below[i] > least ? ratio * scattered[i] : of.above[i] - of.below[i]);
  const plain = { mean: raw(pair), groups: pairs.map(raw) };
  const errors = standardErrors(plain.groups, plain.mean);
  const noise = errors.reduce((sum, error, i) => sum + error ** 2 / Math.max(1, base.counts[i]), 0);
  if (!base.isSlow || noise <= SMALL_NOISE * errors.length) return plain;

  const slow = { mean: ratioOf(pair), groups: pairs.map(ratioOf) };
  // At the foot of the cutoff a ratio says nothing; that of the first channels above it goes on there.
  const first = Math.ceil((base.cutoffEv + CUTOFF_REACH_EV / 2 - base.startEv) / base.stepEv);
  const usable = standardErrors(slow.groups, slow.mean)
    .map((error, i) => (i >= first && pair.below[i] > least ? error : 0));
  const ratio = significantPart(slow, polynomials(base.counts.length), usable);
  for (const part of [ratio.mean, ...ratio.groups]) part.fill(part[first] ?? 0, 0, Math.max(0, first));
  const rest = (of: typeof pair, part: Float64Array): Float64Array =>
    of.above.map((value, i) => value - of.below[i] * (1 + part[i]));
  const fast = { mean: rest(pair, ratio.mean), groups: pairs.map((of, g) => rest(of, ratio.groups[g])) };
  // Channels that nothing reaches by chance have no error; they must not rule the sum.
  const floored = standardErrors(fast.groups, fast.mean)
    .map((error, i) => Math.hypot(error, Math.sqrt(SMALL_NOISE * Math.max(1, base.counts[i]))));
  const atCutoff = significantPart(fast, bumps(base), floored);
  const sum = (slowPart: Float64Array, fastPart: Float64Array): Float64Array =>
    slowPart.map((value, i) => value * scattered[i] + fastPart[i]);
  return {
    mean: sum(ratio.mean, atCutoff.mean),
    groups: ratio.groups.map((group, g) => sum(group, atCutoff.groups[g])),
  };
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

/**
 * The part of a noisy curve that functions describe, each kept only where it is larger than three standard errors.
 *
 * The functions are made orthonormal in their order, weighted by the errors (G. Forsythe, J. SIAM 5, 74 (1957)).
 */
function significantPart(of: Change, functions: Iterable<Float64Array>, errors: Float64Array): Change {
  const weights = errors.map((error) => (error > 0 ? 1 / (error * error) : 0));
  const product = (a: Float64Array, b: Float64Array): number => {
    let sum = 0;
    for (let i = 0; i < weights.length; i++) sum += weights[i] * a[i] * b[i];
    return sum;
  };
  const mean = new Float64Array(errors.length);
  const groups = of.groups.map(() => new Float64Array(errors.length));
  const orthonormal: Float64Array[] = [];
  for (const given of functions) {
    const next = given.map((value, i) => (weights[i] > 0 ? value : 0));
    const length = product(next, next);
    // Twice, so that rounding errors stay out.
    for (let pass = 0; pass < 2; pass++) {
      for (const earlier of orthonormal) {
        const share = product(next, earlier);
        for (let i = 0; i < next.length; i++) next[i] -= share * earlier[i];
      }
    }
    const norm = Math.sqrt(product(next, next));
    if (!(norm > INDEPENDENT * Math.sqrt(length))) continue;
    const unit = next.map((value) => value / norm);
    orthonormal.push(unit);
    const coefficient = product(unit, of.mean);
    const ofGroups = of.groups.map((group) => product(unit, group));
    const scatter = ofGroups.reduce((sum, value) => sum + (value - coefficient) ** 2, 0);
    const error = Math.sqrt(scatter / (ofGroups.length * (ofGroups.length - 1)));
    if (Math.abs(coefficient) < SIGNIFICANT * error) continue;
    for (let i = 0; i < mean.length; i++) {
      mean[i] += coefficient * unit[i];
      for (let g = 0; g < groups.length; g++) groups[g][i] += ofGroups[g] * unit[i];
    }
  }
  return { mean, groups };
}

/** Polynomials of the channel number; Chebyshev's, so that none is nearly a sum of the others. */
function* polynomials(channels: number): Generator<Float64Array> {
  for (let degree = 0; degree < POLYNOMIALS; degree++) {
    yield Float64Array.from(
      { length: channels },
      (_, i) => Math.cos(degree * Math.acos((2 * i) / (channels - 1) - 1)),
    );
  }
}

/** Gaussians side by side about the cutoff, as narrow as the resolution. */
function* bumps({ counts, startEv, stepEv, cutoffEv, resolutionFwhmEv }: Template): Generator<Float64Array> {
  const distanceEv = BUMP_FWHM * resolutionFwhmEv;
  for (let centerEv = -CUTOFF_REACH_EV; centerEv <= CUTOFF_REACH_EV; centerEv += distanceEv) {
    yield counts.map((_, i) =>
      Math.exp(-0.5 * ((startEv + i * stepEv - cutoffEv - centerEv) / distanceEv) ** 2)
    );
  }
}

/** By how much a changed spectrum must be multiplied to have as many counts as the base. */
function scaleOf({ counts, darkCounts }: Template, change: Float64Array): number {
  const electrons = sumOf(counts) - counts.length * darkCounts;
  return electrons / (electrons + sumOf(change));
}

/** A change after the changed spectrum was scaled: intensities are free, and without them changes are smoother. */
function ofEqualSum({ counts, darkCounts }: Template, change: Float64Array, scale: number): Float64Array {
  return change.map((value, i) => scale * value + (scale - 1) * (counts[i] - darkCounts));
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
