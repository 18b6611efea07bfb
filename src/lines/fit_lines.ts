import { cannot, type Estimate } from "../base/mod.ts";
import { type FitParameter, minimizePoisson, type PoissonFit } from "../fit/mod.ts";
import { judgeFit, type Judgment } from "../series/mod.ts";
import type { LightShift } from "./light_shifts.ts";
import { lineProfile } from "../spectrum/mod.ts";
import { areaAbove } from "./shirley.ts";
import { lossesInto, lossKernel, type TougaardShape } from "./tougaard.ts";

/** Counts over a window with core-level lines. */
export interface LineSpectrum {
  /** Kind of the energy axis. */
  readonly energyKind: "kinetic" | "binding";
  /** Energies, eV, ascending, shape (n). */
  readonly energiesEv: Float64Array;
  /** Counts (not rates), >= 0, shape (n). */
  readonly counts: Float64Array;
}

/** A value of a line: kept as it is, or the start of a fitted one. */
export interface LineValue {
  /** The value. */
  readonly value: number;
  /** `true` when it is fitted. */
  readonly fitted: boolean;
}

/** One line, or a spin-orbit pair, to be fitted. */
export interface LineSpec {
  /** Name, unique in the fit. */
  readonly name: string;
  /** Position on the axis of the spectrum, eV; for a pair that of the line at lower binding energy. */
  readonly positionEv: LineValue;
  /** Gaussian full width at half maximum, eV, > 0: analyzer, light, vibrations. */
  readonly gaussFwhmEv: LineValue;
  /** Lorentzian full width at half maximum of the core hole, eV, >= 0; that of the light comes on top. */
  readonly lorentzFwhmEv: LineValue;
  /** Doniach-Sunjic asymmetry, 0..0.49. */
  readonly asymmetry: LineValue;
  /** Partner of a pair, `splittingEv` higher in binding energy, with `areaRatio` times the area; null without one. */
  readonly partner: { readonly splittingEv: LineValue; readonly areaRatio: LineValue } | null;
}

/** What lies under the lines beside a constant; always fitted with them. */
export type LineBackground =
  | { readonly kind: "linear" }
  /** In proportion to the area of the lines above: D. A. Shirley, Phys. Rev. B 5, 4709 (1972). */
  | { readonly kind: "shirley" }
  /** Energy losses of all that lies above: S. Tougaard, Surf. Interface Anal. 11, 453 (1988). */
  | { readonly kind: "tougaard"; readonly shape: TougaardShape };

/** A fitted line. */
export interface FittedLine {
  /** Name. */
  readonly name: string;
  /** Position on the axis of the spectrum, eV. */
  readonly positionEv: Estimate;
  /** Gaussian full width at half maximum, eV. */
  readonly gaussFwhmEv: Estimate;
  /** Lorentzian full width at half maximum of the core hole, eV. */
  readonly lorentzFwhmEv: Estimate;
  /** Asymmetry. */
  readonly asymmetry: Estimate;
  /** Full width at half maximum of one line of a pair under monochromatic light, eV. */
  readonly fwhmEv: Estimate;
  /** Splitting of the pair, eV; null without a partner. */
  readonly splittingEv: Estimate | null;
  /** Area ratio of the pair; null without a partner. */
  readonly areaRatio: Estimate | null;
  /** Area of the line, of both lines of a pair, counts eV. */
  readonly areaCountsEv: Estimate;
  /** Counts of the line alone, shape (n). */
  readonly counts: Float64Array;
}

/** A fit of core-level lines. */
export interface LinesFit extends Judgment {
  /** Lines in the order given; empty when the fit failed. */
  readonly lines: readonly FittedLine[];
  /**
   * What the areas are: `whole line` where every asymmetry is kept at 0, tails outside the window included; else `inside
   * the window` for all lines, as an asymmetric line has no finite area.
   */
  readonly areaIs: "whole line" | "inside the window";
  /** Covariance of the areas, counts^2 eV^2, row by row, shape (lines x lines). */
  readonly areaCovariance: Float64Array;
  /** Fitted counts, shape (n). */
  readonly fitted: Float64Array;
  /** Background in it, shape (n). */
  readonly background: Float64Array;
  /** Correlation coefficients above 0.95 in size, such as `metal position and oxide position: 0.97`. */
  readonly strongCorrelations: readonly string[];
}

/** Parameters of a line in the order of the fit. */
const PER_LINE = ["position", "area", "gauss", "lorentz", "asymmetry", "splitting", "ratio"] as const;
const BACKGROUND = ["background level", "background rise"] as const;
const MOST_CHANNELS = 5000;
const STRONG_CORRELATION = 0.95;
const MONOCHROMATIC: readonly LightShift[] = [{ shiftEv: 0, weight: 1, lorentzFwhmEv: 0 }];

/**
 * Fits core-level lines, their background and the satellites of the light together to counts, by Poisson likelihood.
 *
 * Lines are Doniach-Sunjic folded with a Gaussian (Voigt for asymmetry 0), each repeated for every line of the light.
 * Nothing is subtracted first, so the uncertainties hold what background and overlap cost. Positions are in the fit's
 * order of the axis; the background belongs to losses, so it rises toward lower kinetic energy.
 *
 * @param spectrum The window, 10 to 5000 channels.
 * @param specs At least one line.
 * @param background What lies under them.
 * @param light Shifts from `lightShifts` for an anode without monochromator. Default: monochromatic.
 * @returns Lines with uncertainties and verdict.
 * @throws {RangeError} If a number is out of range, a name is used twice or a line lies outside the window.
 */
export function fitLines(
  spectrum: LineSpectrum,
  specs: readonly LineSpec[],
  background: LineBackground,
  light: readonly LightShift[] = MONOCHROMATIC,
): LinesFit {
  check(spectrum, specs);
  const isBinding = spectrum.energyKind === "binding";
  // Everything below is in kinetic energy: losses and tails are at its lower end.
  const energies = isBinding ? spectrum.energiesEv.map((energy) => -energy).reverse() : spectrum.energiesEv;
  const data = isBinding ? spectrum.counts.slice().reverse() : spectrum.counts;
  const model = linesModel(energies, specs.length, background, light);
  const parameters = startParameters(data, specs, isBinding);
  // Areas and background are linear: found first, with all else held, they make a good start for all.
  const isLinear = ({ name }: FitParameter): boolean =>
    name.endsWith(" area") || BACKGROUND.some((known) => known === name);
  const first = minimizePoisson({
    parameters: parameters.map((parameter) =>
      isLinear(parameter) ? parameter : { ...parameter, fixed: true }
    ),
    model: model.fill,
    data,
  });
  const fit = minimizePoisson({
    parameters: parameters.map((parameter, j) => ({
      ...parameter,
      start: isLinear(parameter) ? first.values[j] : parameter.start,
    })),
    model: model.fill,
    data,
  });
  const outOfWindow = specs.filter((_, l) => {
    const position = fit.values[l * PER_LINE.length];
    return position < energies[0] || position > energies[energies.length - 1];
  });
  const judgment = judgeFit(fit, data, [
    ...outOfWindow.map(({ name }) => `line ${name} ended outside the window`),
    ...specs.flatMap(({ name }, l) => {
      const [area, error] = [fit.values, fit.standardErrors].map((values) => values[l * PER_LINE.length + 1]);
      return area > 3 * error ? [] : [`line ${name} does not stand out of the noise`];
    }),
  ]);
  const onAxis = (curve: Float64Array): Float64Array => isBinding ? curve.slice().reverse() : curve;
  const peaks = specs.map((_, l) => model.line(fit.values, l));
  const isWhole = specs.every(({ asymmetry }) => asymmetry.value === 0 && !asymmetry.fitted);
  const common = {
    ...judgment,
    areaIs: isWhole ? "whole line" as const : "inside the window" as const,
    fitted: onAxis(fit.fitted),
    background: onAxis(fit.fitted.map((value, i) => peaks.reduce((rest, peak) => rest - peak[i], value))),
    strongCorrelations: strongCorrelations(fit),
  };
  if (judgment.verdict === "failed") return { ...common, lines: [], areaCovariance: new Float64Array(0) };

  const variance = judgment.inflation ** 2;
  const areas = specs.map((_, l) => (values: Float64Array): number => {
    const line = values.subarray(l * PER_LINE.length, (l + 1) * PER_LINE.length);
    return isWhole ? line[1] * (1 + line[6]) : areaAbove(energies, model.line(values, l))[0];
  });
  const covariance = propagate(fit, areas).map((value) => value * variance);
  const lines = specs.map((spec, l): FittedLine => {
    const at = (index: number): Estimate => ({
      value: fit.values[l * PER_LINE.length + index],
      standardUncertainty: fit.standardErrors[l * PER_LINE.length + index] * judgment.inflation,
    });
    const width = (values: Float64Array): number => {
      const [, , gaussFwhmEv, lorentzFwhmEv, asymmetry] = values.subarray(l * PER_LINE.length);
      return fullWidthEv(lineProfile({ gaussFwhmEv, lorentzFwhmEv, asymmetry }), gaussFwhmEv + lorentzFwhmEv);
    };
    const position = at(0);
    return {
      name: spec.name,
      positionEv: { ...position, value: isBinding ? -position.value : position.value },
      gaussFwhmEv: at(2),
      lorentzFwhmEv: at(3),
      asymmetry: at(4),
      fwhmEv: {
        value: width(fit.values),
        standardUncertainty: Math.sqrt(propagate(fit, [width])[0] * variance),
      },
      splittingEv: spec.partner && at(5),
      areaRatio: spec.partner && at(6),
      areaCountsEv: {
        value: areas[l](fit.values),
        standardUncertainty: Math.sqrt(covariance[l * specs.length + l]),
      },
      counts: onAxis(peaks[l]),
    };
  });
  return { ...common, lines, areaCovariance: covariance };
}

/** The model in kinetic energy; the curve of a line is kept until one of its parameters changes. */
function linesModel(
  energies: Float64Array,
  lineCount: number,
  background: LineBackground,
  light: readonly LightShift[],
): {
  line: (values: Float64Array, index: number) => Float64Array;
  fill: (values: Float64Array, out: Float64Array) => void;
} {
  const n = energies.length;
  const center = (energies[0] + energies[n - 1]) / 2;
  const halfWidth = energies[n - 1] - center;
  const kernel = background.kind === "tougaard" ? lossKernel(energies, background.shape) : [];
  const curves = Array.from({ length: lineCount }, () => new Float64Array(n));
  const known = Array.from({ length: lineCount }, () => new Float64Array(PER_LINE.length).fill(NaN));

  function line(values: Float64Array, index: number): Float64Array {
    const own = values.subarray(index * PER_LINE.length, (index + 1) * PER_LINE.length);
    const curve = curves[index];
    if (own.every((value, j) => value === known[index][j])) return curve;
    known[index].set(own);
    curve.fill(0);
    const [position, area, gaussFwhmEv, lorentzFwhmEv, asymmetry, splitting, ratio] = own;
    for (const { shiftEv, weight, lorentzFwhmEv: natural } of light) {
      const profile = lineProfile({ gaussFwhmEv, lorentzFwhmEv: lorentzFwhmEv + natural, asymmetry });
      for (let i = 0; i < n; i++) {
        const offset = energies[i] - position - shiftEv;
        curve[i] += weight * area * (profile(offset) + (ratio > 0 ? ratio * profile(offset + splitting) : 0));
      }
    }
    return curve;
  }

  const peaks = new Float64Array(n);
  function fill(values: Float64Array, out: Float64Array): void {
    peaks.fill(0);
    for (let l = 0; l < lineCount; l++) {
      const curve = line(values, l);
      for (let i = 0; i < n; i++) peaks[i] += curve[i];
    }
    const level = values[values.length - 2];
    const rise = values[values.length - 1];
    if (background.kind === "linear") {
      for (let i = 0; i < n; i++) out[i] = peaks[i] + level + rise * (energies[i] - center) / halfWidth;
    } else if (background.kind === "shirley") {
      const above = areaAbove(energies, peaks);
      for (let i = 0; i < n; i++) out[i] = peaks[i] + level + rise * above[i];
    } else {
      // Downward, so that what already lost energy once can lose it again.
      for (let i = n - 1; i >= 0; i--) out[i] = peaks[i] + rise * lossesInto(i, out, kernel);
      for (let i = 0; i < n; i++) out[i] += level;
    }
  }
  return { line: (values, index) => line(values, index).slice(), fill };
}

/** Parameters on the kinetic axis: areas from the counts near each line, a level from the upper end. */
function startParameters(
  data: Float64Array,
  specs: readonly LineSpec[],
  isBinding: boolean,
): FitParameter[] {
  const n = data.length;
  const floor = data.slice(-Math.ceil(n / 20)).reduce((a, b) => a + b, 0) / Math.ceil(n / 20);
  const height = Math.max(1, Math.max(...data) - floor);
  const lines = specs.flatMap((spec): FitParameter[] => {
    const named = (
      kind: (typeof PER_LINE)[number],
      { value, fitted }: LineValue,
      bounds: Omit<FitParameter, "name" | "start" | "fixed">,
    ): FitParameter => ({ name: `${spec.name} ${kind}`, start: value, fixed: !fitted, ...bounds });
    const { positionEv, gaussFwhmEv, lorentzFwhmEv, asymmetry, partner } = spec;
    const area = height * (gaussFwhmEv.value + lorentzFwhmEv.value);
    const none = { value: 0, fitted: false };
    return [
      named("position", { ...positionEv, value: (isBinding ? -1 : 1) * positionEv.value }, { scale: 0.1 }),
      named("area", { value: area, fitted: true }, {}),
      named("gauss", gaussFwhmEv, { scale: 0.1, lower: 0.01, upper: 20 }),
      named("lorentz", lorentzFwhmEv, { scale: 0.1, lower: 0, upper: 20 }),
      named("asymmetry", asymmetry, { scale: 0.1, lower: 0, upper: 0.49 }),
      named("splitting", partner?.splittingEv ?? none, { scale: 0.1, lower: 0, upper: 100 }),
      named("ratio", partner?.areaRatio ?? none, { scale: 0.1, lower: 0, upper: 10 }),
    ];
  });
  const rise = { name: BACKGROUND[1], start: 0, scale: 0.1 };
  return [...lines, { name: BACKGROUND[0], start: floor, scale: Math.max(1, Math.sqrt(floor)) }, rise];
}

/** Covariance of functions of the parameters, row by row (JCGM 100:2008, 5.2), by central differences. */
function propagate(fit: PoissonFit, functions: readonly ((values: Float64Array) => number)[]): Float64Array {
  const count = fit.values.length;
  const gradients = functions.map((f) =>
    fit.standardErrors.map((error, j) => {
      if (!(error > 0)) return 0;
      // Never across zero, where widths end.
      const step = Math.min(1e-3 * error, 0.5 * Math.abs(fit.values[j]) || Infinity);
      return (f(fit.values.with(j, fit.values[j] + step)) - f(fit.values.with(j, fit.values[j] - step))) /
        (2 * step);
    })
  );
  const result = new Float64Array(functions.length ** 2);
  gradients.forEach((a, row) =>
    gradients.forEach((b, column) => {
      let sum = 0;
      for (let i = 0; i < count; i++) {
        for (let j = 0; j < count; j++) sum += a[i] * b[j] * fit.covariance[i * count + j];
      }
      result[row * functions.length + column] = sum;
    })
  );
  return result;
}

/** Full width at half maximum of a line with one maximum, by golden sections and bisection. */
function fullWidthEv(profile: (offsetEv: number) => number, scaleEv: number): number {
  let [low, high] = [-scaleEv, scaleEv];
  while (high - low > 1e-9 * scaleEv) {
    const third = (high - low) / 3;
    if (profile(low + third) > profile(high - third)) high -= third;
    else low += third;
  }
  const top = low;
  const half = profile(top) / 2;
  const crossing = (direction: 1 | -1): number => {
    let outside = scaleEv;
    while (profile(top + direction * outside) > half) outside *= 2;
    let inside = 0;
    while (outside - inside > 1e-10 * scaleEv) {
      const middle = (inside + outside) / 2;
      if (profile(top + direction * middle) > half) inside = middle;
      else outside = middle;
    }
    return inside;
  };
  return crossing(1) + crossing(-1);
}

function strongCorrelations({ names, covariance, standardErrors }: PoissonFit): string[] {
  const count = names.length;
  return names.flatMap((name, a) =>
    names.slice(0, a).flatMap((other, b) => {
      const value = covariance[a * count + b] / standardErrors[a] / standardErrors[b];
      return Math.abs(value) > STRONG_CORRELATION ? [`${other} and ${name}: ${value.toFixed(3)}`] : [];
    })
  );
}

function check({ energiesEv, counts }: LineSpectrum, specs: readonly LineSpec[]): void {
  const fail = (rule: string, value: unknown) => new RangeError(cannot("fit lines", rule, value));
  const n = energiesEv.length;
  if (!(n >= 10 && n <= MOST_CHANNELS)) throw fail(`there must be 10 to ${MOST_CHANNELS} channels`, n);
  if (counts.length !== n) throw fail(`there must be ${n} counts`, counts.length);
  for (let i = 0; i < n; i++) {
    if (!(energiesEv[i] > (energiesEv[i - 1] ?? -Infinity) && energiesEv[i] < Infinity)) {
      throw fail(`energiesEv[${i}] must be finite and ascending`, energiesEv[i]);
    }
  }
  if (specs.length === 0) throw fail("there must be at least one line", 0);
  for (const { name, positionEv: { value } } of specs) {
    if (!(value >= energiesEv[0] && value <= energiesEv[n - 1])) {
      throw fail(`line ${name} must lie in ${energiesEv[0]}..${energiesEv[n - 1]} eV`, `${value} eV`);
    }
  }
}
