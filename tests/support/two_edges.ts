import { nearestLine } from "../../src/data/mod.ts";
import {
  type EdgeRegion,
  type MeasureOptions,
  measureWorkFunction,
  type WorkFunctionResult,
} from "../../src/edges/mod.ts";
import { samplePoisson, streamState, Xoshiro128pp } from "../../src/rng/mod.ts";

/** He I alpha, hc / 58.433436 nm (wavelength as NIST gives it). */
export const PHOTON_EV = 1239.841984332 / 58.433436;
const ANALYZER_EV = 4.4;
const KT_PER_K = 8.617333262e-5;

/** A spectrum written down from its physics, not from the shapes that the fits use. */
export interface TwoEdges {
  /** Work functions of the patches, eV, and the share of the secondaries that each gives. */
  readonly patches: readonly (readonly [workFunctionEv: number, share: number])[];
  /** Bias, V. */
  readonly biasV: number;
  /** Resolution, eV. */
  readonly fwhmEv: number;
  /** Temperature, K. */
  readonly temperatureK: number;
  /** Expected counts at the top of the cutoff. */
  readonly top: number;
  /** Expected counts at the Fermi level, of the main line. */
  readonly states: number;
  /** Expected dark counts. */
  readonly dark: number;
  /** Channel step, eV. */
  readonly stepEv: number;
  /** Weaker lines: shift up, eV, and intensity relative to the main line. */
  readonly satellites: readonly (readonly [shiftEv: number, intensity: number])[];
  /** Center of a narrow band below the Fermi level, eV. */
  readonly bandEv: number;
  /** A valence-band maximum this far below the Fermi level instead of a Fermi edge, eV; null for a metal. */
  readonly gapEv: number | null;
  /** First and last energy relative to the lowest cutoff and to the Fermi level, eV. */
  readonly marginsEv: readonly [below: number, above: number];
}

/** Clean gold under a helium lamp, well measured. */
export const METAL: TwoEdges = {
  patches: [[5.1, 1]],
  biasV: -9,
  fwhmEv: 0.08,
  temperatureK: 300,
  top: 2e4,
  states: 1500,
  dark: 3,
  stepEv: 0.02,
  satellites: [],
  bandEv: 4,
  gapEv: null,
  marginsEv: [0.8, 1],
};

/** Axis of the spectrum: recorded kinetic energy. */
function energies({ patches, biasV, stepEv, marginsEv }: TwoEdges): Float64Array {
  const lowest = Math.min(...patches.map(([workFunctionEv]) => workFunctionEv));
  const start = lowest - ANALYZER_EV - biasV - marginsEv[0];
  const end = PHOTON_EV - ANALYZER_EV - biasV + marginsEv[1];
  return Float64Array.from({ length: Math.round((end - start) / stepEv) + 1 }, (_, i) => start + i * stepEv);
}

/** Expected counts, by Simpson's rule over the Gaussian response from the true cutoff on. */
export function expectedTwoEdges(shape: TwoEdges): { energiesEv: Float64Array; counts: Float64Array } {
  const { patches, biasV, fwhmEv, temperatureK, top, states, dark, satellites, bandEv, gapEv } = shape;
  const sigma = fwhmEv / 2.354820045;
  const fermiLevel = PHOTON_EV - ANALYZER_EV - biasV;
  const kT = KT_PER_K * temperatureK;
  /** Valence electrons of one line, by energy from its Fermi level: states, a d band, and what fills them. */
  const valence = (x: number): number => {
    if (gapEv !== null) return x < -gapEv ? states * Math.min(3, -x - gapEv) : 0;
    return states * (1 - 0.1 * x + 3 * Math.exp(-0.5 * ((x + bandEv) / 0.4) ** 2)) / (1 + Math.exp(x / kT));
  };
  const energiesEv = energies(shape);
  const counts = energiesEv.map((energy) => {
    let sum = dark;
    for (const [workFunctionEv, share] of patches) {
      const cutoff = workFunctionEv - ANALYZER_EV - biasV;
      const from = Math.max(cutoff, energy - 6 * sigma);
      const to = energy + 6 * sigma;
      if (from >= to) continue;
      const n = 96;
      let integral = 0;
      for (let i = 0; i <= n; i++) {
        const at = from + ((to - from) * i) / n;
        const weight = i === 0 || i === n ? 1 : i % 2 === 1 ? 4 : 2;
        let rate = top * Math.exp(-(at - cutoff) / 1.2) + valence(at - fermiLevel);
        for (const [shift, intensity] of satellites) rate += intensity * valence(at - fermiLevel - shift);
        integral += weight * rate * Math.exp(-0.5 * ((energy - at) / sigma) ** 2);
      }
      sum += (share * integral * (to - from)) / (3 * n) / (sigma * Math.sqrt(2 * Math.PI));
    }
    return sum;
  });
  return { energiesEv, counts };
}

/** Poisson counts of replicate number `replicate`. */
export function countTwoEdges(expected: Float64Array, replicate: number): Float64Array {
  const generator = new Xoshiro128pp(streamState(20, "replicate", replicate));
  return expected.map((mean) => samplePoisson(mean, generator));
}

/** A region as a file would give it; the acceptance is a narrow cone, so that the cutoff has no ramp. */
export function twoEdgesRegion(
  shape: TwoEdges,
  energiesEv: Float64Array,
  counts: Float64Array,
  changes: Partial<EdgeRegion> = {},
): EdgeRegion {
  return {
    label: "",
    file: "invented",
    energyKind: "kinetic",
    energiesEv,
    counts,
    photonEnergyEv: PHOTON_EV,
    biasV: shape.biasV,
    asRecorded: true,
    analyzerWorkFunctionEv: ANALYZER_EV,
    acceptanceHalfAngleDeg: 0,
    temperatureK: shape.temperatureK,
    resolutionFwhmEv: shape.fwhmEv,
    ...changes,
  };
}

/** Fits counts drawn from a spectrum, or from one whose region or counts are changed. */
export function measureTwoEdges(
  shape: TwoEdges,
  replicate: number,
  { region = {}, counts = (drawn) => drawn, options = {} }: {
    readonly region?: Partial<EdgeRegion>;
    readonly counts?: (drawn: Float64Array, energiesEv: Float64Array) => Float64Array;
    readonly options?: Partial<MeasureOptions>;
  } = {},
): WorkFunctionResult {
  const expected = expectedTwoEdges(shape);
  const drawn = counts(countTwoEdges(expected.counts, replicate), expected.energiesEv);
  return measureWorkFunction([twoEdgesRegion(shape, expected.energiesEv, drawn, region)], {
    knownLine: nearestLine,
    ...options,
  });
}
