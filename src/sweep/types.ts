import type { RecordedName } from "./recorded.ts";

/** Anything that JSON can hold. */
export type JsonValue =
  | string
  | number
  | boolean
  | null
  | readonly JsonValue[]
  | { readonly [key: string]: JsonValue };

/** Values of one scenario path, written out. */
export interface ListAxis {
  /** Kind of axis. */
  readonly kind: "list";
  /** Keys from the top of the scenario joined by dots, such as `sample.temperatureK`. */
  readonly path: string;
  /** Values, all different, any JSON. */
  readonly values: readonly JsonValue[];
}

/** Numbers at equal distances, or at equal ratios, both ends included; rounded to 12 significant digits. */
export interface RangeAxis {
  /** Kind of axis. */
  readonly kind: "range";
  /** Path in the scenario. */
  readonly path: string;
  /** First value. */
  readonly from: number;
  /** Last value. */
  readonly to: number;
  /** How many values, >= 2. */
  readonly count: number;
  /** Equal distances, or equal ratios (both ends > 0). Default: `linear`. */
  readonly scale: "linear" | "log";
}

/** Axes of the same length that advance together. */
export interface ZipAxis {
  /** Kind of axis. */
  readonly kind: "zip";
  /** The axes, two or more. */
  readonly axes: readonly (ListAxis | RangeAxis)[];
}

/** One dimension of a sample. */
export interface SampledRange {
  /** Path in the scenario. */
  readonly path: string;
  /** Lowest value. */
  readonly from: number;
  /** Highest value, > `from`. */
  readonly to: number;
  /** Uniform in the value, or in its logarithm (`from` > 0). Default: `linear`. */
  readonly scale: "linear" | "log";
}

/** Points that fill a box evenly. */
export interface SampleAxis {
  /** Kind of axis. */
  readonly kind: "sample";
  /** How the points are chosen. */
  readonly method: "sobol" | "latin-hypercube";
  /** How many points; powers of two suit `sobol`. */
  readonly count: number;
  /** Dimensions of the box, at most ten. */
  readonly axes: readonly SampledRange[];
}

/** One factor of the grid of points. */
export type SweepAxis = ListAxis | RangeAxis | ZipAxis | SampleAxis;

/** What is kept of each point. */
export interface RecordSettings {
  /** Columns of the table, each with its standard uncertainty where it has one; the first is drawn. */
  readonly values: readonly RecordedName[];
  /** `true` keeps the spectrum of every point as a file. Default: false. */
  readonly spectra: boolean;
}

/** A sweep as the user writes it, with all defaults filled in. */
export interface Sweep {
  /** Path of the schema file, for editors. */
  readonly $schema?: string | undefined;
  /** What this sweep is, one line. */
  readonly title: string;
  /** Anything to remember. Default: empty. */
  readonly note: string;
  /** Scenario file that every point starts from, beside the sweep file. */
  readonly scenario: string;
  /** Axes; the points are all combinations, the last axis changing fastest. */
  readonly axes: readonly SweepAxis[];
  /**
   * `independent` draws the histories of every transport and the counting noise of every point anew; `common` gives all
   * points the seed of the scenario, so that differences along an axis come from the settings alone but the noise of the
   * points is not independent. Default: `independent`.
   */
  readonly seeds: "independent" | "common";
  /** Seed of Latin hypercubes and of independent points, a whole number 0..2^53 - 1. Default: 1. */
  readonly seed: number;
  /** What is kept. */
  readonly record: RecordSettings;
}
