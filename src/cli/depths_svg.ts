import type { ExpectedSpectrum } from "../model/mod.ts";
import { depthFigure, renderSvg } from "../report/mod.ts";
import type { Simulation } from "./simulate.ts";

/** Curves that can be told apart. */
const MOST_LEVELS = 6;
/** Cells of the simulation that make a point of a curve: fewer would mostly show its noise. */
const CELLS_A_POINT = 4;
/** Beyond so many information depths there is nothing to see. */
const DEPTHS_SHOWN = 1.5;

/**
 * The figure of the depths that the lines of core levels come from.
 *
 * @param simulation The simulation.
 * @returns Text of an SVG file, or null when no core level gives electrons.
 */
export async function depthsSvg({ resolved, expected }: Simulation): Promise<string | null> {
  const { shown, note } = strongestLevels(expected);
  if (shown.length === 0) return null;
  const [strongest] = shown;
  const endNm = DEPTHS_SHOWN * Math.max(...shown.map(({ informationDepth95Nm }) => informationDepth95Nm));
  return await renderSvg(depthFigure({
    title: resolved.title,
    subtitle: [
      "simulated: depths that electrons without an energy loss come from",
      ...note,
    ],
    curves: shown.map(({ name, emissionDepth }) => {
      const { depthsNm, densityPerNm } = emissionDepth;
      const points = depthsNm.filter((depthNm) => depthNm <= endNm).length / CELLS_A_POINT;
      const means = (list: readonly number[]): number[] =>
        Array.from(
          { length: Math.max(1, Math.floor(points)) },
          (_, i) => mean(list.slice(CELLS_A_POINT * i, CELLS_A_POINT * (i + 1))),
        );
      return { label: name, depthsNm: means(depthsNm), densitiesPerNm: means(densityPerNm) };
    }),
    marks: [
      { label: `mean escape depth of ${strongest.name}`, depthNm: strongest.meanEscapeDepthNm },
      { label: `information depth (95 %) of ${strongest.name}`, depthNm: strongest.informationDepth95Nm },
    ],
  }));
}

/**
 * The levels that a figure has room for, strongest first, and a line that says so where some are left out.
 *
 * @param expected The spectrum.
 * @returns Levels that give electrons.
 */
export function strongestLevels({ levels }: ExpectedSpectrum): {
  readonly shown: ExpectedSpectrum["levels"];
  readonly note: readonly string[];
} {
  // Two layers of one material have levels of one name; the deeper one gets a number.
  const named = levels.map((level, i) => {
    const above = levels.slice(0, i).filter(({ name }) => name === level.name).length;
    return above === 0 ? level : { ...level, name: `${level.name} (${above + 1})` };
  });
  const strong = named.filter(({ noLossPerPhoton }) => noLossPerPhoton > 0)
    .toSorted((a, b) => b.noLossPerPhoton - a.noLossPerPhoton);
  return {
    shown: strong.slice(0, MOST_LEVELS),
    note: strong.length > MOST_LEVELS ? [`the ${MOST_LEVELS} strongest of ${strong.length} lines`] : [],
  };
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}
