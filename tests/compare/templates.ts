/** Templates and counts of a spectrum that is written down from its physics (tests/support/two_edges.ts). */
import {
  type MatchChannels,
  type Template,
  type TemplateFamily,
  templateFamily,
} from "../../src/compare/mod.ts";
import { samplePoisson, streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import { expectedTwoEdges, METAL, PHOTON_EV, type TwoEdges } from "../support/two_edges.ts";

/** Invented metal, coarse enough to be quick: 260 channels. */
export const COARSE: TwoEdges = { ...METAL, fwhmEv: 0.3, temperatureK: 500, stepEv: 0.1, marginsEv: [2, 2] };

const ANALYZER_EV = 4.4;

/** The spectrum on a wide window and a fine step. */
export function template(shape: TwoEdges, groups: readonly Float64Array[] = []): Template {
  const { energiesEv, counts } = expectedTwoEdges({ ...shape, stepEv: shape.fwhmEv / 8, marginsEv: [3, 3] });
  return {
    startEv: energiesEv[0],
    stepEv: energiesEv[1] - energiesEv[0],
    counts,
    direct: new Float64Array(counts.length).fill(shape.dark),
    groups,
    darkCounts: shape.dark,
    cutoffEv: shape.patches[0][0] - ANALYZER_EV - shape.biasV,
    fermiEdgeEv: PHOTON_EV - ANALYZER_EV - shape.biasV,
    resolutionFwhmEv: shape.fwhmEv,
    isSlow: true,
  };
}

/** A metal of another work function. */
export function withWorkFunction(workFunctionEv: number): TwoEdges {
  return { ...COARSE, patches: [[workFunctionEv, 1]] };
}

export const BASE: Template = template(COARSE);

/** Nodes 0.3 eV to either side of the 5.1 eV of the base. */
export const WORK_FUNCTION: TemplateFamily = templateFamily(
  { name: "workFunctionEv", unit: "eV", baseValue: 5.1, lower: 4.8, upper: 5.4 },
  BASE,
  [4.8, 5.4].map((value) => ({ value, template: template(withWorkFunction(value)), reference: null })),
);

export const TEMPERATURE: TemplateFamily = templateFamily(
  { name: "temperatureK", unit: "K", baseValue: 500, lower: 250, upper: 900 },
  BASE,
  [250, 700, 900].map((value) => ({
    value,
    template: template({ ...COARSE, temperatureK: value }),
    reference: null,
  })),
);

export const RESOLUTION: TemplateFamily = templateFamily(
  { name: "fwhmEv", unit: "eV", baseValue: 0.3, lower: 0.2, upper: 0.45 },
  BASE,
  [0.2, 0.25, 0.37, 0.45].map((value) => ({
    value,
    template: { ...template({ ...COARSE, fwhmEv: value }), ...resampled({ ...COARSE, fwhmEv: value }) },
    reference: null,
  })),
);

/** On the energies of the base, whatever the resolution. */
function resampled(shape: TwoEdges): Pick<Template, "counts" | "direct" | "startEv" | "stepEv"> {
  const { energiesEv, counts } = expectedTwoEdges({ ...shape, stepEv: COARSE.fwhmEv / 8, marginsEv: [3, 3] });
  return {
    counts,
    direct: new Float64Array(counts.length).fill(shape.dark),
    startEv: energiesEv[0],
    stepEv: energiesEv[1] - energiesEv[0],
  };
}

/** Channels of one region. */
export function channels(energiesEv: Float64Array, counts: Float64Array): MatchChannels {
  return { energiesEv, counts, regions: new Int32Array(counts.length), regionCount: 1 };
}

/** Poisson counts of replicate number `replicate`. */
export function draw(expected: ArrayLike<number>, replicate: number, seed = 60): Float64Array {
  const generator = new Xoshiro128pp(streamState(seed, "replicate", replicate));
  return Float64Array.from(expected, (mean) => samplePoisson(mean, generator));
}

/** Measured counts of a metal. */
export function measured(shape: TwoEdges, replicate: number): MatchChannels {
  const { energiesEv, counts } = expectedTwoEdges(shape);
  return channels(energiesEv, draw(counts, replicate));
}
