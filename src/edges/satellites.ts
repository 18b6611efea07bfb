import type { FitParameter } from "../fit/mod.ts";

/** A weaker line of the lamp: where its copy of the spectrum lies and how strong it is about to be. */
export interface Satellite {
  /** Photon energy minus that of the main line, eV. */
  readonly shiftEv: number;
  /** Intensity relative to the main line, from the lamp table: only a start value. */
  readonly relativeIntensity: number;
}

/** Counts are averaged over this half-width before they are shifted, eV. */
const SMOOTHING_EV = 0.03;

/** Copies of the measured spectrum, shifted by each satellite, on the energies of a fit window. */
export interface Ghosts {
  /** One parameter per satellite: its intensity relative to the main line, >= 0. */
  readonly parameters: readonly FitParameter[];
  /** Shifted counts, one array per satellite, shape (window). */
  readonly copies: readonly Float64Array[];
}

/**
 * Templates of the satellites' spectra: the measured counts less their level at the upper end, smoothed over a few
 * channels and shifted up by the line distance. A satellite of 1 % adds noise of 1 % of the noise it copies.
 *
 * A satellite is left out when the data do not reach far enough down to be copied.
 *
 * @param satellites Lines of the lamp above the main one.
 * @param energiesEv All energies, ascending, eV.
 * @param counts All counts.
 * @param window Energies of the fit, eV.
 * @returns Templates and their parameters.
 */
export function ghosts(
  satellites: readonly Satellite[],
  energiesEv: Float64Array,
  counts: Float64Array,
  window: Float64Array,
): Ghosts {
  const n = energiesEv.length;
  const stepEv = (energiesEv[n - 1] - energiesEv[0]) / (n - 1);
  const half = Math.max(1, Math.round(SMOOTHING_EV / stepEv));
  const tail = counts.slice(-Math.max(5, Math.floor(n / 50)));
  const floor = tail.reduce((sum, value) => sum + value, 0) / tail.length;
  const smooth = counts.map((_, i) => {
    const part = counts.subarray(Math.max(0, i - half), Math.min(n, i + half + 1));
    return Math.max(0, part.reduce((sum, value) => sum + value, 0) / part.length - floor);
  });
  const usable = satellites.filter((satellite) =>
    satellite.shiftEv > 0 && window[0] - satellite.shiftEv >= energiesEv[0]
  );
  return {
    parameters: usable.map((satellite, i) => ({
      name: `satellite${i + 1}`,
      start: satellite.relativeIntensity,
      lower: 0,
      upper: 0.5,
      scale: satellite.relativeIntensity,
    })),
    copies: usable.map((satellite) =>
      window.map((energy) => {
        const position = (energy - satellite.shiftEv - energiesEv[0]) / stepEv;
        const below = Math.min(n - 2, Math.max(0, Math.floor(position)));
        const share = position - below;
        return smooth[below] * (1 - share) + smooth[below + 1] * share;
      })
    ),
  };
}
