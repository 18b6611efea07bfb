import { helmholtzDipoleEv, schottkyLoweringEv } from "../emission/mod.ts";
import type { ResolvedSurfacePart } from "./resolve.ts";
import type { SurfaceSettings } from "./types.ts";

const NM2_PER_M2 = 1e18;

/** A Gaussian spread is followed out to this many standard deviations. */
const SPREAD_REACH = 3;
const MOST_SPREAD_POINTS = 25;
/** Tilts of equal share that stand for all facets of a rough surface. */
const TILTS = 4;

/**
 * Parts of the surface with one work function and tilt each.
 *
 * Patches times a Gaussian spread (points no further apart than a third of the resolution's width) times facet tilts.
 * The tilt of a facet of a random surface is Rayleigh-distributed (two independent Gaussian slopes; P. Beckmann, A.
 * Spizzichino, The Scattering of Electromagnetic Waves from Rough Surfaces (1963), from memory); its quantiles at the
 * middle of equal shares stand for it. Adsorbate dipoles add `N mu / epsilon_0` (H. Helmholtz, Ann. Phys. 7, 337
 * (1879)), a field F takes off `sqrt(e^3 F / (4 pi epsilon_0))` (W. Schottky, Z. Phys. 15, 872 (1914)).
 *
 * @param surface Settings.
 * @param workFunctionEv Work function of the uniform surface, eV; patches replace it.
 * @param resolutionFwhmEv Resolution, full width at half maximum, eV.
 * @returns The parts and the area mean of their own work functions.
 */
export function surfaceParts(
  surface: SurfaceSettings,
  workFunctionEv: number,
  resolutionFwhmEv: number,
): { parts: readonly ResolvedSurfacePart[]; meanWorkFunctionEv: number } {
  const { dipoleDensityPerNm2, dipoleMomentDebye, extractionFieldVPerM } = surface;
  const shift = helmholtzDipoleEv(NM2_PER_M2 * dipoleDensityPerNm2, dipoleMomentDebye) -
    schottkyLoweringEv(extractionFieldVPerM);
  const patches = (surface.patches.length > 0 ? surface.patches : [{ areaFraction: 1, workFunctionEv }]).map(
    (patch) => ({ share: patch.areaFraction, workFunctionEv: patch.workFunctionEv + shift }),
  );
  const meanWorkFunctionEv = patches.reduce((sum, patch) => sum + patch.share * patch.workFunctionEv, 0);
  const spread = gaussianPoints(surface.workFunctionSpreadEv, resolutionFwhmEv / 3);
  const tilts = surface.facetTiltDeg === 0
    ? [0]
    : Array.from({ length: TILTS }, (_, i) =>
      surface.facetTiltDeg * Math.sqrt(-Math.log(1 - (i + 0.5) / TILTS)));
  const parts = patches.flatMap((patch) =>
    spread.flatMap((point) =>
      tilts.map((facetTiltDeg) => {
        const own = patch.workFunctionEv + point.value;
        return {
          share: (patch.share * point.share) / tilts.length,
          workFunctionEv: surface.patchField === "weak" ? Math.max(own, meanWorkFunctionEv) : own,
          facetTiltDeg,
        };
      })
    )
  );
  return { parts, meanWorkFunctionEv };
}

function gaussianPoints(sigmaEv: number, spacingEv: number): { value: number; share: number }[] {
  if (sigmaEv === 0) return [{ value: 0, share: 1 }];
  const half = Math.min((MOST_SPREAD_POINTS - 1) / 2, Math.ceil((SPREAD_REACH * sigmaEv) / spacingEv));
  const points = Array.from({ length: 2 * half + 1 }, (_, i) => {
    const sigmas = (SPREAD_REACH * (i - half)) / half;
    return { value: sigmas * sigmaEv, share: Math.exp(-0.5 * sigmas * sigmas) };
  });
  const total = points.reduce((sum, point) => sum + point.share, 0);
  return points.map((point) => ({ ...point, share: point.share / total }));
}
