import assert from "node:assert/strict";
import { erfc, erfcx, fastErfcx, normalCdf, normalPdf } from "../../src/math/mod.ts";
import { assertClose } from "../support/assert_close.ts";

/** x, erfc(x), exp(x^2) erfc(x): computed with mpmath 1.3.0 at 40 digits. */
const REFERENCE: readonly (readonly [number, number, number])[] = [
  [-3, 1.99997790950300141, 16205.9888539995866],
  [-1, 1.84270079294971487, 5.00898008076228347],
  [-0.1, 1.1124629160182849, 1.12364335419920948],
  [0, 1, 1],
  [0.1, 0.887537083981715102, 0.896456979969126637],
  [0.5, 0.479500122186953462, 0.615690344192925875],
  [1, 0.157299207050285131, 0.427583576155807004],
  [1.5, 0.0338948535246892729, 0.321585416454317502],
  [1.9375, 0.00614319360478680001, 0.262237606550381439],
  [2, 0.00467773498104726584, 0.255395676310505744],
  [2.0625, 0.00353624912520978899, 0.248880496184162361],
  [3, 0.0000220904969985854414, 0.17900115118138995],
  [5, 1.53745979442803485e-12, 0.110704637733068626],
  [6, 2.15197367124989131e-17, 0.0927765678005383544],
  [10, 2.08848758376254476e-45, 0.0561409927438225859],
  [20, 5.39586561160790093e-176, 0.0281743487410513193],
  [25, 8.30017257119652275e-274, 0.0225495724326413589],
];

// erf(x): M. Abramowitz, I. Stegun, Handbook of Mathematical Functions (1964), Table 7.1 (from memory, high confidence).
Deno.test.each([
  [0.1, 0.1124629160],
  [0.5, 0.5204998778],
  [1, 0.8427007929],
  [1.5, 0.9661051465],
  [2, 0.9953222650],
])("erfc() at %s is 1 less the tabulated erf %s", (x, erf) => {
  assertClose(erfc(x), 1 - erf, { absolute: 6e-11 });
});

Deno.test("erfc() and erfcx() agree with 40-digit values on both sides of the change of method", () => {
  for (const [x, plain, scaled] of REFERENCE) {
    assertClose(erfc(x), plain, { relative: 2e-13 }, `erfc(${x})`);
    assertClose(erfcx(x), scaled, { relative: 2e-13 }, `erfcx(${x})`);
  }
});

Deno.test("erfc() goes to its limits without NaN", () => {
  assert.equal(erfc(Infinity), 0);
  assert.equal(erfc(-Infinity), 2);
  assert.equal(erfc(30), 0);
  assert.ok(Number.isNaN(erfc(NaN)));
});

Deno.test("fastErfcx() agrees with 40-digit values, between its nodes and beyond its table", () => {
  for (const [x, , scaled] of REFERENCE.filter(([x]) => x >= 0)) {
    assertClose(fastErfcx(x), scaled, { relative: 1e-11 }, `fastErfcx(${x})`);
  }
  // mpmath 1.3.0 at 40 digits; 0.03125 and 5.96875 lie half-way between nodes, where a Taylor sum is worst.
  assertClose(fastErfcx(0.03125), 0.965692224617702887, { relative: 1e-11 });
  assertClose(fastErfcx(5.96875), 0.0932495734341142083, { relative: 1e-11 });
  assertClose(fastErfcx(100), 0.0056416137829894329, { relative: 1e-14 });
  assertClose(fastErfcx(1e4), 0.0000564189580726808412, { relative: 1e-14 });
});

Deno.test("fastErfcx() obeys y' = 2 x y - 2/sqrt(pi) everywhere", () => {
  // Abramowitz & Stegun eq. 7.1.19 for n = 0 and the product rule; central difference of step 1e-4.
  const h = 1e-4;
  for (let x = 0.001; x < 8; x += 0.0373) {
    const slope = (fastErfcx(x + h) - fastErfcx(x - h)) / (2 * h);
    assertClose(slope, 2 * x * fastErfcx(x) - 2 / Math.sqrt(Math.PI), { absolute: 2e-8 }, `slope at ${x}`);
  }
});

// mpmath 1.3.0 at 40 digits; the first digits are those of Abramowitz & Stegun, Table 26.1.
Deno.test.each([
  [-8, 6.22096057427178412e-16],
  [-4, 0.0000316712418331199213],
  [-3, 0.00134989803163009453],
  [-2, 0.0227501319481792072],
  [-1, 0.158655253931457051],
  [0, 0.5],
  [0.5, 0.691462461274013104],
  [1, 0.841344746068542949],
  [2, 0.977249868051820793],
  [4, 0.99996832875816688],
])("normalCdf() at %s is %s", (x, expected) => {
  assertClose(normalCdf(x), expected, { absolute: 1e-14 });
});

Deno.test("normalCdf() stays in 0..1, never falls, and is 0 and 1 far out", () => {
  let last = 0;
  for (let x = -10; x <= 10; x += 0.003) {
    const value = normalCdf(x);
    assert.ok(value >= last - 1e-15 && value >= 0 && value <= 1, `at ${x}`);
    last = value;
  }
  assert.equal(normalCdf(-Infinity), 0);
  assert.equal(normalCdf(Infinity), 1);
});

Deno.test("normalPdf() has the height 0.3989422804 and is the slope of normalCdf()", () => {
  // 1/sqrt(2 pi): Abramowitz & Stegun, Table 26.1 at x = 0.
  assertClose(normalPdf(0), 0.3989422804014327, { relative: 1e-15 });
  const h = 1e-4;
  for (const x of [-6.03, -2.2, -0.31, 0.03, 1.77, 4.4]) {
    assertClose((normalCdf(x + h) - normalCdf(x - h)) / (2 * h), normalPdf(x), { absolute: 1e-9 }, `at ${x}`);
  }
});
