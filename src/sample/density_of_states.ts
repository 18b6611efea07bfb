/** A Gaussian group of bands. */
export interface BandLobe {
  /** Center below the Fermi level, eV; negative for empty states above it. */
  readonly centerBindingEv: number;
  /** Full width at half maximum, eV, > 0. */
  readonly fwhmEv: number;
  /** Electrons (states) per atom in the whole lobe, > 0. */
  readonly electrons: number;
}

/** Below the top of a valence band the states rise over this energy, eV (chosen: parabolic bands bend over some 0.5 eV). */
const BAND_EDGE_EV = 0.5;

/** Free-electron-like band with Gaussian lobes on top. */
export interface BandModel {
  /** Depth of the band bottom below the Fermi level, eV, > 0. */
  readonly bandBottomBelowFermiEv: number;
  /** Electrons per atom in the free-electron-like band below the Fermi level, > 0. */
  readonly spElectrons: number;
  /** Groups of d bands, or of valence bands. */
  readonly lobes: readonly BandLobe[];
  /** Gap without states: top of the valence band below the Fermi level and width, eV; null for a metal. */
  readonly gap: { readonly valenceMaximumBelowFermiEv: number; readonly widthEv: number } | null;
}

/**
 * Density of states of a band model: `3 n / (2 E_b^(3/2)) sqrt(E + E_b)` for the free-electron-like band, which holds n
 * electrons up to the Fermi level, plus the lobes. Zero below the band bottom.
 *
 * With a gap the lobes are the valence band, cut at its top by a square-root edge, and the free-electron-like band
 * begins again at the bottom of the conduction band.
 *
 * The square root is the textbook free-electron law; the lobes are a modeling choice (see the materials' own notes).
 *
 * @param model The bands.
 * @returns Function of the energy from the Fermi level, eV, giving states per eV and atom.
 */
export function densityOfStates(model: BandModel): (energyEv: number) => number {
  const { bandBottomBelowFermiEv: bottom, spElectrons, lobes, gap } = model;
  const front = (1.5 * spElectrons) / bottom ** 1.5;
  const heights = lobes.map((lobe) => (lobe.electrons / lobe.fwhmEv) * Math.sqrt((4 * Math.LN2) / Math.PI));
  const top = gap === null ? Infinity : -gap.valenceMaximumBelowFermiEv;
  const bottomOfConduction = gap === null ? -bottom : top + gap.widthEv;
  return (energyEv) => {
    if (energyEv < -bottom || (energyEv >= top && energyEv <= bottomOfConduction)) return 0;
    if (energyEv > top) return front * Math.sqrt(energyEv - bottomOfConduction);
    let states = gap === null ? front * Math.sqrt(energyEv + bottom) : 0;
    lobes.forEach((lobe, i) => {
      const distance = (energyEv + lobe.centerBindingEv) / lobe.fwhmEv;
      states += heights[i] * Math.exp(-4 * Math.LN2 * distance * distance);
    });
    return gap === null ? states : states * Math.min(1, Math.sqrt((top - energyEv) / BAND_EDGE_EV));
  };
}
