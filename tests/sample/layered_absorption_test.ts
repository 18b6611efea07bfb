import assert from "node:assert/strict";
import fc from "fast-check";
import { complexAdd, complexDivide, complexMultiply, complexSqrt } from "../../src/math/mod.ts";
import {
  absorption,
  layeredAbsorption,
  type LayeredLight,
  type OpticalLayer,
  type Polarization,
} from "../../src/sample/mod.ts";
import { assertClose } from "../support/assert_close.ts";

function light(
  incidenceAngleDeg: number,
  polarization: Polarization = "none",
  wavelengthNm = 58.4334,
): LayeredLight {
  return { incidenceAngleDeg, polarization, wavelengthNm };
}

// n, k and depths at 21.218 eV (58.4334 nm) at normal incidence and 45 degrees, nm: H.-J. Hagemann et al., JOSA 65, 742 (1975) and
// others from the refractiveindex.info database (CC0); depths lambda/(4 pi k) and lambda/(4 pi Im sqrt(N^2 - 1/2)) by an
// independent program.
Deno.test.each([
  ["Au", 1.2478, 0.8829, 5.27, 4.72],
  ["Ag", 1.3556, 0.7695, 6.04, 5.42],
  ["Cu", 0.9014, 0.4045, 11.50, 8.52],
  ["Al", 0.7123, 0.0208, 223.9, 42.9],
  ["Si", 0.6453, 0.0858, 54.2, 13.6],
  ["SiO2", 0.8491, 0.4738, 9.81, 7.31],
  ["graphite", 0.4960, 0.9714, 4.79, 3.98],
])("layeredAbsorption() of %s has the depths of the table", (_, n, k, depthNm, depth45Nm) => {
  // k of aluminum is printed with three digits.
  const tolerance = { relative: k < 0.05 ? 5e-3 : 2e-3 };
  assertClose(layeredAbsorption([], { n, k }, light(0)).meanDepthsNm[0], depthNm, tolerance);
  assertClose(layeredAbsorption([], { n, k }, light(45)).meanDepthsNm[0], depth45Nm, tolerance);
});

Deno.test("layeredAbsorption() of a bare substrate reflects as Fresnel's formulas say", () => {
  // Bare mirrors: absorption() is tested by itself; s and p by M. Born, E. Wolf, Principles of Optics, sect. 1.5, for glass.
  for (const angleDeg of [0, 20, 45, 70, 89]) {
    const index = { n: 1.2478, k: 0.8829 };
    assertClose(
      layeredAbsorption([], index, light(angleDeg)).reflectedFraction,
      absorption(index, 58.4334, angleDeg).reflectedFraction,
      { absolute: 1e-12 },
      `${angleDeg} degrees`,
    );
    const inside = Math.asin(Math.sin((angleDeg * Math.PI) / 180) / 1.5);
    const [a, b] = [(angleDeg * Math.PI) / 180, inside];
    const glass = (polarization: Polarization): number =>
      layeredAbsorption([], { n: 1.5, k: 0 }, light(angleDeg, polarization)).reflectedFraction;
    if (angleDeg > 0) {
      assertClose(glass("s"), (Math.sin(a - b) / Math.sin(a + b)) ** 2, { absolute: 1e-12 });
      assertClose(glass("p"), (Math.tan(a - b) / Math.tan(a + b)) ** 2, { absolute: 1e-12 });
    } else assertClose(glass("s"), 0.04, { absolute: 1e-12 });
  }
});

Deno.test("layeredAbsorption() reflects no p-polarized light at Brewster's angle", () => {
  const angleDeg = (Math.atan(1.5) * 180) / Math.PI;
  const reflected = (polarization: Polarization): number =>
    layeredAbsorption([], { n: 1.5, k: 0 }, light(angleDeg, polarization)).reflectedFraction;
  assertClose(reflected("p"), 0, { absolute: 1e-12 });
  assertClose(reflected("s"), (1.25 / 3.25) ** 2, { absolute: 1e-12 });
  assertClose(reflected("none"), 0.5 * (1.25 / 3.25) ** 2, { absolute: 1e-12 });
});

Deno.test("layeredAbsorption() knows the quarter-wave and the half-wave film", () => {
  // Born & Wolf, sect. 1.6: R = ((n_s - n^2)/(n_s + n^2))^2 for a quarter wave; a half wave is not seen.
  const reflected = (n: number, waves: number): number =>
    layeredAbsorption(
      [{ index: { n, k: 0 }, thicknessNm: (waves * 500) / n }],
      { n: 2.25, k: 0 },
      light(0, "s", 500),
    )
      .reflectedFraction;
  assertClose(reflected(1.5, 0.25), 0, { absolute: 1e-12 });
  assertClose(reflected(1.38, 0.25), ((2.25 - 1.38 ** 2) / (2.25 + 1.38 ** 2)) ** 2, { absolute: 1e-12 });
  assertClose(reflected(1.38, 0.5), (1.25 / 3.25) ** 2, { absolute: 1e-12 });
});

Deno.test("layeredAbsorption() of a weak absorber like vacuum is the law of Beer and Lambert", () => {
  const films: OpticalLayer[] = [
    { index: { n: 1, k: 1e-4 }, thicknessNm: 30 },
    { index: { n: 1, k: 3e-4 }, thicknessNm: 20 },
  ];
  for (const angleDeg of [0, 45]) {
    const { absorbedFractions } = layeredAbsorption(films, { n: 1, k: 2e-4 }, light(angleDeg, "none", 10));
    const cosine = Math.cos((angleDeg * Math.PI) / 180);
    const passed = films.map(({ index, thicknessNm }) =>
      Math.exp(-(4 * Math.PI * index.k * thicknessNm) / (10 * cosine))
    );
    // To first order in k; the small reflections are of order k^2.
    assertClose(absorbedFractions[0], 1 - passed[0], { relative: 2e-3 });
    assertClose(absorbedFractions[1], passed[0] * (1 - passed[1]), { relative: 2e-3 });
    assertClose(absorbedFractions[2], passed[0] * passed[1], { relative: 2e-3 });
  }
});

const index = fc.record({
  n: fc.double({ min: 0.05, max: 4, noNaN: true }),
  k: fc.double({ min: 0, max: 4, noNaN: true }),
});
const film = fc.record({ index, thicknessNm: fc.double({ min: 0, max: 200, noNaN: true }) });
const anyLight = fc.record({
  wavelengthNm: fc.double({ min: 10, max: 500, noNaN: true }),
  incidenceAngleDeg: fc.double({ min: 0, max: 89.9, noNaN: true }),
  polarization: fc.constantFrom<Polarization>("s", "p", "none"),
});

Deno.test("layeredAbsorption() gives every share in 0..1 and does not see films of zero thickness", () => {
  fc.assert(
    fc.property(fc.array(film, { maxLength: 4 }), index, anyLight, (films, substrate, rays) => {
      const { reflectedFraction, absorbedFractions, meanDepthsNm } = layeredAbsorption(
        films,
        substrate,
        rays,
      );
      assert.equal(absorbedFractions.length, films.length + 1);
      for (const share of [reflectedFraction, ...absorbedFractions]) {
        assert.ok(share >= -1e-9 && share <= 1 + 1e-9, String(share));
      }
      meanDepthsNm.forEach((depth) => assert.ok(depth > 0));
      const bare = layeredAbsorption(films.map((f) => ({ ...f, thicknessNm: 0 })), substrate, rays);
      assertClose(bare.reflectedFraction, layeredAbsorption([], substrate, rays).reflectedFraction, {
        absolute: 1e-9,
      });
    }),
    { seed: 1, numRuns: 200 },
  );
});

Deno.test("layeredAbsorption() reflects as Airy's sum over multiple reflections", () => {
  // r = (r1 + r2 e)/(1 + r1 r2 e), e = exp(4 pi i q d/lambda), with Fresnel's amplitudes at both faces: Born & Wolf, sect. 14.4.1.
  fc.assert(
    fc.property(film, index, anyLight, ({ index: { n, k }, thicknessNm }, below, rays) => {
      const sine = Math.sin((rays.incidenceAngleDeg * Math.PI) / 180);
      const media = [{ n: 1, k: 0 }, { n, k }, below].map((m) => {
        const square = { re: m.n ** 2 - m.k ** 2, im: 2 * m.n * m.k };
        return { square, q: complexSqrt({ re: square.re - sine * sine, im: square.im }) };
      });
      const minus = { re: -1, im: 0 };
      const reflected = (kind: "s" | "p"): number => {
        const [r1, r2] = [0, 1].map((i) => {
          const [a, b] = [media[i], media[i + 1]];
          const [x, y] = kind === "s"
            ? [a.q, b.q]
            : [complexMultiply(b.square, a.q), complexMultiply(a.square, b.q)];
          return complexDivide(complexAdd(x, complexMultiply(minus, y)), complexAdd(x, y));
        });
        const scale = (4 * Math.PI * thicknessNm) / rays.wavelengthNm;
        const { q } = media[1];
        const size = Math.exp(-scale * q.im);
        const turn = { re: size * Math.cos(scale * q.re), im: size * Math.sin(scale * q.re) };
        const back = complexMultiply(r2, turn);
        const r = complexDivide(
          complexAdd(r1, back),
          complexAdd({ re: 1, im: 0 }, complexMultiply(r1, back)),
        );
        return r.re ** 2 + r.im ** 2;
      };
      const expected = rays.polarization === "none"
        ? 0.5 * (reflected("s") + reflected("p"))
        : reflected(rays.polarization);
      assertClose(
        layeredAbsorption([{ index: { n, k }, thicknessNm }], below, rays).reflectedFraction,
        expected,
        { absolute: 1e-8 },
      );
    }),
    { seed: 1, numRuns: 200 },
  );
});

Deno.test("layeredAbsorption() takes a film cut in two as one, and an opaque film as the substrate", () => {
  fc.assert(
    fc.property(film, film, index, anyLight, (top, cut, substrate, rays) => {
      const half = { ...cut, thicknessNm: 0.5 * cut.thicknessNm };
      const whole = layeredAbsorption([top, cut], substrate, rays);
      const halves = layeredAbsorption([top, half, half], substrate, rays);
      assertClose(halves.reflectedFraction, whole.reflectedFraction, { absolute: 1e-9 });
      assertClose(halves.absorbedFractions[1] + halves.absorbedFractions[2], whole.absorbedFractions[1], {
        absolute: 1e-9,
      });
      const opaque = { index: { n: cut.index.n, k: cut.index.k + 0.1 }, thicknessNm: 1e5 };
      const thick = layeredAbsorption([top, opaque], substrate, rays);
      assertClose(
        thick.reflectedFraction,
        layeredAbsorption([top], opaque.index, rays).reflectedFraction,
        { absolute: 1e-9 },
      );
      assert.equal(thick.absorbedFractions[2], 0);
    }),
    { seed: 1, numRuns: 100 },
  );
});

Deno.test("layeredAbsorption() of a thin film is the difference of Poynting's heat: 4 pi n k d |E|^2/lambda", () => {
  // A film so thin that the field is that of the bare mirror: |1 + r|^2 = 4/|1 + N|^2 at normal incidence.
  const [n, k] = [1.2478, 0.8829];
  const thin = { index: { n: 2, k: 0.5 }, thicknessNm: 1e-4 };
  const field = 4 / ((1 + n) ** 2 + k * k);
  assertClose(
    layeredAbsorption([thin], { n, k }, light(0)).absorbedFractions[0],
    (4 * Math.PI * 2 * 0.5 * 1e-4 * field) / 58.4334,
    { relative: 1e-4 },
  );
});

Deno.test("layeredAbsorption() stays finite at the critical angle", () => {
  for (const polarization of ["s", "p"] as const) {
    const film: OpticalLayer = { index: { n: Math.sin(Math.PI / 4), k: 0 }, thicknessNm: 3 };
    const shares = layeredAbsorption([film], { n: 1.2, k: 0.9 }, light(45, polarization));
    assert.ok(shares.reflectedFraction > 0 && shares.reflectedFraction < 1, String(shares.reflectedFraction));
    assertClose(shares.absorbedFractions[0], 0, { absolute: 1e-9 });
  }
});

Deno.test("layeredAbsorption() refuses impossible input with the rule and the value", () => {
  const gold = { n: 1.2478, k: 0.8829 };
  assert.throws(() => layeredAbsorption([], gold, light(90)), {
    name: "RangeError",
    message:
      'Cannot compute absorption of layers as incidenceAngleDeg must be >= 0 and < 90 degrees: current value is "90 degrees"',
  });
  assert.throws(() => layeredAbsorption([{ index: gold, thicknessNm: -1 }], gold, light(0)), {
    message: 'Cannot compute absorption of layers as thicknessNm must be >= 0 nm: current value is "-1 nm"',
  });
  assert.throws(() => layeredAbsorption([], { n: 0, k: 1 }, light(0)), {
    message: "Cannot compute absorption of layers as n must be > 0: current value is 0",
  });
  assert.throws(() => layeredAbsorption([], { n: 1, k: -1 }, light(0)), {
    message: "Cannot compute absorption of layers as k must be >= 0: current value is -1",
  });
});
