import { cannot } from "../base/mod.ts";
import { type Complex, complexAdd, complexDivide, complexMultiply, complexSqrt } from "../math/mod.ts";
import type { OpticalIndex } from "./absorption.ts";

/** Polarization of the light: perpendicular (s) or parallel (p) to the plane of incidence, or none. */
export type Polarization = "s" | "p" | "none";

/** A film of a stack. */
export interface OpticalLayer {
  /** Refractive index at the photon energy. */
  readonly index: OpticalIndex;
  /** Thickness, nm, >= 0. */
  readonly thicknessNm: number;
}

/** The light on a stack. */
export interface LayeredLight {
  /** Vacuum wavelength, nm, > 0. */
  readonly wavelengthNm: number;
  /** Angle of incidence from the surface normal, degrees, 0..90 (without 90). */
  readonly incidenceAngleDeg: number;
  /** Polarization; `none` is the mean of s and p. */
  readonly polarization: Polarization;
}

/** Where a stack takes its light. */
export interface LayeredAbsorption {
  /** Share of the light that is reflected, 0..1. */
  readonly reflectedFraction: number;
  /** Share absorbed in each film, top first, and in the substrate, last, shape (films + 1); with the reflected share 1. */
  readonly absorbedFractions: readonly number[];
  /**
   * Mean absorption depth along the normal in each of these materials by Beer and Lambert, nm; Infinity where nothing is
   * absorbed. The density in a film falls as `exp(-z/depth)`.
   */
  readonly meanDepthsNm: readonly number[];
}

/** Amplitude exponent (film phase, imaginary part) beyond which nothing comes back from below: intensity e^-60. */
const OPAQUE = 30;

/** At the critical angle of a transparent material q is zero; the limit is reached to rounding at this value. */
const LEAST_NORMAL = 1e-8;

/**
 * Reflection and absorption of light by a stack of plane films on a thick substrate, in vacuum.
 *
 * Complex Snell: the parallel wave vector is common, `q = sqrt(N^2 - sin^2)` is the normal one in each material (units
 * of the vacuum wave vector). The absorbed share of a film is the difference of the energy flux at its two faces, with all
 * multiple reflections, by the characteristic matrices of F. Abeles (admittance q for s, N^2/q for p). Films are much thinner
 * than the wavelength, so rays reflected once would be wrong. Inside a film the density is then taken as the decay of
 * Beer and Lambert, standing waves left out; in the substrate that decay is exact.
 *
 * Source: M. Born, E. Wolf, Principles of Optics, sect. 1.6 and 14.4 (cited from memory).
 *
 * @param films Films, top first; none for a bare substrate.
 * @param substrate Refractive index of the substrate.
 * @param light The light.
 * @returns Reflected and absorbed shares and depths.
 * @throws {RangeError} If a number is impossible.
 * @example Half a nanometer of a graphite-like film takes some percent of the helium light, gold most of the rest
 * ```ts
 * import { layeredAbsorption } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const { reflectedFraction, absorbedFractions: [carbon, gold] } = layeredAbsorption(
 *   [{ index: { n: 0.496, k: 0.9714 }, thicknessNm: 0.5 }], { n: 1.2478, k: 0.8829 },
 *   { wavelengthNm: 58.43, incidenceAngleDeg: 45, polarization: "none" });
 * assert.ok(carbon > 0.02 && carbon < 0.15 && gold > 0.6);
 * assert.equal((reflectedFraction + carbon + gold).toFixed(12), "1.000000000000");
 * ```
 */
export function layeredAbsorption(
  films: readonly OpticalLayer[],
  substrate: OpticalIndex,
  light: LayeredLight,
): LayeredAbsorption {
  const { wavelengthNm, incidenceAngleDeg, polarization } = light;
  const demand = (holds: boolean, rule: string, value: unknown): void => {
    if (!holds) throw new RangeError(cannot("compute absorption of layers", rule, value));
  };
  demand(
    wavelengthNm > 0 && Number.isFinite(wavelengthNm),
    "wavelengthNm must be > 0 nm",
    `${wavelengthNm} nm`,
  );
  demand(
    incidenceAngleDeg >= 0 && incidenceAngleDeg < 90,
    "incidenceAngleDeg must be >= 0 and < 90 degrees",
    `${incidenceAngleDeg} degrees`,
  );
  for (const { n, k } of [...films.map((film) => film.index), substrate]) {
    demand(n > 0 && Number.isFinite(n), "n must be > 0", n);
    demand(k >= 0 && Number.isFinite(k), "k must be >= 0", k);
  }
  for (const { thicknessNm } of films) {
    demand(
      thicknessNm >= 0 && Number.isFinite(thicknessNm),
      "thicknessNm must be >= 0 nm",
      `${thicknessNm} nm`,
    );
  }
  const angle = (incidenceAngleDeg * Math.PI) / 180;
  const squares = [...films.map((film) => film.index), substrate].map(({ n, k }) => ({
    re: n * n - k * k,
    im: 2 * n * k,
  }));
  const normals = squares.map((square) => {
    const q = complexSqrt({ re: square.re - Math.sin(angle) ** 2, im: square.im });
    return Math.hypot(q.re, q.im) < LEAST_NORMAL ? { re: LEAST_NORMAL, im: 0 } : q;
  });
  const shares = (polarization === "none" ? ["s", "p"] as const : [polarization]).map((kind) =>
    absorbedShares(
      films,
      normals,
      kind === "s" ? normals : squares.map((square, i) => complexDivide(square, normals[i])),
      kind === "s" ? Math.cos(angle) : 1 / Math.cos(angle),
      wavelengthNm,
    )
  );
  const absorbedFractions = shares[0].map((share, i) =>
    shares.length === 1 ? share : 0.5 * (share + shares[1][i])
  );
  return {
    reflectedFraction: 1 - absorbedFractions.reduce((sum, share) => sum + share, 0),
    absorbedFractions,
    meanDepthsNm: normals.map(({ im }) => wavelengthNm / (4 * Math.PI * im)),
  };
}

/** Share of the incident light that each film and the substrate take, for one polarization. */
function absorbedShares(
  films: readonly OpticalLayer[],
  normals: readonly Complex[],
  admittances: readonly Complex[],
  vacuumAdmittance: number,
  wavelengthNm: number,
): number[] {
  const phases = films.map((film, i) => {
    const scale = (2 * Math.PI * film.thicknessNm) / wavelengthNm;
    return { re: normals[i].re * scale, im: normals[i].im * scale };
  });
  // The first film that hides everything below it is the substrate of the calculation.
  let bottom = 0;
  for (let dark = 0; bottom < films.length; bottom++) {
    dark += phases[bottom].im;
    if (dark > OPAQUE) break;
  }
  // Tangential electric and magnetic field at the top of the bottom material, and upward through the films.
  let electric: Complex = { re: 1, im: 0 };
  let magnetic = admittances[bottom];
  const fluxes = [flux(electric, magnetic)];
  for (let i = bottom - 1; i >= 0; i--) {
    const { cos, sin } = complexCosSin(phases[i]);
    const minusISin = { re: sin.im, im: -sin.re };
    const next = complexAdd(
      complexMultiply(cos, electric),
      complexDivide(complexMultiply(minusISin, magnetic), admittances[i]),
    );
    magnetic = complexAdd(
      complexMultiply(cos, magnetic),
      complexMultiply(complexMultiply(minusISin, admittances[i]), electric),
    );
    electric = next;
    fluxes.unshift(flux(electric, magnetic));
  }
  const incoming = {
    re: vacuumAdmittance * electric.re + magnetic.re,
    im: vacuumAdmittance * electric.im + magnetic.im,
  };
  const scale = (4 * vacuumAdmittance) / (incoming.re ** 2 + incoming.im ** 2);
  return normals.map((_, i) => i > bottom ? 0 : scale * (fluxes[i] - (i < bottom ? fluxes[i + 1] : 0)));
}

/** Energy flux downward, Re(E H*). */
function flux(electric: Complex, magnetic: Complex): number {
  return electric.re * magnetic.re + electric.im * magnetic.im;
}

function complexCosSin({ re, im }: Complex): { cos: Complex; sin: Complex } {
  return {
    cos: { re: Math.cos(re) * Math.cosh(im), im: -Math.sin(re) * Math.sinh(im) },
    sin: { re: Math.sin(re) * Math.cosh(im), im: Math.cos(re) * Math.sinh(im) },
  };
}
