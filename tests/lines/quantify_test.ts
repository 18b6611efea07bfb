import assert from "node:assert/strict";
import { overlayerThicknessNm } from "../../src/lines/mod.ts";
import { assertClose } from "../support/assert_close.ts";

Deno.test("overlayerThicknessNm() inverts the attenuation of film and substrate at every angle", () => {
  // Straight-line limit (exact): film R0 (1 - x), substrate x, x = exp(-d/(L cos)).
  for (const thicknessNm of [0.5, 2, 6]) {
    for (const angleDeg of [0, 40, 63]) {
      const x = Math.exp(-thicknessNm / (2.8 * Math.cos(angleDeg * Math.PI / 180)));
      const ratio = { value: 0.66 * (1 - x) / x, standardUncertainty: 0 };
      const found = overlayerThicknessNm(ratio, 0.66, 2.8, angleDeg).value;
      assertClose(found, thicknessNm, { relative: 1e-12 }, `${thicknessNm} nm, ${angleDeg} degrees`);
    }
  }
});

Deno.test("overlayerThicknessNm() propagates the uncertainty of the ratio", () => {
  // Difference quotient.
  const at = (value: number) => overlayerThicknessNm({ value, standardUncertainty: 0.2 }, 0.7, 3, 30);
  const slope = (at(2 + 1e-5).value - at(2 - 1e-5).value) / 2e-5;
  assertClose(at(2).standardUncertainty, 0.2 * slope, { relative: 1e-8 });
});

Deno.test("overlayerThicknessNm() refuses numbers out of range", () => {
  const ratio = { value: 1, standardUncertainty: 0.1 };
  const cases: [Parameters<typeof overlayerThicknessNm>, string][] = [
    [[{ ...ratio, value: -1 }, 1, 3, 0], "the ratio must be >= 0: current value is -1"],
    [[ratio, 0, 3, 0], "bulkRatio must be > 0: current value is 0"],
    [[ratio, 1, NaN, 0], "effectiveAttenuationLengthNm must be > 0 nm: current value is NaN"],
    [[ratio, 1, 3, 90], "emissionAngleDeg must be in 0..< 90 degrees: current value is 90"],
  ];
  for (const [args, message] of cases) {
    assert.throws(() => overlayerThicknessNm(...args), {
      message: `Cannot compute a thickness as ${message}`,
    });
  }
});
