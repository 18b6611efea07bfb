import assert from "node:assert/strict";
import fc from "fast-check";
import { absorption } from "../../src/sample/mod.ts";
import { assertClose } from "../support/assert_close.ts";

Deno.test("absorption() at normal incidence reflects ((n - 1)^2 + k^2)/((n + 1)^2 + k^2) and reaches lambda/(4 pi k)", () => {
  // M. Born, E. Wolf, Principles of Optics, sect. 14.2 (from memory).
  for (const [n, k] of [[1.2478, 0.8829], [0.0463, 1.1554], [3.3261, 2.7237], [0.7123, 0.0208]]) {
    const { reflectedFraction, meanDepthNm } = absorption({ n, k }, 58.4334, 0);
    assertClose(
      reflectedFraction,
      ((n - 1) ** 2 + k * k) / ((n + 1) ** 2 + k * k),
      { absolute: 1e-14 },
      `R of ${n}, ${k}`,
    );
    assertClose(meanDepthNm, 58.4334 / (4 * Math.PI * k), { relative: 1e-12 }, `depth of ${n}, ${k}`);
  }
});

Deno.test("absorption() of a medium like vacuum reflects nothing and reaches cos(angle)/alpha", () => {
  // Beer-Lambert law along the straight ray: for n = 1 and small k the ray is not bent.
  const k = 1e-3;
  for (const angleDeg of [0, 30, 45, 60, 75]) {
    const { reflectedFraction, meanDepthNm } = absorption({ n: 1, k }, 100, angleDeg);
    const straight = (Math.cos((angleDeg * Math.PI) / 180) * 100) / (4 * Math.PI * k);
    assertClose(meanDepthNm, straight, { relative: 1e-3 }, `depth at ${angleDeg}`);
    assert.ok(reflectedFraction < 1e-4, `R at ${angleDeg}`);
  }
});

Deno.test("absorption() follows Snell's law: the depth shrinks by the cosine of the refracted ray", () => {
  // Weakly absorbing glass, n = 1.5: sin of the refracted angle is sin(60)/1.5 (W. Snell).
  const k = 1e-3;
  const refracted = Math.asin(Math.sin(Math.PI / 3) / 1.5);
  assertClose(
    absorption({ n: 1.5, k }, 100, 60).meanDepthNm,
    (Math.cos(refracted) * 100) / (4 * Math.PI * k),
    { relative: 1e-5 },
  );
});

Deno.test("absorption() at Brewster's angle reflects s-polarized light only", () => {
  // tan(angle) = n makes r_p = 0 and R_s = ((n^2 - 1)/(n^2 + 1))^2: D. Brewster (1815).
  for (const n of [0.5, 1.33, 1.5, 2.4]) {
    const angleDeg = (Math.atan(n) * 180) / Math.PI;
    const onlyS = 0.5 * ((n * n - 1) / (n * n + 1)) ** 2;
    assertClose(
      absorption({ n, k: 0 }, 100, angleDeg).reflectedFraction,
      onlyS,
      { absolute: 1e-12 },
      `n ${n}`,
    );
  }
});

Deno.test("absorption() reflects everything beyond the critical angle and at grazing incidence", () => {
  // Total external reflection for sin(angle) > n; the field then decays over lambda/(4 pi sqrt(sin^2 - n^2)).
  const total = absorption({ n: 0.5, k: 0 }, 100, 45);
  assertClose(total.reflectedFraction, 1, { absolute: 1e-14 });
  assertClose(total.meanDepthNm, 100 / (4 * Math.PI * 0.5), { relative: 1e-12 });
  assertClose(absorption({ n: 1.25, k: 0.88 }, 100, 90).reflectedFraction, 1, { absolute: 1e-12 });
  assert.equal(absorption({ n: 1.5, k: 0 }, 100, 30).meanDepthNm, Infinity);
});

Deno.test("absorption() conserves energy: what is not reflected is the heat of the decaying field", () => {
  // Poynting's theorem, independent of the reflectance: each polarization heats by
  // k0 Im(N^2) |E|^2 exp(-z/d) per unit depth, whose integral is 2 pi d Im(N^2) |E|^2/lambda, over an incident flux cos.
  // Fields inside: |E|^2 = |t_s|^2, and |t_p|^2 (|q|^2 + sin^2)/|N|^2, with the amplitudes of Born & Wolf, sect. 1.5.
  const check = (n: number, k: number, angleDeg: number): void => {
    const { reflectedFraction, meanDepthNm } = absorption({ n, k }, 50, angleDeg);
    const sin = Math.sin((angleDeg * Math.PI) / 180);
    const cos = Math.cos((angleDeg * Math.PI) / 180);
    const [squareRe, squareIm] = [n * n - k * k, 2 * n * k];
    // q = sqrt(N^2 - sin^2) in polar form.
    const size = Math.hypot(squareRe - sin * sin, squareIm) ** 0.5;
    const phase = 0.5 * Math.atan2(squareIm, squareRe - sin * sin);
    const [qRe, qIm] = [size * Math.cos(phase), size * Math.sin(phase)];
    const fieldS = (4 * cos * cos) / ((cos + qRe) ** 2 + qIm ** 2);
    const bottomP = (squareRe * cos + qRe) ** 2 + (squareIm * cos + qIm) ** 2;
    const fieldP = (4 * cos * cos * (size * size + sin * sin)) / bottomP;
    const heat = (field: number): number => (2 * Math.PI * meanDepthNm * squareIm * field) / (50 * cos);
    assertClose(
      0.5 * (heat(fieldS) + heat(fieldP)),
      1 - reflectedFraction,
      { absolute: 1e-9 },
      `${n}, ${k}, ${angleDeg}`,
    );
  };
  fc.assert(
    fc.property(
      fc.double({ min: 0.04, max: 5, noNaN: true }),
      fc.double({ min: 0.01, max: 5, noNaN: true }),
      fc.double({ min: 0, max: 89, noNaN: true }),
      check,
    ),
    { seed: 1, numRuns: 200 },
  );
});
