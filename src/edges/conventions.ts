import { FWHM_PER_SIGMA } from "../math/mod.ts";
import type { Estimate } from "../base/mod.ts";
import { edgeTangentShiftEv } from "../spectrum/mod.ts";
import type { FittedCutoff } from "./cutoff.ts";
import { localLine } from "./local_line.ts";

/** The cutoff as one convention reads it. */
export interface CutoffConvention {
  /** Which: by model, by half height, by the steepest line extrapolated to the background. */
  readonly name: "model" | "half height" | "steepest line";
  /** Position as the convention gives it, eV. */
  readonly uncorrectedEv: Estimate;
  /** What the Gaussian width of the edge adds to it, eV: -0.532234 FWHM for the steepest line of an erf edge. */
  readonly resolutionShiftEv: number;
  /** What the ramp of the acceptance cone adds beyond that, eV. */
  readonly acceptanceShiftEv: number;
  /** Position less both shifts, eV. */
  readonly correctedEv: Estimate;
}

/** All conventions side by side. */
export interface CutoffConventions {
  /** One row a convention, the model first. */
  readonly rows: readonly CutoffConvention[];
  /** Full width at half maximum of the Gaussian of the edge, eV, used for the shifts. */
  readonly edgeFwhmEv: number;
  /** Largest less smallest corrected position, eV. */
  readonly spreadEv: number;
  /** Largest less smallest uncorrected position, eV. */
  readonly uncorrectedSpreadEv: number;
}

/**
 * Reads the cutoff off the counts by the two conventions people use beside a model, and corrects each for the width of
 * the edge.
 *
 * Half height: where the counts pass the middle between their mean below the edge and their highest value (mean of three
 * channels) above it; a Gaussian does not move it, a ramp of width r moves it by r/2, a falling top moves it down.
 * Steepest line: the steepest straight line through the edge, over half a width on either side, met with the mean below
 * it; for shifts see {@link edgeTangentShiftEv}. Both as in common practice; offsets derived for the ideal edge.
 *
 * @param fit The fitted cutoff.
 * @returns The table; rows that the counts do not allow are left out.
 */
export function cutoffConventions(fit: FittedCutoff): CutoffConventions {
  const { energiesEv, counts, positionEv, sigmaEv, rampEv } = fit;
  const sigma = sigmaEv.value;
  const n = counts.length;
  const rows: CutoffConvention[] = [{
    name: "model",
    uncorrectedEv: positionEv,
    resolutionShiftEv: 0,
    acceptanceShiftEv: 0,
    correctedEv: positionEv,
  }];

  let below = 0;
  let channelsBelow = 0;
  for (let i = 0; i < n && energiesEv[i] < positionEv.value - 4 * sigma; i++) {
    below += counts[i];
    channelsBelow++;
  }
  let top = 1;
  const mean3 = (i: number): number => (counts[i - 1] + counts[i] + counts[i + 1]) / 3;
  for (let i = 1; i < n - 1; i++) if (energiesEv[i] > positionEv.value && mean3(i) > mean3(top)) top = i;
  const halfEv = 0.5 * Math.hypot(sigma, rampEv / Math.sqrt(12));
  let steepest = 0;
  let line = localLine(energiesEv, counts, 0, halfEv);
  for (let i = 1; i <= top; i++) {
    const next = localLine(energiesEv, counts, i, halfEv);
    if (next.slope > line.slope) [line, steepest] = [next, i];
  }
  if (channelsBelow >= 3 && line.slope > 0 && energiesEv[top] > positionEv.value) {
    const base = below / channelsBelow;
    const baseError = Math.sqrt(below + 1) / channelsBelow;
    const half = 0.5 * (base + mean3(top));
    let i = top;
    while (i > 0 && mean3Or(i) > half) i--;
    if (half - mean3Or(i) > mean3Or(i + 1) - half) i++;
    const crossing = localLine(energiesEv, counts, i, halfEv);
    const halfError = 0.5 * Math.hypot(baseError, Math.sqrt(mean3(top) / 3));
    add(
      "half height",
      {
        value: energiesEv[i] + (half - crossing.height) / crossing.slope,
        standardUncertainty: Math.hypot(crossing.heightError, halfError) / crossing.slope,
      },
      0,
      rampEv / 2,
    );
    const rise = line.height - base;
    const resolutionShift = edgeTangentShiftEv(sigma, 0);
    add(
      "steepest line",
      {
        value: energiesEv[steepest] - rise / line.slope,
        standardUncertainty: Math.hypot(line.heightError, baseError, (rise * line.slopeError) / line.slope) /
          line.slope,
      },
      resolutionShift,
      edgeTangentShiftEv(sigma, rampEv) - resolutionShift,
    );
  }
  const spread = (pick: (row: CutoffConvention) => Estimate): number =>
    Math.max(...rows.map((row) => pick(row).value)) - Math.min(...rows.map((row) => pick(row).value));
  return {
    rows,
    edgeFwhmEv: FWHM_PER_SIGMA * sigma,
    spreadEv: spread((row) => row.correctedEv),
    uncorrectedSpreadEv: spread((row) => row.uncorrectedEv),
  };

  function mean3Or(i: number): number {
    return i > 0 && i < n - 1 ? mean3(i) : counts[i];
  }
  function add(
    name: CutoffConvention["name"],
    uncorrectedEv: Estimate,
    resolutionShiftEv: number,
    acceptanceShiftEv: number,
  ): void {
    if (!Number.isFinite(uncorrectedEv.value + uncorrectedEv.standardUncertainty)) return;
    const shiftError = (Math.abs(resolutionShiftEv) / sigma) * sigmaEv.standardUncertainty;
    rows.push({
      name,
      uncorrectedEv,
      resolutionShiftEv,
      acceptanceShiftEv,
      correctedEv: {
        value: uncorrectedEv.value - resolutionShiftEv - acceptanceShiftEv,
        standardUncertainty: Math.hypot(uncorrectedEv.standardUncertainty, shiftError),
      },
    });
  }
}
