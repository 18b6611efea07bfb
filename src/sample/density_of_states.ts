/** A Gaussian group of bands. */
export interface BandLobe {
  /** Center below the Fermi level, eV; negative for empty states above it. */
  readonly centerBindingEv: number;
  /** Full width at half maximum, eV, > 0. */
  readonly fwhmEv: number;
  /** Electrons (states) per atom in the whole lobe, > 0. */
  readonly electrons: number;
}

/** Free-electron-like band with Gaussian lobes on top. */
export interface BandModel {
  /** Depth of the band bottom below the Fermi level, eV, > 0. */
  readonly bandBottomBelowFermiEv: number;
  /** Electrons per atom in the free-electron-like band below the Fermi level, > 0. */
  readonly spElectrons: number;
  /** Groups of d bands. */
  readonly lobes: readonly BandLobe[];
}

/**
 * Density of states of a band model: `3 n / (2 E_b^(3/2)) sqrt(E + E_b)` for the free-electron-like band, which holds n
 * electrons up to the Fermi level, plus the lobes. Zero below the band bottom.
 *
 * The square root is the textbook free-electron law; the lobes are a modeling choice (see the materials' own notes).
 *
 * @param model The bands.
 * @returns Function of the energy from the Fermi level, eV, giving states per eV and atom.
 */
export function densityOfStates(model: BandModel): (energyEv: number) => number {
  const { bandBottomBelowFermiEv: bottom, spElectrons, lobes } = model;
  const front = (1.5 * spElectrons) / bottom ** 1.5;
  const heights = lobes.map((lobe) => (lobe.electrons / lobe.fwhmEv) * Math.sqrt((4 * Math.LN2) / Math.PI));
  return (energyEv) => {
    if (energyEv < -bottom) return 0;
    let states = front * Math.sqrt(energyEv + bottom);
    lobes.forEach((lobe, i) => {
      const distance = (energyEv + lobe.centerBindingEv) / lobe.fwhmEv;
      states += heights[i] * Math.exp(-4 * Math.LN2 * distance * distance);
    });
    return states;
  };
}
