import assert from "node:assert/strict";
import fc from "fast-check";
import { formatEstimate } from "../../src/report/mod.ts";
import { assertClose } from "../support/assert_close.ts";

/** Value, standard uncertainty, unit, and how it is printed. */
const PUBLISHED: readonly (readonly [string, number, number, string, string])[] = [
  ["JCGM 100:2008, 7.2.2", 100.02147, 0.00035, "g", "100.02147(35) g"],
  ["CODATA 2018", 9.1093837015e-31, 0.0000000028e-31, "kg", "9.1093837015(28) × 10⁻³¹ kg"],
  ["CODATA 2022", 9.1093837139e-31, 0.0000000028e-31, "kg", "9.1093837139(28) × 10⁻³¹ kg"],
  ["CODATA 2018, from memory", 6.67430e-11, 0.00015e-11, "m³ kg⁻¹ s⁻²", "6.67430(15) × 10⁻¹¹ m³ kg⁻¹ s⁻²"],
  ["CODATA 2018, from memory", 10973731.568160, 0.000021, "m⁻¹", "10973731.568160(21) m⁻¹"],
  ["CODATA 2018, from memory", -2.00231930436256, 0.00000000000035, "", "-2.00231930436256(35)"],
];
for (const [source, value, standardUncertainty, unit, text] of PUBLISHED) {
  Deno.test(`formatEstimate() prints ${text} as ${source} does`, () => {
    assert.equal(formatEstimate({ value, standardUncertainty }, unit), text);
  });
}

/** By JCGM 100:2008, 7.2.6, with two digits always: rounded to nearest, worked by hand. */
const WORKED: readonly (readonly [string, number, number, string])[] = [
  ["two digits are kept", 5.106, 0.003, "5.1060(30)"],
  ["the uncertainty rounds up into another decade", 5.106, 0.0996, "5.11(10)"],
  ["the uncertainty just does not round up", 5.106, 0.0994, "5.106(99)"],
  ["the value rounds up into another decade", 9.9996, 0.012, "10.000(12)"],
  ["the uncertainty is above 1", 120.34, 2.14, "120.3(21)"],
  ["the uncertainty has two digits before the point", 120.34, 21.4, "120(21)"],
  ["the uncertainty is above 99", 1234, 150, "1.23(15) × 10³"],
  ["the uncertainty rounds to 100", 1234, 99.7, "1.23(10) × 10³"],
  ["the value of a power rounds up into another decade", 9996, 150, "1.000(15) × 10⁴"],
  ["the uncertainty is larger than the value", 0.003, 0.12, "0.00(12)"],
  ["the value is negative and rounds to zero", -0.003, 0.12, "0.00(12)"],
  ["the value is negative", -3.18, 0.12, "-3.18(12)"],
  ["the value is zero", 0, 0.0012, "0.0000(12)"],
  ["both are tiny", 2.5e-7, 1.2e-8, "2.50(12) × 10⁻⁷"],
  ["the value is exact", 21.22, 0, "21.22"],
];
for (const [when, value, standardUncertainty, text] of WORKED) {
  Deno.test(`formatEstimate() gives ${text} when ${when}`, () => {
    assert.equal(formatEstimate({ value, standardUncertainty }, ""), text);
    assert.equal(formatEstimate({ value, standardUncertainty }, "eV"), `${text} eV`);
  });
}

const SUPERSCRIPTS = "⁰¹²³⁴⁵⁶⁷⁸⁹";

Deno.test("formatEstimate() prints what reads back within half of its last digit, over 30 decades", () => {
  const number = fc.tuple(fc.double({ min: 1, max: 10, noNaN: true }), fc.integer({ min: -15, max: 15 })).map(
    (
      [mantissa, exponent],
    ) => Number(`${mantissa}e${exponent}`),
  );
  const share = fc.double({ min: 1e-9, max: 1e3, noNaN: true });
  fc.assert(
    fc.property(number, share, fc.boolean(), (size, relative, isNegative) => {
      const value = isNegative ? -size : size;
      const standardUncertainty = size * relative;
      const text = formatEstimate({ value, standardUncertainty }, "");
      const parts = /^(-?\d+)(?:\.(\d+))?\((\d\d)\)(?: × 10(\S+))?$/.exec(text);
      assert.ok(parts !== null, text);
      const [, whole, decimals = "", digits, superscript = ""] = parts;
      const power = Number(
        [...superscript].map((sign) => sign === "⁻" ? "-" : SUPERSCRIPTS.indexOf(sign)).join(""),
      );
      const lastDigit = 10 ** (power - decimals.length);
      // Half a digit, and the rounding of the binary value itself.
      assertClose(Number(`${whole}.${decimals}e${power}`), value, {
        absolute: 0.5 * lastDigit,
        relative: 1e-14,
      }, text);
      assertClose(Number(digits) * lastDigit, standardUncertainty, {
        absolute: 0.5 * lastDigit,
        relative: 1e-14,
      }, text);
      assert.ok(Number(digits) >= 10, text);
    }),
    { seed: 1, numRuns: 200 },
  );
});

/** A value, an uncertainty, and what the message says. */
const REFUSED: readonly (readonly [number, number, string])[] = [
  [NaN, 0.1, "Cannot write an estimate as value must be finite: current value is NaN"],
  [-Infinity, 0.1, "Cannot write an estimate as value must be finite: current value is -Infinity"],
  [5.1, NaN, "Cannot write an estimate as standardUncertainty must be finite and >= 0: current value is NaN"],
  [
    5.1,
    Infinity,
    "Cannot write an estimate as standardUncertainty must be finite and >= 0: current value is Infinity",
  ],
  [
    5.1,
    -0.1,
    "Cannot write an estimate as standardUncertainty must be finite and >= 0: current value is -0.1",
  ],
];
for (const [value, standardUncertainty, message] of REFUSED) {
  Deno.test(`formatEstimate() refuses ${value} with an uncertainty of ${standardUncertainty}`, () => {
    assert.throws(() => formatEstimate({ value, standardUncertainty }, "eV"), {
      name: "RangeError",
      message,
    });
  });
}
