/**
 * Coverage of the fitter's intervals over replicates of spectra whose work function is known: how often the k = 1 and k = 2
 * intervals hold it. `deno task coverage [REPLICATES]` prints the table.
 *
 * What the budget takes for uncertain is drawn anew for each replicate: counts from their Poisson distribution, and the
 * photon energy from a normal one with the 1 meV of the budget.
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
  /** Shares of the answers whose interval of one and of two standard uncertainties holds the truth. */
  readonly within: readonly [k1: number, k2: number];
  /** Mean of (answer - truth) / standard uncertainty, and its standard deviation. */
  readonly meanPull: number;
  readonly pullDeviation: number;
}

/** Fits replicates; `errorEv` is added to the truth, to see that a wrong one is found out. */
export function coverage(shape: TwoEdges, replicates: number, errorEv = 0): Coverage {
  const { energiesEv, counts } = expectedTwoEdges(shape);
  const pulls: number[] = [];
  let flagged = 0;
  for (let replicate = 0; replicate < replicates; replicate++) {
    const region = twoEdgesRegion(shape, energiesEv, countTwoEdges(counts, replicate));
    const { workFunctionEv, verdict } = measureWorkFunction([region], { knownLine: nearestLine });
    if (workFunctionEv === null) continue;
    if (verdict !== "good") flagged++;
    const truth = shape.patches[0][0] + errorEv + PHOTON_UNCERTAINTY_EV * normalDraw(replicate);
    pulls.push((workFunctionEv.value - truth) / workFunctionEv.standardUncertainty);
  }
  const mean = pulls.reduce((sum, pull) => sum + pull, 0) / pulls.length;
  const share = (k: number): number => pulls.filter((pull) => Math.abs(pull) <= k).length / pulls.length;
  return {
    replicates,
    failed: replicates - pulls.length,
    flagged,
    within: [share(1), share(2)],
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
  console.log(`${replicates} replicates        k = 1    k = 2   mean pull  deviation  flagged  failed`);
  for (const [name, shape] of Object.entries(SCENARIOS)) {
    const found = coverage(shape, replicates);
    const numbers = [found.meanPull.toFixed(3).padStart(11), found.pullDeviation.toFixed(3).padStart(10)];
    console.log(
      `${name.padEnd(20)} ${percent(found.within[0])} ${percent(found.within[1])} ${numbers.join(" ")} ` +
        `${percent(found.flagged / found.replicates)} ${String(found.failed).padStart(6)}`,
    );
  }
}
