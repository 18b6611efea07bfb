import { FWHM_PER_SIGMA } from "../math/mod.ts";
import {
  anodeLight,
  bandLight,
  lampLight,
  type LightPoint,
  monochromatedAluminumLight,
  tabulatedLight,
  thermalLight,
} from "../light/mod.ts";
import { cannot, InputError, type Notice } from "../base/mod.ts";
import type { UserTables } from "./resolve.ts";
import type { LightSettings } from "./types.ts";

/** Photons of one line, or of a stretch of a continuous spectrum over which a sample's optical constants hardly change. */
export interface LightGroup {
  /** Name. */
  readonly name: string;
  /** Mean photon energy, eV. */
  readonly energyEv: number;
  /** Share of the photons; all groups add up to 1. */
  readonly weight: number;
  /** Its photon energies, eV, with shares that add up to 1. */
  readonly photons: readonly { readonly energyEv: number; readonly weight: number }[];
  /** `true` where the optical tables of the sample must reach; weak lines beyond them may be left out. */
  readonly needed: boolean;
}

/** Photon energies that stand for a Gaussian band, and how far they reach in standard deviations. */
const BAND_POINTS = 33;
const BAND_REACH_SIGMAS = 4;
/** A continuous spectrum is cut into at most so many stretches of one absorption depth each, not narrower than this, eV. */
const MOST_STRETCHES = 8;
const STRETCH_EV = 0.25;
/** Step of Planck's spectrum, eV: finer than kT at room temperature, and points at most. */
const THERMAL_STEP_EV = 0.01;
const MOST_THERMAL_POINTS = 500;
/** A pulse that emits more electrons than this per spot broadens and shifts the spectrum (common practice, no source). */
const SPACE_CHARGE_PHOTONS = 1e7;

/**
 * The photon energies of a light source, the strongest group first.
 *
 * @param light Settings.
 * @param tables The user's tables.
 * @returns Groups with shares, and warnings.
 * @throws {InputError} If a table is missing or a window is empty.
 */
export function lightGroups(
  light: LightSettings,
  tables: UserTables,
): { readonly groups: readonly LightGroup[]; readonly warnings: readonly Notice[] } {
  switch (light.kind) {
    case "lamp":
      return {
        groups: lampLight(light.lamp, light.satellites).map((point, i) => line(point, i === 0)),
        warnings: [],
      };
    case "anode":
    case "monochromatedAluminum":
      return { groups: fastLight(light).map((point, i) => line(point, i === 0)), warnings: [] };
    case "band":
      return {
        groups: bandLight(light.centerEv, light.fwhmEv).map((point) => line(point, true)),
        warnings: [],
      };
    case "laser": {
      const photonsPerPulse = light.photonFluxPerS / light.repetitionHz;
      return {
        groups: bandLight(light.photonEnergyEv, light.bandwidthEv).map((point) => line(point, true)),
        warnings: photonsPerPulse < SPACE_CHARGE_PHOTONS ? [] : [{
          code: "space-charge",
          place: "/light/repetitionHz",
          message: `${
            photonsPerPulse.toPrecision(2)
          } photons arrive in one pulse: electrons may repel each other, which is not modeled`,
        }],
      };
    }
    case "table": {
      if (tables.light === undefined) {
        throw new InputError([{
          place: "/light/file",
          message: cannot("use scenario", "the file must be readable", light.file),
        }]);
      }
      return {
        groups: stretches(tabulatedLight(tables.light.energiesEv, tables.light.values)),
        warnings: [],
      };
    }
    case "thermal": {
      const stepEv = Math.max(THERMAL_STEP_EV, (light.highEv - light.lowEv) / MOST_THERMAL_POINTS);
      const window = { lowEv: light.lowEv, highEv: light.highEv, stepEv };
      return { groups: stretches(thermalLight(light.temperatureK, window)), warnings: [] };
    }
  }
}

/**
 * Lines of a source for fast electrons, with their natural widths.
 *
 * @param light Settings.
 * @returns The lines; empty for sources that have no line profile of their own.
 */
export function fastLight(light: LightSettings): readonly LightPoint[] {
  switch (light.kind) {
    case "anode":
      return anodeLight(light.anode, light.satellites);
    case "monochromatedAluminum":
      return monochromatedAluminumLight(light.fwhmEv);
    case "band":
      return bandLight(light.centerEv, light.fwhmEv);
    default:
      return [];
  }
}

function line(point: LightPoint, needed: boolean): LightGroup {
  const { name, energyEv, weight } = point;
  return { name, energyEv, weight, photons: bandPoints(energyEv, point.gaussFwhmEv), needed };
}

/** A Gaussian band as equidistant photon energies with weights that add up to one. */
function bandPoints(centerEv: number, fwhmEv: number): { energyEv: number; weight: number }[] {
  if (fwhmEv === 0) return [{ energyEv: centerEv, weight: 1 }];
  const sigma = fwhmEv / FWHM_PER_SIGMA;
  const points = Array.from({ length: BAND_POINTS }, (_, i) => {
    const distance = BAND_REACH_SIGMAS * (-1 + (2 * i) / (BAND_POINTS - 1));
    return { energyEv: centerEv + distance * sigma, weight: Math.exp(-0.5 * distance * distance) };
  }).filter((point) => point.energyEv > 0);
  return shares(points);
}

function shares(
  points: readonly { readonly energyEv: number; readonly weight: number }[],
): { energyEv: number; weight: number }[] {
  const total = points.reduce((sum, point) => sum + point.weight, 0);
  return points.map(({ energyEv, weight }) => ({ energyEv, weight: weight / total }));
}

/** Cuts a continuous spectrum into stretches, the one with most photons first. */
function stretches(points: readonly LightPoint[]): LightGroup[] {
  const cuts = new Map<number, LightPoint[]>();
  const lowEv = points[0].energyEv;
  const widthEv = Math.max(STRETCH_EV, (points[points.length - 1].energyEv - lowEv) * 1.001 / MOST_STRETCHES);
  for (const point of points) {
    if (point.weight === 0) continue;
    const cut = Math.floor((point.energyEv - lowEv) / widthEv);
    cuts.set(cut, [...(cuts.get(cut) ?? []), point]);
  }
  return [...cuts.values()].map((inside) => {
    const weight = inside.reduce((sum, point) => sum + point.weight, 0);
    const energyEv = inside.reduce((sum, point) => sum + point.energyEv * point.weight, 0) / weight;
    return { name: `${energyEv.toFixed(2)} eV`, energyEv, weight, photons: shares(inside), needed: true };
  }).sort((a, b) => b.weight - a.weight);
}
