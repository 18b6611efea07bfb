/** A film on the sample. */
export interface LayerSettings {
  /** Material by its name. */
  readonly material: string;
  /** Thickness, nm, 0.01..10000. */
  readonly thicknessNm: number;
  /** Transport mean free path of elastic events in it, nm, > 0; null for none. Default: null. */
  readonly transportMeanFreePathNm: number | null;
}

/** A part of the surface with its own work function. */
export interface PatchSettings {
  /** Share of the area, > 0..1; all shares together must be 1. */
  readonly areaFraction: number;
  /** Work function, eV, 0.5..10. */
  readonly workFunctionEv: number;
}

/** What makes a real surface differ from a flat uniform one. */
export interface SurfaceSettings {
  /** Parts with different work functions; empty for a uniform surface. Default: empty. */
  readonly patches: readonly PatchSettings[];
  /**
   * `strong`: the extraction field reaches between the patches, each shows its own cutoff. `weak`: electrons from patches
   * of low work function still have to pass the area mean (C. Herring, M. Nichols, Rev. Mod. Phys. 21, 185 (1949)).
   * Default: `strong`.
   */
  readonly patchField: "strong" | "weak";
  /** Standard deviation of a Gaussian spread of the work function, eV, 0..0.5. Default: 0 eV. */
  readonly workFunctionSpreadEv: number;
  /** Root mean square tilt of the facets of a rough surface, degrees, 0..40, only at normal emission. Default: 0. */
  readonly facetTiltDeg: number;
  /** Field at the surface that pulls electrons out, V/m, 0..1e9; lowers the work function (image force). Default: 0 V/m. */
  readonly extractionFieldVPerM: number;
  /** Adsorbate dipoles, 1/nm^2, 0..20. Default: 0. */
  readonly dipoleDensityPerNm2: number;
  /** Moment of each, debye, -20..20; positive with the negative end outward, which raises W. Default: 0 D. */
  readonly dipoleMomentDebye: number;
}

/** A shift of all bands toward the surface of a semiconductor. */
export interface BandBendingSettings {
  /** Binding energies at the surface less those in the bulk, eV, -5..5: positive where the bands bend down. */
  readonly surfaceShiftEv: number;
  /** Width of the parabolic profile, nm, 0.1..10000. */
  readonly widthNm: number;
}

/** Charge that builds up on a poorly conducting sample. */
export interface ChargingSettings {
  /** Loss of kinetic energy, eV, -20..100: positive for a positively charged sample. Default: 0 eV. */
  readonly shiftEv: number;
  /** Full width at half maximum of its Gaussian spread, eV, 0..20. Default: 0 eV. */
  readonly fwhmEv: number;
}

/** The sample: a substrate, films on it, and its surface. */
export interface SampleSettings {
  /** Material by its built-in name, such as `Au`, or that of the material file. */
  readonly material: string;
  /** JSON file with one material of your own, beside the scenario (see `materials`). Default: null. */
  readonly materialFile: string | null;
  /** Face whose tabulated work function is used. Default: `polycrystalline`. */
  readonly face: string;
  /** Temperature, K, 0..3000. Default: 300 K. */
  readonly temperatureK: number;
  /**
   * Work function, eV, 0.5..10, instead of the tabulated one of the uppermost material; null takes the table. Default:
   * null.
   */
  readonly workFunctionEv: number | null;
  /** Transmission of the surface barrier. Default: `classical` (1 above the barrier). */
  readonly barrier: "classical" | "quantum";
  /** Transport mean free path of elastic events, nm, > 0; null for none. Default: null. */
  readonly transportMeanFreePathNm: number | null;
  /** CSV file with columns `energy_ev,states_per_ev` (energy from the Fermi level), beside the scenario. Default: null. */
  readonly densityOfStatesFile: string | null;
  /** CSV file with columns `energy_ev,length_nm` (energy above the Fermi level), beside the scenario. Default: null. */
  readonly meanFreePathFile: string | null;
  /** Films from the surface down; the uppermost sets the barrier. Default: empty. */
  readonly layers: readonly LayerSettings[];
  /** Patches, roughness, fields, dipoles. */
  readonly surface: SurfaceSettings;
  /**
   * Valence-band maximum of the substrate below the Fermi level, eV, 0..15, as doping sets it; null takes the table.
   * Only for materials with a gap. Default: null.
   */
  readonly valenceMaximumBelowFermiEv: number | null;
  /** Band bending of the substrate; null for flat bands. Default: null. */
  readonly bandBending: BandBendingSettings | null;
  /** Charging. */
  readonly charging: ChargingSettings;
  /**
   * Law of the inelastic mean free path of fast electrons (photon energies above 60 eV); a `meanFreePathFile` replaces
   * it in the substrate. Default: `TPP-2M`.
   */
  readonly fastMeanFreePath: "TPP-2M" | "Seah-Dench";
  /**
   * CSV file with columns `energy_ev,losses_per_ev`, beside the scenario: energy losses of fast electrons in the substrate,
   * any constant factor. Default: null.
   */
  readonly lossFile: string | null;
  /**
   * Material factor a_H of the surface excitations that fast electrons make on their way out, 0.05..20, 1 for a
   * free-electron metal; null leaves them out. Default: null.
   */
  readonly surfaceExcitationFactor: number | null;
}

/** What every source has. */
export interface LightCommon {
  /** Photons per second on the analyzed spot, all energies, > 0. Default: 1e10. */
  readonly photonFluxPerS: number;
  /** Electric field perpendicular (`s`) or parallel (`p`) to the plane of incidence, or unpolarized. Default: `none`. */
  readonly polarization: "none" | "s" | "p";
}

/** The light that reaches the analyzed spot. */
export type LightSettings =
  & LightCommon
  & (
    | {
      /** A discharge lamp. */
      readonly kind: "lamp";
      /** Lamp by its built-in name, such as `He I`. */
      readonly lamp: string;
      /** `true` keeps the lamp's weaker lines, `false` only the strongest one. Default: true. */
      readonly satellites: boolean;
    }
    | {
      /** An X-ray anode without monochromator. */
      readonly kind: "anode";
      /** `Mg` or `Al`. */
      readonly anode: "Mg" | "Al";
      /** `true` keeps the K-alpha 3, 4 and weaker satellites. Default: true. */
      readonly satellites: boolean;
    }
    | {
      /** The monochromated aluminum K-alpha line. */
      readonly kind: "monochromatedAluminum";
      /** Full width at half maximum, eV, 0.05..0.9. Default: 0.25 eV. */
      readonly fwhmEv: number;
    }
    | {
      /** A monochromator band. */
      readonly kind: "band";
      /** Mean photon energy, eV, 1..3000; above 60 eV core levels and losses of fast electrons are simulated. */
      readonly centerEv: number;
      /** Full width at half maximum of the Gaussian band, eV, 0..5. Default: 0 eV. */
      readonly fwhmEv: number;
    }
    | {
      /** A measured spectrum of the source. */
      readonly kind: "table";
      /** CSV file with columns `energy_ev,photons_per_ev`, beside the scenario. */
      readonly file: string;
    }
    | {
      /** A hot filament behind a filter: Planck's photon spectrum inside a window. */
      readonly kind: "thermal";
      /** Temperature of the filament, K, 500..6000. */
      readonly temperatureK: number;
      /** Lower end of the filter's window, eV. */
      readonly lowEv: number;
      /** Upper end, eV. */
      readonly highEv: number;
    }
    | {
      /** Single-photon emission by a pulsed laser. */
      readonly kind: "laser";
      /** Photon energy, eV, 1..12. */
      readonly photonEnergyEv: number;
      /** Full width at half maximum of its band, eV, 0..1. Default: 0.002 eV. */
      readonly bandwidthEv: number;
      /** Pulses per second, 1..1e10. Default: 1e6. */
      readonly repetitionHz: number;
    }
  );

/** Directions. */
export interface GeometrySettings {
  /** Angle of the light from the surface normal, degrees, 0..89. Default: 45 degrees. */
  readonly incidenceAngleDeg: number;
  /** Angle of the analyzer axis from the surface normal, degrees, 0..89. Default: 0 degrees. */
  readonly emissionAngleDeg: number;
}

/** The electron analyzer. */
export interface AnalyzerSettings {
  /** Work function of the analyzer, eV, 0.5..10. */
  readonly workFunctionEv: number;
  /** Half-angle of the acceptance cone, degrees, > 0..89. */
  readonly acceptanceHalfAngleDeg: number;
  /** Energy resolution: given, or that of a hemisphere at constant pass energy. */
  readonly resolution:
    | { readonly kind: "fwhm"; readonly fwhmEv: number }
    | {
      readonly kind: "hemisphere";
      readonly passEnergyEv: number;
      readonly slitWidthMm: number;
      readonly meanRadiusMm: number;
      readonly slitHalfAngleDeg: number;
    };
  /** Exponent n of the transmission, proportional to E^-n, 0..2; 1 at the Fermi edge. Default: 0. */
  readonly transmissionExponent: number;
  /** Share of arriving electrons that is counted, > 0..1. Default: 1. */
  readonly detectionFraction: number;
}

/** What is measured and for how long. */
export interface AcquisitionSettings {
  /** First channel, kinetic energy as the analyzer records it, eV. */
  readonly startEv: number;
  /** Last channel, eV. */
  readonly endEv: number;
  /** Channel step, eV, > 0. */
  readonly stepEv: number;
  /** Time per channel and sweep, s, > 0. */
  readonly dwellS: number;
  /** Sweeps, a whole number >= 1. Default: 1. */
  readonly sweeps: number;
  /** Count rate without light, counts/s, >= 0. Default: 0 counts/s. */
  readonly darkRateCountsPerS: number;
  /** Dead time of a non-paralyzable counter, s, 0..1e-3. Default: 0 s. */
  readonly deadTimeS: number;
}

/** How the simulation is run. */
export interface SimulationSettings {
  /** Photons followed, rounded up to whole batches of 4096, 8192..1e12. Default: 20000000. */
  readonly histories: number;
  /** Seed of all random numbers, a whole number 0..2^53 - 1. Default: 1. */
  readonly seed: number;
  /** Widest step of the energy grid of the transport, eV, 0.002..0.1. Default: 0.02 eV. */
  readonly energyStepEv: number;
  /** Largest loss that is followed above 60 eV photon energy, eV, 5..500. Default: 100 eV. */
  readonly maxLossEv: number;
}

/** A simulation as the user writes it, with all defaults filled in. */
export interface Scenario {
  /** Path of the schema file, for editors. */
  readonly $schema?: string | undefined;
  /** What this scenario is, one line. */
  readonly title: string;
  /** Anything to remember, such as where the numbers come from. Default: empty. */
  readonly note: string;
  /** The sample. */
  readonly sample: SampleSettings;
  /** The light. */
  readonly light: LightSettings;
  /** Directions. */
  readonly geometry: GeometrySettings;
  /** The analyzer. */
  readonly analyzer: AnalyzerSettings;
  /** Sample bias, V, -100..10; negative accelerates electrons toward the analyzer. Default: 0 V. */
  readonly biasV: number;
  /** What is measured. */
  readonly acquisition: AcquisitionSettings;
  /** How it is run. */
  readonly simulation: SimulationSettings;
}
