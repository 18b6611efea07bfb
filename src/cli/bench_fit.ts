import { nearestLine } from "../data/mod.ts";
import { measureWorkFunction } from "../edges/mod.ts";
import { countSpectrum, type ExpectedSpectrum } from "../model/mod.ts";
import { simulatedRegion } from "../run/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";

/** Fits that warm up, and fits that are timed. */
const FITS = 30;
const REPLICATES = 1000;

/**
 * Times fits of both edges of a spectrum, warm, and a bootstrap.
 *
 * @param resolved The scenario.
 * @param spectrum Its expected spectrum.
 * @returns What was timed, and how long it took.
 */
export function fitBench(resolved: ResolvedScenario, spectrum: ExpectedSpectrum): [string, string][] {
  const seconds = (seed: number, replicates: number): number => {
    const counts = countSpectrum(spectrum, seed);
    const from = performance.now();
    const { verdict } = measureWorkFunction([simulatedRegion(resolved, spectrum.kineticEnergiesEv, counts)], {
      knownLine: nearestLine,
      bootstrap: { replicates, seed: 1 },
    });
    if (verdict === "failed") throw new Error("The fit failed");
    return (performance.now() - from) / 1000;
  };
  const fits = Array.from({ length: 2 * FITS }, (_, i) => seconds(i + 1, 0)).slice(FITS).sort((a, b) =>
    a - b
  );
  return [
    [
      `both edges, ${spectrum.kineticEnergiesEv.length} channels, warm, median of ${FITS}`,
      `${(1000 * fits[FITS >> 1]).toFixed(0)} ms`,
    ],
    [`bootstrap of ${REPLICATES} replicates`, `${seconds(1, REPLICATES).toFixed(1)} s`],
  ];
}
