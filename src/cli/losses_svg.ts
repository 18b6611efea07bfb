import type { ExpectedSpectrum } from "../model/mod.ts";
import { lossFigure, partialIntensitiesFigure, renderSvg } from "../report/mod.ts";
import { strongestLevels } from "./depths_svg.ts";
import type { Simulation } from "./simulate.ts";

/** A lower bar cannot be seen. */
const LEAST_SHOWN = 0.003;

/**
 * The figure of what a spectrum's electrons went through: by number of losses for the lines of core levels, and with or
 * without an event for slow electrons, whose cascades have no such number.
 *
 * @param simulation The simulation.
 * @returns Text of an SVG file, or null when no core level gives electrons.
 */
export async function lossesSvg({ resolved, expected }: Simulation): Promise<string | null> {
  const { title, fast } = resolved;
  if (fast === null) return await renderSvg(slowFigure(title, expected));
  const { shown, note } = strongestLevels(expected);
  if (shown.length === 0) return null;
  const most = Math.max(
    ...shown.map(({ partialIntensities }) => partialIntensities.findLastIndex((n) => n > LEAST_SHOWN)),
  );
  return await renderSvg(partialIntensitiesFigure({
    title,
    subtitle: [
      `simulated: electrons by number of energy losses that add up to at most ${fast.maxLossEv} eV`,
      ...note,
    ],
    lines: shown.map(({ name, partialIntensities }) => ({
      label: name,
      intensities: partialIntensities.slice(0, most + 1),
    })),
  }));
}

function slowFigure(
  title: string,
  { kineticEnergiesEv, counts, directCounts }: ExpectedSpectrum,
): Record<string, unknown> {
  return lossFigure({
    title,
    subtitle: [
      "simulated: expected counts of photoelectrons before any event,",
      "and of scattered and struck electrons, dark counts included",
    ],
    axisTitle: "Kinetic energy as recorded / eV",
    energiesEv: kineticEnergiesEv,
    parts: [
      { label: "before any event", counts: directCounts },
      { label: "after events", counts: counts.map((all, c) => all - directCounts[c]) },
    ],
  });
}
