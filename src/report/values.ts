import { cannot, type Estimate } from "../base/mod.ts";

/** Decades of the largest of value and uncertainty that are written without a power of ten. */
const PLAIN_DECADES = { from: -5, to: 14 } as const;

/**
 * A value and its standard uncertainty in the short form: the uncertainty in parentheses, two significant digits, in
 * units of the last digit of the value.
 *
 * Rounds to nearest. An uncertainty above 99, or a size below 1e-5 or from 1e15 on, is written with a power of ten.
 * With an uncertainty of zero the value is exact and stands alone, with all its digits.
 *
 * Source: JCGM 100:2008, 7.2.2 (form) and 7.2.6 (digits). Deviation: always two digits, where 7.2.6 asks for at most two.
 *
 * @param estimate Value, finite, and standard uncertainty, finite and >= 0, in one unit.
 * @param unit Symbol of that unit; empty for a number.
 * @returns Such as `5.100(12) eV`, `120.3(21) eV`, `6.67430(15) × 10⁻¹¹ m³ kg⁻¹ s⁻²`.
 * @throws {RangeError} If value or uncertainty is not finite, the uncertainty is negative, or the value needs more than
 * 100 decimals.
 * @example The mass standard of JCGM 100, 7.2.2
 * ```ts
 * import { formatEstimate } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(formatEstimate({ value: 100.02147, standardUncertainty: 0.00035 }, "g"), "100.02147(35) g");
 * ```
 */
export function formatEstimate({ value, standardUncertainty }: Estimate, unit: string): string {
  if (!Number.isFinite(value)) {
    throw new RangeError(cannot("write an estimate", "value must be finite", value));
  }
  if (!(standardUncertainty >= 0 && standardUncertainty < Infinity)) {
    throw new RangeError(
      cannot("write an estimate", "standardUncertainty must be finite and >= 0", standardUncertainty),
    );
  }
  const number = standardUncertainty === 0 ? String(value) : shortForm(value, standardUncertainty);
  return `${number} ${unit}`.trimEnd();
}

function shortForm(value: number, uncertainty: number): string {
  const [mantissa, exponent] = uncertainty.toExponential(1).split("e");
  const digits = mantissa.replace(".", "");
  const lastDecade = Number(exponent) - 1;
  const size = Math.max(Math.abs(value), Number(`${mantissa}e${exponent}`));
  // Half of the last digit is what rounding may add, as in 9.996 to 10.00.
  const decade = decadeOf(size + 0.5 * 10 ** lastDecade);
  const isPlain = lastDecade <= 0 && decade >= PLAIN_DECADES.from && decade <= PLAIN_DECADES.to;
  const power = isPlain ? 0 : decade;
  const rounded = timesPowerOfTen(value, -power).toFixed(power - lastDecade).replace(/^-(?=[0.]*$)/, "");
  return `${rounded}(${digits})${isPlain ? "" : ` × 10${superscript(power)}`}`;
}

function decadeOf(size: number): number {
  return Number(size.toExponential().split("e")[1]);
}

/** Moves the decimal point in the text: dividing by a power of ten would round a second time. */
function timesPowerOfTen(value: number, power: number): number {
  const [mantissa, exponent] = value.toExponential().split("e");
  return Number(`${mantissa}e${Number(exponent) + power}`);
}

function superscript(integer: number): string {
  return String(integer).replace(/./g, (digit) => digit === "-" ? "⁻" : "⁰¹²³⁴⁵⁶⁷⁸⁹"[Number(digit)]);
}
