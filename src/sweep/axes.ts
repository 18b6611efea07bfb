import { latinHypercubePoints } from "./latin_hypercube.ts";
import { sobolPoints } from "./sobol.ts";
import type { JsonValue, ListAxis, RangeAxis, SampleAxis, Sweep, SweepAxis } from "./types.ts";

/** What a point changes in the scenario: value by path. */
export type Settings = Readonly<Record<string, JsonValue>>;

/** The points of a sweep, made when asked for. */
export interface SweepPoints {
  /** How many. */
  readonly count: number;
  /** Paths that the points set, in the order of the axes. */
  readonly paths: readonly string[];
  /** Settings of point 0..count - 1; the last axis changes fastest. */
  readonly at: (index: number) => Settings;
}

/** Settings along one axis. */
interface Steps {
  readonly count: number;
  readonly paths: readonly string[];
  readonly at: (step: number) => readonly (readonly [string, JsonValue])[];
}

/**
 * The points of a sweep: all combinations of its axes.
 *
 * @param sweep The sweep.
 * @returns Its points.
 * @example Two biases times three temperatures
 * ```ts
 * import { parseSweep, sweepPoints } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const points = sweepPoints(parseSweep(`{
 *   "title": "cold and warm", "scenario": "gold.json", "record": { "values": ["peakCounts"] },
 *   "axes": [
 *     { "kind": "list", "path": "biasV", "values": [-5, -9] },
 *     { "kind": "range", "path": "sample.temperatureK", "from": 100, "to": 300, "count": 3 }
 *   ]
 * }`, "sweep.json"));
 * assert.equal(points.count, 6);
 * assert.deepEqual(points.at(4), { biasV: -9, "sample.temperatureK": 200 });
 * ```
 */
export function sweepPoints(sweep: Pick<Sweep, "axes" | "seed">): SweepPoints {
  const axes = sweep.axes.map((axis) => steps(axis, sweep.seed));
  return {
    count: axes.reduce((product, axis) => product * axis.count, 1),
    paths: axes.flatMap((axis) => axis.paths),
    at: (index) => {
      const entries: (readonly [string, JsonValue])[] = [];
      let rest = index;
      for (const axis of axes.toReversed()) {
        entries.unshift(...axis.at(rest % axis.count));
        rest = Math.floor(rest / axis.count);
      }
      return Object.fromEntries(entries);
    },
  };
}

/** Number of steps of an axis; those of a zip are all the same. */
export function axisCount(axis: SweepAxis): number {
  return axis.kind === "zip"
    ? axisCount(axis.axes[0])
    : axis.kind === "list"
    ? axis.values.length
    : axis.count;
}

function steps(axis: SweepAxis, seed: number): Steps {
  if (axis.kind === "sample") return sampleSteps(axis, seed);
  const together = axis.kind === "zip" ? axis.axes : [axis];
  return {
    count: axisCount(axis),
    paths: together.map(({ path }) => path),
    at: (step) => together.map((one) => [one.path, valueAt(one, step)] as const),
  };
}

function valueAt(axis: ListAxis | RangeAxis, step: number): JsonValue {
  return axis.kind === "list" ? axis.values[step] : between(axis, step / (axis.count - 1));
}

function sampleSteps(axis: SampleAxis, seed: number): Steps {
  const dimensions = axis.axes.length;
  const points = axis.method === "sobol"
    ? sobolPoints(axis.count, dimensions)
    : latinHypercubePoints(axis.count, dimensions, seed);
  return {
    count: axis.count,
    paths: axis.axes.map(({ path }) => path),
    at: (step) =>
      axis.axes.map((range, d) => [range.path, between(range, points[step * dimensions + d])] as const),
  };
}

/** Twelve digits take off the rounding of binary fractions, so that 0.3 has the same hash however it was reached. */
function between(
  range: { readonly from: number; readonly to: number; readonly scale: "linear" | "log" },
  share: number,
): number {
  const value = range.scale === "log"
    ? range.from * (range.to / range.from) ** share
    : range.from + (range.to - range.from) * share;
  return Number(value.toPrecision(12));
}
