/** Full width at half maximum of a Gaussian in standard deviations, `2 sqrt(2 ln 2)`. */
export const FWHM_PER_SIGMA: number = 2 * Math.sqrt(2 * Math.LN2);
