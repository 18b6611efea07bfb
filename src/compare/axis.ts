import { curveAt } from "./curve.ts";
import type { MatchChannels } from "./matched_model.ts";
import { MOST_OFFSET_EV } from "./match.ts";
import type { Template } from "./template.ts";

/** A way to read the energies of a file. */
export interface AxisReading {
  /** Added to the energies of the file (binding energies first turned to `-E_B`) to put them on the axis as recorded, eV. */
  readonly shiftEv: number;
  /** In words. */
  readonly how: string;
}

/** Where the axis of a file was placed. */
export interface PlacedAxis extends AxisReading {
  /** Offset beyond the reading at which the template fits best, eV: where fits start. */
  readonly startOffsetEv: number;
  /** Deviance there, intensities fitted. */
  readonly deviance: number;
}

/** Nothing is said of offsets closer than this share of the template's step. */
const OFFSET_STEPS = 4;

/**
 * Tries offsets about each reading and orders the readings by how well the template fits, intensities free.
 *
 * @param base Template.
 * @param channels Channels on the axis of the file.
 * @param readings At least one.
 * @returns The readings, the best first.
 */
export function placeAxis(
  base: Template,
  channels: MatchChannels,
  readings: readonly AxisReading[],
): PlacedAxis[] {
  const stepEv = OFFSET_STEPS * base.stepEv;
  const most = Math.floor(MOST_OFFSET_EV / stepEv);
  return readings.map((reading) => {
    let best = { startOffsetEv: 0, deviance: Infinity };
    for (let k = -most; k <= most; k++) {
      const startOffsetEv = k * stepEv;
      const deviance = devianceAt(base, channels, reading.shiftEv - startOffsetEv);
      if (deviance < best.deviance) best = { startOffsetEv, deviance };
    }
    return { ...reading, ...best };
  }).sort((a, b) => a.deviance - b.deviance);
}

/** Deviance of the counts with the energies moved, the intensity of each region being the ratio of the sums. */
function devianceAt(base: Template, channels: MatchChannels, shiftEv: number): number {
  const { energiesEv, counts, regions, regionCount } = channels;
  const curve = { ...base, values: base.counts };
  const measured = new Float64Array(regionCount);
  const expected = new Float64Array(regionCount);
  let sum = 0;
  for (let i = 0; i < counts.length; i++) {
    const mean = Math.max(1e-3, curveAt(curve, energiesEv[i] + shiftEv));
    measured[regions[i]] += counts[i];
    expected[regions[i]] += mean;
    if (counts[i] > 0) sum += counts[i] * Math.log(counts[i] / mean);
  }
  for (let r = 0; r < regionCount; r++) {
    if (measured[r] > 0) sum -= measured[r] * Math.log(measured[r] / expected[r]);
  }
  return 2 * sum;
}
