import { cannot } from "../base/mod.ts";
import { fitStraightLine, type StraightLine } from "../fit/mod.ts";
import type { ScaleGain } from "./regions.ts";

/** One reference line, both energies on the same kind of axis. */
export interface ReferenceLine {
  /** Reference energy, eV, such as one of ISO 15472. */
  readonly referenceEv: number;
  /** Energy as measured, eV. */
  readonly measuredEv: number;
  /** Standard uncertainty of the measured less the reference energy, eV, > 0. */
  readonly standardUncertaintyEv?: number;
}

/** Energy scale from reference lines: `measured = offset + gain x reference`. */
export interface ScaleCalibration {
  /** Gain. */
  readonly gain: ScaleGain;
  /** The line with its offset, which cancels in a work function. */
  readonly line: StraightLine;
}

/** A gain further from 1 means that reference and measured energies are not on the same axis (chosen). */
const MOST_DEVIATION = 0.05;

/**
 * Gain of the energy scale from measured reference lines, by a weighted straight line.
 *
 * Without uncertainties the gain's follows from the scatter about the line, with n - 2 degrees of freedom; with them from
 * them, enlarged by the Birge ratio where the lines scatter more (then n - 2 degrees of freedom too).
 *
 * Source: ISO 15472:2010 (lines and straight line; cited from memory); JCGM 100:2008, H.3.
 *
 * @param lines Reference lines: at least 3, or 2 when all have uncertainties.
 * @returns Gain and line.
 * @throws {RangeError} If the lines are too few or all at one energy, only some have uncertainties, or the gain is not
 * within 5 % of 1.
 * @example
 * ```ts
 * import { calibrateScale } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const { gain } = calibrateScale([ // Au 4f7/2 and Cu 2p3/2, monochromated Al K-alpha, ISO 15472
 *   { referenceEv: 83.96, measuredEv: 84.06, standardUncertaintyEv: 0.02 },
 *   { referenceEv: 932.62, measuredEv: 932.92, standardUncertaintyEv: 0.02 },
 * ]);
 * assert.equal(gain.value.toFixed(6), "1.000236");
 * ```
 */
export function calibrateScale(lines: readonly ReferenceLine[]): ScaleCalibration {
  const stated = lines.filter((line) => line.standardUncertaintyEv !== undefined).length;
  if (stated !== 0 && stated !== lines.length) {
    throw new RangeError(
      cannot("calibrate", "all lines or none must have an uncertainty", `${stated} of ${lines.length}`),
    );
  }
  const line = fitStraightLine(
    lines.map(({ referenceEv }) => referenceEv),
    lines.map(({ measuredEv }) => measuredEv),
    stated === 0 ? null : lines.map(({ standardUncertaintyEv }) => standardUncertaintyEv!),
  );
  const { value, standardUncertainty } = line.slope;
  if (!(Math.abs(value - 1) < MOST_DEVIATION)) {
    throw new RangeError(
      cannot("calibrate", "the gain must be within 5 % of 1 (are both energies on one axis?)", value),
    );
  }
  const scatter = line.chiSquare / Math.max(1, line.degreesOfFreedom);
  const isScattered = stated > 0 && line.degreesOfFreedom > 0 && scatter > 1;
  return {
    gain: {
      value,
      standardUncertainty: standardUncertainty * (isScattered ? Math.sqrt(scatter) : 1),
      degreesOfFreedom: stated === 0 || isScattered ? line.degreesOfFreedom : Infinity,
    },
    line,
  };
}
