import { z } from "zod";

/**
 * How sure a number is: seen in a published source; from memory with high, medium or low confidence; or chosen by us as a
 * modeling decision.
 */
export type Confidence = "published" | "memory-high" | "memory-medium" | "memory-low" | "chosen";

/** A number that cannot be without its source. */
export interface Cited {
  /** The number. */
  readonly value: number;
  /** Its unit; `1` for pure numbers. */
  readonly unit: string;
  /** Authors, journal, volume, page and year, or why it was chosen. */
  readonly source: string;
  /** How sure it is. */
  readonly confidence: Confidence;
}

/** Schema of {@link Confidence}. */
export const confidence: z.ZodType<Confidence> = z.enum([
  "published",
  "memory-high",
  "memory-medium",
  "memory-low",
  "chosen",
]);

/**
 * Schema of a cited number with a fixed unit and range.
 *
 * @param unit The only unit allowed.
 * @param low Least value.
 * @param high Greatest value.
 * @returns The schema.
 */
export function cited(unit: string, low: number, high: number): z.ZodType<Cited> {
  return z.strictObject({
    value: z.number().min(low).max(high),
    unit: z.literal(unit),
    source: z.string().min(5),
    confidence,
  });
}
