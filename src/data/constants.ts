/**
 * The constants that an ultraviolet photoemission spectrum needs, computed from the exact values of the International
 * System of Units (2019), which CODATA 2022 keeps: P. Mohr et al., Rev. Mod. Phys. 97, 025002 (2025).
 */
const PLANCK_J_S = 6.62607015e-34;
const ELEMENTARY_CHARGE_C = 1.602176634e-19;
const BOLTZMANN_J_PER_K = 1.380649e-23;
const SPEED_OF_LIGHT_M_PER_S = 299792458;

/** Boltzmann constant, eV/K, exact. */
export const BOLTZMANN_EV_PER_K: number = BOLTZMANN_J_PER_K / ELEMENTARY_CHARGE_C;

/** Photon energy times vacuum wavelength, eV nm, exact. */
export const HC_EV_NM: number = (PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S * 1e9) / ELEMENTARY_CHARGE_C;
