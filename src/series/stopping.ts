import { cannot, type Estimate } from "../base/mod.ts";
import { fowlerYieldEv2, sphereRetardedYieldEv2 } from "../emission/mod.ts";
import { chiSquareProbability, type FitResult, minimize } from "../fit/mod.ts";
import { judgeFit, type Judgment } from "./judgment.ts";
import { fitPhotoelectricLine, type PhotoelectricLine, PLANCK_EV_S } from "./photoelectric_line.ts";

/** Current of a photocell against the voltage that holds its electrons back. */
export interface RetardingCurve {
  /** Photon energy, eV, > 0. */
  readonly photonEnergyEv: number;
  /** Voltages, V, ascending, positive retarding, shape (n). */
  readonly retardingVoltagesV: ArrayLike<number>;
  /** Currents, A, electrons arriving at the collector counted positive, shape (n). */
  readonly currentsA: ArrayLike<number>;
  /** Standard uncertainties of the currents, A, each > 0, shape (n). */
  readonly currentUncertaintiesA: ArrayLike<number>;
}

/** What holds for all curves of a cell. */
export interface RetardingCell {
  /** Temperature of the emitter, K, >= 0. */
  readonly temperatureK: number;
  /** Current with the lamp off, A, subtracted before the fit. */
  readonly darkCurrentA: number;
  /** Flat plates or a small emitter inside a sphere. */
  readonly geometry: "plane" | "sphere";
  /**
   * Contact potential, V: collector work function minus emitter work function, over e; null when not known. A sphere
   * needs it.
   */
  readonly contactPotentialV: Estimate | null;
}

/** The stopping potential of one curve. */
export interface StoppingPotential extends Judgment {
  /** Photon energy, eV. */
  readonly photonEnergyEv: number;
  /** Voltage at which the fastest electrons (at 0 K) just do not arrive, V; null when the fit failed. */
  readonly stoppingPotentialV: Estimate | null;
  /** Work function by `e V_stop = h nu - W`, eV; null when the fit failed. */
  readonly workFunctionEv: Estimate | null;
  /** Whose work function it is: emitter and collector are wired together, so it is the collector's. */
  readonly workFunctionOf: "collector";
  /** Work function of the emitter, eV: the collector's minus the contact potential; null when that is not known. */
  readonly emitterWorkFunctionEv: Estimate | null;
  /** Current from collector to emitter at strong retarding, A, dark current excluded; null when the fit failed. */
  readonly backCurrentA: Estimate | null;
  /** Share of the largest current from which on the readings were fitted: 1/2, 1/4, 1/8, ... */
  readonly usedShare: number;
  /** Voltages that were fitted, V. */
  readonly usedVoltagesV: Float64Array;
  /** Fitted currents there, dark current included, A. */
  readonly fittedA: Float64Array;
}

/** All curves of a cell. */
export interface StoppingSeries {
  /** One result a curve. */
  readonly curves: readonly StoppingPotential[];
  /** Curves that give no stopping potential, and why. */
  readonly leftOut: readonly { readonly photonEnergyEv: number; readonly reason: string }[];
  /** Line through the stopping potentials; null with fewer than 3 of them. */
  readonly line: PhotoelectricLine | null;
}

/**
 * Largest part of a curve that is fitted, as a share of its current above the last readings. Further up the contact
 * potential and the shape of the cell end the formula.
 */
const LARGEST_SHARE = 0.5;
/** Smaller parts are noise (chosen). */
const SMALLEST_SHARE = 1e-4;
/** A part whose chi-square is less probable than this is too large: the density of states is not flat over it (chosen). */
const LEAST_PROBABILITY = 0.01;
/** Chi-square per degree of freedom at which even the best part says nothing (chosen). */
const LARGEST_REDUCED_CHI_SQUARE = 10;
/** Change of the stopping potential by halving the part that is no chance, in standard uncertainties (chosen). */
const LARGEST_DRIFT = 3;
/** Readings that a part has at least. */
const FEWEST_READINGS = 6;
/** Readings below the stopping potential that fix it and the amplitude. */
const FEWEST_BELOW = 4;
/** Readings beyond the stopping potential that fix the back-current. */
const FEWEST_BEYOND = 3;

/**
 * Stopping potential from a curve of current against retarding voltage.
 *
 * Fits DuBridge's current plus a constant, the back-current, to the readings from the voltage on at which the current
 * last exceeds a share of its largest value above the last readings. The back-current of electrons that the light frees
 * from the collector is constant there since the field helps every one of them over.
 *
 * The formula holds near the stopping potential, where the emitter's density of states is flat. So the share begins at
 * 1/2 and is halved until chi-square is within chance (probability 1 %); a part that had to shrink is halved once more
 * where that passes too, as what has just passed may still bend, and the change of the stopping potential by that is added
 * to its standard uncertainty (in quadrature; chosen: an error in proportion to the part is as large). A part has at least 6 readings, 4 of them below the
 * stopping potential. Where none passes the one with the least chi-square per degree of freedom is taken, and above 10
 * the fit has failed. `usedShare` and `usedVoltagesV` tell what was fitted.
 *
 * Source: L. A. DuBridge, Phys. Rev. 43, 727 (1933).
 *
 * @param curve At least 6 readings.
 * @param cell Temperature, dark current, shape, contact potential.
 * @returns Stopping potential and whose work function it gives, with verdict.
 * @throws {RangeError} If a number is out of range, fewer than 6 readings are left, or a sphere has no contact potential.
 */
export function fitStoppingPotential(curve: RetardingCurve, cell: RetardingCell): StoppingPotential {
  check(curve, cell);
  const { photonEnergyEv } = curve;
  const { contactPotentialV } = cell;
  const tried: Part[] = [];
  for (const part of shrinkingParts(curve, cell)) {
    tried.push(part);
    const first = tried.findIndex(passes);
    if (first === 0 || (first > 0 && tried.length > first + 1)) break;
  }
  const { part: { usedShare, voltages, data, fit }, halvedFrom } = bestPart(tried);
  const driftV = halvedFrom === null ? 0 : fit.values[0] - halvedFrom.fit.values[0];
  const [stopV, , baseline] = fit.values;
  const beyond = voltages.filter((voltage) => voltage > stopV).length;
  const doubts = [
    ...(beyond >= FEWEST_BEYOND ? [] : [
      `only ${beyond} readings lie beyond the stopping potential, which leaves the back-current open; measure ` +
      "further",
    ]),
    // The uncertainty of the change is the root of the difference of the squares: J. A. Hausman, Econometrica 46, 1251 (1978).
    ...(halvedFrom === null ||
        driftV ** 2 <=
          LARGEST_DRIFT ** 2 * (fit.standardErrors[0] ** 2 - halvedFrom.fit.standardErrors[0] ** 2)
      ? []
      : [
        `the stopping potential changes by ${
          driftV.toPrecision(2)
        } V when half of the part is fitted, more than by ` +
        "chance: the formula does not hold; check the shape of the cell and the contact potential",
      ]),
    ...(tried.length > 1 && halvedFrom === null
      ? [
        "too few readings near the stopping potential tell whether the formula holds there; measure in smaller steps",
      ]
      : []),
  ];
  const judgment = judge(fit, data, doubts);
  const isGood = judgment.verdict !== "failed";
  const estimate = (value: number, index: number): Estimate | null =>
    isGood ? { value, standardUncertainty: fit.standardErrors[index] * judgment.inflation } : null;
  const withDrift = (one: Estimate | null): Estimate | null =>
    one && { ...one, standardUncertainty: Math.hypot(one.standardUncertainty, driftV) };
  const workFunctionEv = withDrift(estimate(photonEnergyEv - stopV, 0));
  return {
    ...judgment,
    photonEnergyEv,
    stoppingPotentialV: withDrift(estimate(stopV, 0)),
    workFunctionEv,
    workFunctionOf: "collector",
    emitterWorkFunctionEv: workFunctionEv && contactPotentialV && {
      value: workFunctionEv.value - contactPotentialV.value,
      standardUncertainty: Math.hypot(
        workFunctionEv.standardUncertainty,
        contactPotentialV.standardUncertainty,
      ),
    },
    backCurrentA: estimate(-baseline, 2),
    usedShare,
    usedVoltagesV: voltages,
    fittedA: fit.fitted.map((current) => current + cell.darkCurrentA),
  };
}

/**
 * Stopping potentials of all curves of a cell, and from 3 photon energies on the line through them.
 *
 * @param curves One curve a photon energy.
 * @param cell What holds for all of them.
 * @returns Results in the order of the curves, and the line.
 * @throws {RangeError} As {@link fitStoppingPotential}.
 */
export function fitStoppingSeries(curves: readonly RetardingCurve[], cell: RetardingCell): StoppingSeries {
  const fits = curves.map((curve) => fitStoppingPotential(curve, cell));
  const known = fits.flatMap(({ photonEnergyEv, stoppingPotentialV }) =>
    stoppingPotentialV === null ? [] : [{ frequencyHz: photonEnergyEv / PLANCK_EV_S, ...stoppingPotentialV }]
  );
  return {
    curves: fits,
    leftOut: fits.flatMap(({ photonEnergyEv, stoppingPotentialV, reasons }) =>
      stoppingPotentialV === null ? [{ photonEnergyEv, reason: reasons[0] }] : []
    ),
    line: known.length < 3 ? null : fitPhotoelectricLine({
      frequenciesHz: known.map(({ frequencyHz }) => frequencyHz),
      frequencyUncertaintiesHz: known.map(() => 0),
      energiesEv: known.map(({ value }) => value),
      energyUncertaintiesEv: known.map(({ standardUncertainty }) => standardUncertainty),
      quantity: "stopping potential",
    }),
  };
}

/** The end of a curve, fitted. */
interface Part {
  readonly usedShare: number;
  readonly voltages: Float64Array;
  readonly data: Float64Array;
  readonly fit: FitResult;
}

/** Fits half of a curve, a quarter and so on, as long as a part has the readings for it; at least the first. */
function* shrinkingParts(curve: RetardingCurve, cell: RetardingCell): Generator<Part> {
  const { temperatureK, geometry, contactPotentialV } = cell;
  const contactV = contactPotentialV?.value ?? 0;
  const shape = (voltageV: number, stopV: number): number => {
    // For plates only the energy left at the collector counts; a sphere also needs the energy outside the emitter.
    if (geometry === "plane") return fowlerYieldEv2(stopV, voltageV, temperatureK);
    return sphereRetardedYieldEv2(voltageV + contactV, stopV + contactV, temperatureK);
  };
  const all = Float64Array.from(curve.currentsA, (current) => current - cell.darkCurrentA);
  const floor = all.slice(-3).reduce((a, b) => a + b, 0) / 3;
  const height = Math.max(...all) - floor;
  let previous: number | null = null;
  for (let usedShare = LARGEST_SHARE; usedShare > SMALLEST_SHARE; usedShare /= 2) {
    const from = all.findLastIndex((current) => current - floor > usedShare * height);
    if (from === previous) continue;
    const data = all.slice(from);
    if (data.length < FEWEST_READINGS) {
      if (previous !== null) return;
      throw fail(
        `there must be at least ${FEWEST_READINGS} readings from half of the largest current on`,
        data.length,
      );
    }
    const voltages = Float64Array.from(curve.retardingVoltagesV).slice(from);
    const start = stopStart(voltages, data, floor);
    const unit = shape(voltages[0], start);
    const fit = minimize({
      parameters: [
        { name: "stopping potential", start, scale: 0.1 },
        { name: "amplitude", start: unit > 0 ? (data[0] - floor) / unit : height },
        { name: "baseline", start: floor, scale: height },
      ],
      model: ([stopV, amplitude, baseline], out) => {
        for (let i = 0; i < out.length; i++) out[i] = baseline + amplitude * shape(voltages[i], stopV);
      },
      data,
      sigma: Float64Array.from(curve.currentUncertaintiesA).slice(from),
    });
    const isUsable = fit.converged && voltages[FEWEST_BELOW - 1] < fit.values[0];
    if (!isUsable && previous !== null) return;
    yield { usedShare, voltages, data, fit };
    if (!isUsable) return;
    previous = from;
  }
}

function passes({ fit }: Part): boolean {
  return fit.converged && chiSquareProbability(fit.chiSquare, fit.degreesOfFreedom) >= LEAST_PROBABILITY;
}

/**
 * The largest part that passes, or where that had to shrink the next one if it passes too; else the least bad one. With
 * the part it was halved from, where both pass.
 */
function bestPart(parts: readonly Part[]): { readonly part: Part; readonly halvedFrom: Part | null } {
  const first = parts.findIndex(passes);
  if (first < 0) {
    const least = parts.reduce((a, b) => reducedChiSquare(b.fit) < reducedChiSquare(a.fit) ? b : a);
    return { part: least, halvedFrom: null };
  }
  const next = parts[first + 1];
  return first > 0 && next !== undefined && passes(next)
    ? { part: next, halvedFrom: parts[first] }
    : { part: parts[first], halvedFrom: null };
}

function reducedChiSquare({ chiSquare, degreesOfFreedom }: FitResult): number {
  return chiSquare / degreesOfFreedom;
}

function judge(fit: FitResult, data: Float64Array, doubts: readonly string[]): Judgment {
  const judgment = judgeFit(fit, data, doubts);
  if (reducedChiSquare(fit) <= LARGEST_REDUCED_CHI_SQUARE) return judgment;
  const reason =
    `chi-square per degree of freedom is ${
      reducedChiSquare(fit).toPrecision(3)
    }, above ${LARGEST_REDUCED_CHI_SQUARE}, in every part of the curve down to the stopping potential: the formula does not ` +
    "hold there, or there are too few readings near it; measure in smaller steps";
  return { ...judgment, verdict: "failed", reasons: [reason] };
}

/** Where the root of the current, a straight line for plates, meets zero: through its first point and a quarter of it. */
function stopStart(voltages: Float64Array, currents: Float64Array, floor: number): number {
  const first = currents[0] - floor;
  const quarter = currents.findIndex((current) => current - floor < first / 4);
  return voltages[0] + 2 * (voltages[Math.max(1, quarter)] - voltages[0]);
}

function fail(rule: string, value: unknown): RangeError {
  return new RangeError(cannot("fit a stopping potential", rule, value));
}

function check(curve: RetardingCurve, { geometry, contactPotentialV, darkCurrentA }: RetardingCell): void {
  const { photonEnergyEv, retardingVoltagesV, currentsA, currentUncertaintiesA } = curve;
  const n = retardingVoltagesV.length;
  if (!(photonEnergyEv > 0 && photonEnergyEv < Infinity)) {
    throw fail("photonEnergyEv must be > 0 eV", photonEnergyEv);
  }
  if (n < 6) throw fail("there must be at least 6 readings", n);
  if (currentsA.length !== n || currentUncertaintiesA.length !== n) {
    throw fail(
      `there must be ${n} currents and uncertainties`,
      `${currentsA.length}, ${currentUncertaintiesA.length}`,
    );
  }
  for (let i = 0; i < n; i++) {
    const [voltage, current] = [retardingVoltagesV[i], currentsA[i]];
    if (!(voltage > (retardingVoltagesV[i - 1] ?? -Infinity) && voltage < Infinity)) {
      throw fail(`retardingVoltagesV[${i}] must be finite and ascending`, voltage);
    }
    if (!Number.isFinite(current)) throw fail(`currentsA[${i}] must be finite`, current);
  }
  if (!Number.isFinite(darkCurrentA)) throw fail("darkCurrentA must be finite", darkCurrentA);
  if (geometry === "sphere" && contactPotentialV === null) {
    throw fail("contactPotentialV must be given for a sphere", contactPotentialV);
  }
}
