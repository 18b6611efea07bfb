/** Complex refractive index n + ik at one photon energy. */
export interface OpticalIndex {
  /** Real part, > 0. */
  readonly n: number;
  /** Extinction coefficient, >= 0. */
  readonly k: number;
}

/** How much unpolarized light enters the sample and how deep it goes. */
export interface Absorption {
  /** Share of the light that is reflected, 0..1, mean of s and p polarization. */
  readonly reflectedFraction: number;
  /** Mean absorption depth along the surface normal, nm; Infinity where nothing is absorbed. */
  readonly meanDepthNm: number;
}

/**
 * Fresnel reflectance and absorption depth of a thick sample in vacuum.
 *
 * With the normal wave vector inside `q = sqrt(N^2 - sin^2 theta)`, N = n + ik (complex Snell), the intensity decays as
 * `exp(-4 pi Im(q) z / lambda)`; `r_s = (cos - q)/(cos + q)`, `r_p = (N^2 cos - q)/(N^2 cos + q)`.
 *
 * Source: M. Born, E. Wolf, Principles of Optics, sect. 1.5 and 14.2 (cited from memory).
 *
 * @param index Refractive index at the photon energy.
 * @param wavelengthNm Vacuum wavelength, nm, > 0.
 * @param incidenceAngleDeg Angle of incidence from the surface normal, degrees, 0..90.
 * @returns Reflected fraction and mean depth.
 */
export function absorption(index: OpticalIndex, wavelengthNm: number, incidenceAngleDeg: number): Absorption {
  const angle = (incidenceAngleDeg * Math.PI) / 180;
  const cos = Math.cos(angle);
  const squaredRe = index.n * index.n - index.k * index.k;
  const squaredIm = 2 * index.n * index.k;
  // q = sqrt(N^2 - sin^2), root with positive imaginary part.
  const re2 = squaredRe - Math.sin(angle) ** 2;
  const modulus = Math.hypot(re2, squaredIm);
  const qRe = Math.sqrt(Math.max(0, 0.5 * (modulus + re2)));
  // Im q by whichever form does not cancel: 2 Re q Im q = Im N^2.
  const qIm = re2 > 0 ? squaredIm / (2 * qRe) : Math.sqrt(Math.max(0, 0.5 * (modulus - re2)));
  const reflectedS = ((cos - qRe) ** 2 + qIm ** 2) / ((cos + qRe) ** 2 + qIm ** 2);
  const pRe = squaredRe * cos;
  const pIm = squaredIm * cos;
  const reflectedP = ((pRe - qRe) ** 2 + (pIm - qIm) ** 2) / ((pRe + qRe) ** 2 + (pIm + qIm) ** 2);
  return {
    reflectedFraction: 0.5 * (reflectedS + reflectedP),
    meanDepthNm: wavelengthNm / (4 * Math.PI * qIm),
  };
}
