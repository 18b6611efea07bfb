/**
 * Coverage of the fitter's intervals over replicates of spectra whose work function is known: how often the k = 1 and k = 2
 * intervals hold it. `deno task coverage [REPLICATES]` prints the table.
 *
 * What the budget takes for uncertain is drawn anew for each replicate: counts from their Poisson distribution, and the
 * photon energy from a normal one with the 1 meV of the budget. Only the form of the states is not: it is linear here, so
 * that the budget, which allows for other forms, covers too much; its share is shown left out and left in.
 */
import { nearestLine } from "../../src/data/mod.ts";
import { measureWorkFunction } from "../../src/edges/mod.ts";
import { streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import { countTwoEdges, expectedTwoEdges, METAL, type TwoEdges, twoEdgesRegion } from "./two_edges.ts";

/** Standard uncertainty of the photon energy in the budget, eV. */
const PHOTON_UNCERTAINTY_EV = 0.001;

/** The scenarios of the table; the true work function is that of the first patch. */
export const SCENARIOS: Readonly<Record<string, TwoEdges>> = {
  metal: METAL,
  "low counts": { ...METAL, top: 300, states: 60, dark: 0.3 },
  "high resolution": { ...METAL, fwhmEv: 0.015, temperatureK: 20, stepEv: 0.004, states: 3000 },
  satellites: { ...METAL, satellites: [[1.869, 0.015], [2.524, 0.005]], marginsEv: [0.8, 3.2] },
  patches: { ...METAL, patches: [[4.8, 0.5], [5.1, 0.5]] },
};

/** How often intervals held the truth. */
export interface Coverage {
  readonly replicates: number;
  /** Fits without an answer. */
  readonly failed: number;
  /** Answers that were not called good. */
  readonly flagged: number;
  /** Shares of the answers whose interval of one and of two standard uncertainties, without states, holds the truth. */
  readonly within: readonly [k1: number, k2: number];
  /** The same with the whole uncertainty. */
  readonly withinWhole: readonly [k1: number, k2: number];
  /** Mean of (answer - truth) / standard uncertainty without states, and its standard deviation. */
  readonly meanPull: number;
  readonly pullDeviation: number;
}

/** One replicate: error of the answer, its uncertainty without and with the form of the states; null without answer. */
export type Replicate =
  | {
    readonly errorEv: number;
    readonly uncertaintiesEv: readonly [number, number];
    readonly isGood: boolean;
  }
  | null;

/** Fits replicates of a spectrum. */
export function fitReplicates(shape: TwoEdges, replicates: number): Replicate[] {
  const { energiesEv, counts } = expectedTwoEdges(shape);
  return Array.from({ length: replicates }, (_, replicate): Replicate => {
    const region = twoEdgesRegion(shape, energiesEv, countTwoEdges(counts, replicate));
    const { workFunctionEv, verdict, budget } = measureWorkFunction([region], { knownLine: nearestLine });
    if (workFunctionEv === null) return null;
    const { value, standardUncertainty } = workFunctionEv;
    const form = budget.find((term) => term.name === "Fermi edge, form of the states");
    const states = form?.standardUncertaintyEv ?? 0;
    return {
      errorEv: value - shape.patches[0][0] - PHOTON_UNCERTAINTY_EV * normalDraw(replicate),
      uncertaintiesEv: [Math.sqrt(standardUncertainty ** 2 - states ** 2), standardUncertainty],
      isGood: verdict === "good",
    };
  });
}

/** Coverage by replicates; `wrongByEv` is taken off the truth, to see that a wrong one is found out. */
export function coverage(fits: readonly Replicate[], wrongByEv = 0): Coverage {
  const answers = fits.filter((fit) => fit !== null);
  const [pulls, wholePulls] = [0, 1].map((kind) =>
    answers.map(({ errorEv, uncertaintiesEv }) => (errorEv + wrongByEv) / uncertaintiesEv[kind])
  );
  const mean = pulls.reduce((sum, pull) => sum + pull, 0) / pulls.length;
  const share = (of: readonly number[], k: number): number =>
    of.filter((pull) => Math.abs(pull) <= k).length / of.length;
  return {
    replicates: fits.length,
    failed: fits.length - answers.length,
    flagged: answers.filter(({ isGood }) => !isGood).length,
    within: [share(pulls, 1), share(pulls, 2)],
    withinWhole: [share(wholePulls, 1), share(wholePulls, 2)],
    meanPull: mean,
    pullDeviation: Math.sqrt(
      pulls.reduce((sum, pull) => sum + (pull - mean) ** 2, 0) / Math.max(1, pulls.length - 1),
    ),
  };
}

/** Box and Muller's normal deviate, one a replicate. */
function normalDraw(replicate: number): number {
  const generator = new Xoshiro128pp(streamState(21, "replicate", replicate));
  const radius = Math.sqrt(-2 * Math.log(1 - generator.nextUniform()));
  return radius * Math.cos(2 * Math.PI * generator.nextUniform());
}

if (import.meta.main) {
  const replicates = Number(Deno.args[0] ?? 1000);
  const percent = (share: number): string => `${(100 * share).toFixed(1)} %`.padStart(8);
  console.log(`${replicates} replicates   without states: k = 1    k = 2   mean pull  deviation`);
  console.log(`${"".padEnd(18)}with states: k = 1    k = 2     flagged     failed`);
  for (const [name, shape] of Object.entries(SCENARIOS)) {
    const found = coverage(fitReplicates(shape, replicates));
    const { within, withinWhole, meanPull, pullDeviation, flagged, failed } = found;
    console.log(
      `${name.padEnd(28)} ${percent(within[0])} ${percent(within[1])} ${meanPull.toFixed(3).padStart(11)} ${
        pullDeviation.toFixed(3).padStart(10)
      }`,
    );
    console.log(
      `${"".padEnd(28)} ${percent(withinWhole[0])} ${percent(withinWhole[1])} ${
        percent(flagged / replicates).padStart(11)
      } ${String(failed).padStart(10)}`,
    );
  }
}
