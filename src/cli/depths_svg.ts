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
  const levels = expected.levels.filter(({ noLossPerPhoton }) => noLossPerPhoton > 0)
    .toSorted((a, b) => b.noLossPerPhoton - a.noLossPerPhoton);
  if (levels.length === 0) return null;
  const [strongest] = levels;
  const shown = levels.slice(0, MOST_LEVELS);
  const endNm = DEPTHS_SHOWN * Math.max(...shown.map(({ informationDepth95Nm }) => informationDepth95Nm));
  return await renderSvg(depthFigure({
    title: resolved.title,
    subtitle: [
      "simulated: depths that electrons without an energy loss come from",
      ...(levels.length > MOST_LEVELS ? [`the ${MOST_LEVELS} strongest of ${levels.length} lines`] : []),
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

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}
