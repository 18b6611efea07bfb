import { cannot, type Notice } from "../base/mod.ts";
import type { LightPoint } from "./points.ts";
import { bandLight } from "./sources.ts";

/** A pulsed laser. */
export interface PulsedLaserSettings {
  /** Photon energy, eV, > 0. */
  readonly photonEnergyEv: number;
  /** Full width at half maximum of its spectrum, eV, > 0. */
  readonly bandwidthFwhmEv: number;
  /** Full width at half maximum of a pulse, fs, > 0. */
  readonly pulseDurationFs: number;
  /** Mean power on the sample, W, > 0. */
  readonly meanPowerW: number;
  /** Pulses per second, Hz, > 0. */
  readonly repetitionHz: number;
}

/** Light of a pulsed laser with its photon numbers. */
export interface LaserPulses {
  /** Its one line. */
  readonly points: readonly LightPoint[];
  /** Photons in a pulse. */
  readonly photonsPerPulse: number;
  /** Photons per second. */
  readonly photonsPerS: number;
  /** Warnings. */
  readonly warnings: readonly Notice[];
}

const ELEMENTARY_CHARGE_C = 1.602176634e-19;
/** Least product of the widths of a Gaussian pulse, 4 ln(2) hbar, eV fs. */
const FOURIER_EV_FS = 4 * Math.LN2 * 0.658211956950907;

/**
 * A pulsed laser as a line with photons per pulse. A pulse cannot be shorter than its bandwidth allows (Fourier limit of
 * a Gaussian pulse, 1.825 eV fs): a warning says so.
 *
 * Space charge and more than one photon per electron are not part of this.
 *
 * @param settings Photon energy, bandwidth, pulses and power.
 * @returns The line, photon numbers and warnings.
 * @throws {RangeError} If a number is impossible.
 * @example One milliwatt at 6 eV and 80 MHz
 * ```ts
 * import { pulsedLaserLight } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const { photonsPerPulse } = pulsedLaserLight({ photonEnergyEv: 6, bandwidthFwhmEv: 0.02, pulseDurationFs: 150,
 *   meanPowerW: 1e-3, repetitionHz: 80e6 });
 * assert.equal(photonsPerPulse.toExponential(2), "1.30e+7");
 * ```
 */
export function pulsedLaserLight(settings: PulsedLaserSettings): LaserPulses {
  const { photonEnergyEv, bandwidthFwhmEv, pulseDurationFs, meanPowerW, repetitionHz } = settings;
  for (
    const [name, value] of Object.entries({ bandwidthFwhmEv, pulseDurationFs, meanPowerW, repetitionHz })
  ) {
    if (!(value > 0 && Number.isFinite(value))) {
      throw new RangeError(cannot("use pulsed laser", `${name} must be > 0`, value));
    }
  }
  const [band] = bandLight(photonEnergyEv, bandwidthFwhmEv);
  const photonsPerS = meanPowerW / (photonEnergyEv * ELEMENTARY_CHARGE_C);
  const shortestFs = FOURIER_EV_FS / bandwidthFwhmEv;
  const possible = pulseDurationFs >= 0.99 * shortestFs;
  return {
    points: [{ ...band, name: "laser" }],
    photonsPerPulse: photonsPerS / repetitionHz,
    photonsPerS,
    warnings: possible ? [] : [{
      code: "laser-bandwidth",
      message: `a bandwidth of ${bandwidthFwhmEv} eV needs pulses of at least ${
        shortestFs.toFixed(1)
      } fs: they are ${pulseDurationFs} fs`,
      place: "",
    }],
  };
}
