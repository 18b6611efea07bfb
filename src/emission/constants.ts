/**
 * CODATA 2022: P. Mohr et al., Rev. Mod. Phys. 97, 025002 (2025). The first three are exact (International System of
 * Units, 2019).
 */
export const PLANCK_J_S = 6.62607015e-34;
export const ELEMENTARY_CHARGE_C = 1.602176634e-19;
export const BOLTZMANN_J_PER_K = 1.380649e-23;
export const ELECTRON_MASS_KG = 9.1093837139e-31;
export const VACUUM_PERMITTIVITY_F_PER_M = 8.8541878188e-12;
