import type { EnergyReference } from "./energy_reference.ts";
import { type FermiOptions, fitFermiEdge, type FittedFermiEdge } from "./fermi.ts";
import { type EdgeCandidate, edgeCandidates, meanCounts, SHARP_EV, SLOW_EV } from "./locate.ts";
import type { KineticRegion } from "./regions.ts";
import { ghosts, type Satellite } from "./satellites.ts";

/** A place where the counts of a region fall. */
export type Fall = { readonly region: KineticRegion; readonly candidate: EdgeCandidate };

/** A fall weaker than this share of another one a satellite's distance below is that one's ghost. */
const GHOST_SHARE = 0.04;
const GHOST_DISTANCE_EV = 0.15;

/**
 * Falls of the main line; slow and faint ones only where no sharp one is found.
 *
 * @param regions Regions.
 * @param satellites Weaker lines of the lamp.
 * @returns Falls that are no satellite's copy of a stronger one.
 */
export function mainFalls(regions: readonly KineticRegion[], satellites: readonly Satellite[]): Fall[] {
  const fallsAt = (sideEv: number): Fall[] =>
    regions.flatMap((region) => {
      const all = edgeCandidates(region.energiesEv, region.counts, sideEv).filter((edge) =>
        edge.significance < 0
      );
      return all.filter((candidate) => !isGhost(candidate, all, region, satellites)).map((candidate) => ({
        region,
        candidate,
      }));
    });
  const sharp = fallsAt(SHARP_EV);
  return sharp.length > 0 ? sharp : fallsAt(SLOW_EV);
}

/** Falls this close below the highest one belong to the same edge, eV. */
const SAME_EDGE_EV = 0.3;
/** Where the axis does not put it, an edge wider than this and than the cutoff allows is no Fermi edge, eV (chosen). */
const STRAY_SIGMA_EV = 0.08;
const STRAY_WIDTH = 1.5;
/**
 * The step at a Fermi edge is most of the counts just below it; a straight leading edge has none there. Our own spectra
 * give 0.9 and more for the one, 0.2 and less for the other (chosen).
 */
const STRAY_STEP_SHARE = 0.5;

/** Mean counts over the half electronvolt below a fall. */
export function levelBelow({ region, candidate }: Fall): number {
  return meanCounts(region.energiesEv, region.counts, candidate.energyEv - 0.5, candidate.energyEv - 0.1);
}

/** `true` when a fall is a satellite's copy of a much stronger one. */
function isGhost(
  candidate: EdgeCandidate,
  falls: readonly EdgeCandidate[],
  region: KineticRegion,
  satellites: readonly Satellite[],
): boolean {
  const drop = (edge: EdgeCandidate): number =>
    meanCounts(region.energiesEv, region.counts, edge.energyEv - 0.4, edge.energyEv - 0.1) -
    meanCounts(region.energiesEv, region.counts, edge.energyEv + 0.1, edge.energyEv + 0.4);
  return falls.some((other) =>
    satellites.some((satellite) =>
      Math.abs(candidate.energyEv - other.energyEv - satellite.shiftEv) < GHOST_DISTANCE_EV
    ) && drop(candidate) < GHOST_SHARE * drop(other)
  );
}

/** Falls of the highest edge. */
export function highestFalls(falls: readonly Fall[]): Fall[] {
  const onset = Math.max(...falls.map(({ candidate }) => candidate.energyEv));
  return falls.filter(({ candidate }) => candidate.energyEv > onset - SAME_EDGE_EV);
}

/**
 * A Fermi edge at the end of the spectrum where no reading of the axis has one: it is as sharp as the cutoff and has the
 * step of a metal, unlike the leading edge of a valence band.
 */
export function findStrayFermiEdge(
  falls: readonly Fall[],
  options: FermiOptions,
): { edge: FittedFermiEdge; region: KineticRegion; reference: null } | null {
  const found = findFermiEdge(highestFalls(falls), [], options);
  if (found === null) return null;
  const { edge, region } = found;
  const { value } = edge.positionEv;
  const drop = meanCounts(region.energiesEv, region.counts, value - 0.4, value - 0.2) -
    meanCounts(region.energiesEv, region.counts, value + 0.2, value + 0.5);
  const isSharp = edge.sigmaEv.value < Math.max(STRAY_SIGMA_EV, STRAY_WIDTH * options.startSigmaEv);
  return isSharp && edge.stepCounts > STRAY_STEP_SHARE * drop ? { edge, region, reference: null } : null;
}

/** The first reading of the axis at which a Fermi edge really is. */
export function findFermiEdge(
  falls: readonly Fall[],
  references: readonly EnergyReference[],
  options: FermiOptions,
): { edge: FittedFermiEdge; region: KineticRegion; reference: EnergyReference | null } | null {
  const tried: readonly (EnergyReference | null)[] = references.length > 0 ? references : [null];
  for (const reference of tried) {
    const near = falls.filter((fall) =>
      reference === null || Math.abs(fall.candidate.energyEv - reference.fermiLevelEv) < reference.toleranceEv
    ).sort((a, b) => b.candidate.energyEv - a.candidate.energyEv);
    for (const { region, candidate } of near) {
      const edge = fitFermiEdge(region.energiesEv, region.counts, candidate, options);
      if (edge !== null && isFermiEdge(edge, region, options)) return { edge, region, reference };
    }
  }
  return null;
}

/** A Fermi edge is converged, significant, narrow, and the end of the spectrum. */
function isFermiEdge(
  edge: FittedFermiEdge,
  region: KineticRegion,
  options: { readonly startSigmaEv: number },
): boolean {
  const position = edge.positionEv.value;
  const below = meanCounts(region.energiesEv, region.counts, position - 0.4, position - 0.2);
  const above = meanCounts(region.energiesEv, region.counts, position + 0.2, position + 0.5);
  return edge.converged && edge.stepCounts > 5 * edge.stepStandardError && above < 0.4 * below &&
    edge.sigmaEv.value < Math.max(0.12, 2.5 * options.startSigmaEv);
}

/**
 * How far a lamp line that the fit of the Fermi edge leaves out may move it: the part of its copy of the spectrum that a
 * straight line over the window does not follow, over the slope of the edge.
 *
 * @param edge The fit, without satellites.
 * @param region Its region.
 * @param satellites Lines of the lamp with the intensities of the lamp table.
 * @returns Shift, eV; 0 where the region does not reach far enough down to be copied.
 */
export function omittedSatelliteShiftEv(
  edge: FittedFermiEdge,
  region: KineticRegion,
  satellites: readonly Satellite[],
): number {
  const window = edge.energiesEv;
  const { copies, parameters } = ghosts(satellites, region.energiesEv, region.counts, window);
  const n = window.length;
  const total = window.map((_, i) => copies.reduce((sum, copy, s) => sum + parameters[s].start * copy[i], 0));
  const bend = total.reduce((most, value, i) => {
    const straight = total[0] + ((total[n - 1] - total[0]) * i) / (n - 1);
    return Math.max(most, Math.abs(value - straight));
  }, 0);
  return (bend * Math.sqrt(2 * Math.PI) * edge.sigmaEv.value) / edge.stepCounts;
}
