import { type FitParameter, minimizePoisson } from "../fit/mod.ts";
import { broadenedFermiEdge } from "../spectrum/mod.ts";
import { type FittedEdge, fittedEdge, type IntervalOptions, NO_INTERVALS } from "./fitted_edge.ts";
import { type EdgeCandidate, meanCounts } from "./locate.ts";
import { ghosts, type Satellite } from "./satellites.ts";

/** What is known about the Fermi edge before the fit. */
export interface FermiOptions {
  /** kT of the sample, eV, >= 0. */
  readonly thermalEnergyEv: number;
  /** Weaker lines of the lamp. */
  readonly satellites: readonly Satellite[];
  /** Start value of the Gaussian standard deviation, eV. */
  readonly startSigmaEv: number;
  /** Intervals beyond the covariance. Default: none. */
  readonly intervals?: IntervalOptions;
}

/** A Fermi edge with the height of its step, to judge whether it is one. */
export interface FittedFermiEdge extends FittedEdge {
  /** Counts of the step at the edge. */
  readonly stepCounts: number;
  /** Standard error of that. */
  readonly stepStandardError: number;
  /** `true` when the lamp's satellites above the main line are part of the model. */
  readonly withSatellites: boolean;
  /** Standard uncertainty of the position from the assumed form of the states, eV. */
  readonly statesUncertaintyEv: number;
}

/** Window about the edge, eV: linear states below, background above. */
const BELOW_EV = 0.6;
const ABOVE_EV = 0.6;
/** How far above the last satellite's edge the window reaches when the data do. */
const BEYOND_SATELLITE_EV = 0.4;

/** Curved states must improve twice the log-likelihood by this much: 1 parameter, chance 0.1 % (chi-square table). */
const CURVE_GAIN = 10.83;

/**
 * Fits a Fermi edge: smooth density of states times Fermi-Dirac at known temperature, folded with a Gaussian, on a
 * background, with satellites above as scaled copies of the measured spectrum where the data reach far enough, and a
 * sloping background instead where they do not. Lines of the lamp just below the main one give second edges in the
 * window, which are part of the model.
 *
 * The states are linear in energy, or quadratic where the counts ask for it (likelihood ratio). Where they do not, the
 * two positions should differ by no more than `sqrt(u_quadratic^2 - u_linear^2)`, the standard deviation of the
 * difference of nested estimators (J. Hausman, Econometrica 46, 1251 (1978)); what exceeds it is the uncertainty of
 * the choice.
 *
 * @param energiesEv All energies, ascending, eV.
 * @param counts All counts.
 * @param candidate Where to look.
 * @param options What is known.
 * @returns The fit, or null when fewer than 12 channels are in the window.
 */
export function fitFermiEdge(
  energiesEv: Float64Array,
  counts: Float64Array,
  candidate: EdgeCandidate,
  options: FermiOptions,
): FittedFermiEdge | null {
  const center = candidate.energyEv;
  const reach = Math.max(0, ...options.satellites.map((satellite) => satellite.shiftEv));
  const last = energiesEv[energiesEv.length - 1];
  const withSatellites = reach > 0 && last >= center + reach + BEYOND_SATELLITE_EV &&
    energiesEv[0] <= center - BELOW_EV - reach;
  const low = center - BELOW_EV;
  const high = center + (withSatellites ? reach + 2 * BEYOND_SATELLITE_EV : ABOVE_EV);
  const from = energiesEv.findIndex((energy) => energy >= low);
  const past = energiesEv.findIndex((energy) => energy > high);
  const window = energiesEv.slice(from, past < 0 ? undefined : past);
  const data = counts.slice(from, past < 0 ? undefined : past);
  if (window.length < 12) return null;

  const stepEv = (window[window.length - 1] - window[0]) / (window.length - 1);
  const above = meanCounts(window, data, center + 0.3, center + ABOVE_EV) || 0;
  const below = meanCounts(window, data, center - 0.4, center - 0.2) || above;
  const height = Math.max(1, below - above);
  const copied = withSatellites
    ? ghosts(options.satellites, energiesEv, counts, window)
    : { parameters: [], copies: [] };
  const floor = meanCounts(window, data, high - BEYOND_SATELLITE_EV, high);
  const belowMain = options.satellites.filter((satellite) =>
    satellite.shiftEv < 0 && satellite.shiftEv > -BELOW_EV
  );
  const parameters: FitParameter[] = [
    { name: "position", start: center, lower: window[0], upper: window[window.length - 1], scale: 0.05 },
    {
      name: "sigma",
      start: Math.max(0.2 * stepEv, options.startSigmaEv),
      lower: 0.15 * stepEv,
      upper: 1,
      scale: options.startSigmaEv,
    },
    { name: "states", start: height, lower: 0, scale: height },
    { name: "statesSlope", start: 0, scale: height },
    {
      name: "base",
      start: withSatellites ? Math.max(floor, 0.1) : above,
      lower: 0,
      scale: Math.max(above, 1),
    },
    ...(withSatellites ? copied.parameters : [{ name: "baseSlope", start: 0, scale: Math.max(above, 1) }]),
    ...belowMain.map((satellite, i) => ({
      name: `lineBelow${i + 1}`,
      start: satellite.relativeIntensity,
      lower: 0,
      upper: 2,
      scale: satellite.relativeIntensity,
    })),
  ];
  const firstBelow = parameters.length - belowMain.length;
  const shape = { occupation: 0, slopeEv: 0, curveEv2: 0 };
  const model = (p: Float64Array, out: Float64Array): void => {
    const edgeShape = broadenedFermiEdge(options.thermalEnergyEv, p[1]);
    const curve = p.length > parameters.length ? p[parameters.length] : 0;
    for (let i = 0; i < window.length; i++) {
      const x = window[i] - p[0];
      edgeShape(x, shape);
      out[i] = p[2] * shape.occupation + p[3] * shape.slopeEv + curve * shape.curveEv2 + p[4];
      if (!withSatellites) out[i] += p[5] * x;
      for (let s = 0; s < copied.copies.length; s++) out[i] += p[5 + s] * copied.copies[s][i];
      for (let s = 0; s < belowMain.length; s++) {
        edgeShape(x - belowMain[s].shiftEv, shape);
        out[i] += p[firstBelow + s] *
          (p[2] * shape.occupation + p[3] * shape.slopeEv + curve * shape.curveEv2);
      }
    }
  };
  /** The model is linear in all but position and sigma, given the others. */
  const derivative = (index: number, p: Float64Array, out: Float64Array): boolean => {
    if (index < 2) return false;
    const isCopy = withSatellites && index >= 5 && index < firstBelow;
    if (index === 4 || isCopy) {
      for (let i = 0; i < window.length; i++) out[i] = isCopy ? copied.copies[index - 5][i] : 1;
      return true;
    }
    const edgeShape = broadenedFermiEdge(options.thermalEnergyEv, p[1]);
    const curve = p.length > parameters.length ? p[parameters.length] : 0;
    const ofStates = (x: number): number => {
      edgeShape(x, shape);
      if (index === 2) return shape.occupation;
      if (index === 3) return shape.slopeEv;
      if (index === parameters.length) return shape.curveEv2;
      return p[2] * shape.occupation + p[3] * shape.slopeEv + curve * shape.curveEv2;
    };
    const line = index >= firstBelow && index < parameters.length ? belowMain[index - firstBelow] : null;
    for (let i = 0; i < window.length; i++) {
      const x = window[i] - p[0];
      if (line !== null) out[i] = ofStates(x - line.shiftEv);
      else if (!withSatellites && index === 5) out[i] = x;
      else {
        out[i] = ofStates(x);
        for (let s = 0; s < belowMain.length; s++) {
          out[i] += p[firstBelow + s] * ofStates(x - belowMain[s].shiftEv);
        }
      }
    }
    return true;
  };
  const linearProblem = { parameters, model, derivative, data };
  const linear = minimizePoisson(linearProblem);
  const curvedProblem = {
    parameters: [
      ...parameters.map((parameter, i) => ({ ...parameter, start: linear.values[i] })),
      { name: "statesCurve", start: 0, scale: height },
    ],
    model,
    derivative,
    data,
    expected: linear.fitted,
  };
  const curved = minimizePoisson(curvedProblem);
  const useCurved = curved.converged && linear.deviance - curved.deviance > CURVE_GAIN;
  const fit = useCurved ? curved : linear;
  const edge = fittedEdge(fit, useCurved ? curvedProblem : linearProblem, window, {
    vital: ["position"],
    thermalEnergyEv: options.thermalEnergyEv,
    model: `${useCurved ? "quadratic" : "linear"} states x Fermi-Dirac, Gaussian response, ${
      withSatellites ? `background and ${copied.copies.length} satellites` : "sloping background"
    }${belowMain.length > 0 ? `, ${belowMain.length} line below` : ""}`,
  }, options.intervals ?? NO_INTERVALS);
  const difference = curved.values[0] - linear.values[0];
  const expected = curved.standardErrors[0] ** 2 - linear.standardErrors[0] ** 2;
  const statesUncertaintyEv = useCurved || !curved.converged
    ? 0
    : Math.sqrt(Math.max(0, difference ** 2 - Math.max(0, expected)));
  return {
    ...edge,
    stepCounts: fit.values[2],
    stepStandardError: fit.standardErrors[2],
    withSatellites,
    statesUncertaintyEv,
  };
}
