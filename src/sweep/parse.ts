import { z } from "zod";
import { cannot, InputError, type Problem, readJsonText, suggest } from "../base/mod.ts";
import type { Scenario } from "../scenario/mod.ts";
import { axisCount } from "./axes.ts";
import { RECORDED_NAMES } from "./recorded.ts";
import { SOBOL_DIMENSIONS } from "./sobol.ts";
import type { Sweep, SweepAxis } from "./types.ts";

/** Points of one sweep; beyond this the plan itself takes an hour. */
const MOST_POINTS = 10_000_000;

const path = z.string().regex(/^[^.=]+(\.[^.=]+)*$/);
const scale = z.enum(["linear", "log"]).default("linear");
const list = z.strictObject({ kind: z.literal("list"), path, values: z.array(z.json()).min(1).max(1e6) });
const range = z.strictObject({
  kind: z.literal("range"),
  path,
  from: z.number(),
  to: z.number(),
  count: z.int().min(2).max(1e6),
  scale,
});
const sweep = z.strictObject({
  $schema: z.string().optional(),
  title: z.string().min(1).max(200),
  note: z.string().max(10_000).default(""),
  scenario: z.string().min(1),
  axes: z.array(z.discriminatedUnion("kind", [
    list,
    range,
    z.strictObject({
      kind: z.literal("zip"),
      axes: z.array(z.discriminatedUnion("kind", [list, range])).min(2).max(100),
    }),
    z.strictObject({
      kind: z.literal("sample"),
      method: z.enum(["sobol", "latin-hypercube"]),
      count: z.int().min(1).max(1e6),
      axes: z.array(z.strictObject({ path, from: z.number(), to: z.number(), scale })).min(1).max(
        SOBOL_DIMENSIONS,
      ),
    }),
  ])).min(1).max(100),
  seeds: z.enum(["independent", "common"]).default("independent"),
  seed: z.int().min(0).default(1),
  record: z.strictObject({
    values: z.array(z.enum(RECORDED_NAMES)).min(1).max(RECORDED_NAMES.length),
    spectra: z.boolean().default(false),
  }),
});

/**
 * JSON Schema of sweep files, for editors and for `scenarios/sweeps/sweep.schema.json`.
 *
 * @returns A JSON Schema (draft 2020-12) object.
 */
export function sweepJsonSchema(): Record<string, unknown> {
  return { title: "Twoedge sweep", ...z.toJSONSchema(sweep, { io: "input" }) };
}

/**
 * Reads a sweep: JSON in which comments and trailing commas are allowed. Every problem is reported at once.
 *
 * @param text Contents of the file.
 * @param fileName Name for messages.
 * @returns The sweep with defaults filled in.
 * @throws {InputError} If the text is not JSON or breaks a rule.
 */
export function parseSweep(text: string, fileName: string): Sweep {
  const { data, repeated } = readJsonText(text, fileName, "read sweep");
  const checked = sweep.safeParse(data, { reportInput: true });
  const problems = [
    ...repeated,
    ...(checked.success ? crossChecks(checked.data as Sweep) : checked.error.issues.flatMap(toProblems)),
  ];
  if (problems.length > 0) throw new InputError(problems);
  return checked.data as Sweep;
}

/**
 * Checks that every path of a sweep is a value of the scenario it starts from; one that is not would fail at every point.
 *
 * @param sweep The sweep.
 * @param scenario Its scenario, defaults filled in.
 * @throws {InputError} If a path is unknown or set by two axes.
 */
export function checkSweepPaths(sweep: Sweep, scenario: Scenario): void {
  const known = pathsOf(scenario as unknown as Record<string, unknown>);
  const problems = placedPaths(sweep.axes).filter(({ path }) => !known.includes(path)).map(
    ({ path, place }) => {
      const near = suggest(path, known);
      return {
        place,
        message: cannot(
          "use sweep",
          `path must be in the scenario with its defaults${near ? ` (did you mean ${near}?)` : ""}`,
          path,
        ),
      };
    },
  );
  if (problems.length > 0) throw new InputError(problems);
}

function pathsOf(value: Record<string, unknown>, prefix = ""): string[] {
  return Object.entries(value).flatMap(([key, inner]) => [
    prefix + key,
    ...(typeof inner === "object" && inner !== null && !Array.isArray(inner)
      ? pathsOf(inner as Record<string, unknown>, `${prefix}${key}.`)
      : []),
  ]);
}

function placedPaths(axes: readonly SweepAxis[], pointer = "/axes"): { path: string; place: string }[] {
  return axes.flatMap((axis, i) => {
    if (axis.kind === "list" || axis.kind === "range") {
      return [{ path: axis.path, place: `${pointer}/${i}/path` }];
    }
    return axis.axes.map(({ path }, j) => ({ path, place: `${pointer}/${i}/axes/${j}/path` }));
  });
}

function crossChecks(data: Sweep): Problem[] {
  const problems: Problem[] = [];
  const say = (place: string, rule: string, value: unknown): void =>
    void problems.push({ place, message: cannot("use sweep", rule, value) });
  const paths = placedPaths(data.axes);
  paths.forEach(({ path, place }, i) => {
    const other = paths.slice(0, i).find((earlier) =>
      `${path}.`.startsWith(`${earlier.path}.`) || `${earlier.path}.`.startsWith(`${path}.`)
    );
    if (other) {
      say(
        place,
        `each value of the scenario may be set by one axis (${other.path} is at ${other.place})`,
        path,
      );
    }
    if (path === "simulation.seed" && data.seeds === "independent") {
      say(
        place,
        'simulation.seed may be swept when seeds is "common", independent points have seeds of their own',
        path,
      );
    }
  });
  const checkAxis = (axis: SweepAxis, place: string): void => {
    switch (axis.kind) {
      case "list": {
        const texts = axis.values.map((value) => JSON.stringify(value));
        const again = texts.findIndex((text, i) => texts.indexOf(text) < i);
        if (again >= 0) say(`${place}/values/${again}`, "the values of a list must differ", texts[again]);
        break;
      }
      case "range":
        checkRange(axis, place);
        break;
      case "zip": {
        axis.axes.forEach((inner, j) => checkAxis(inner, `${place}/axes/${j}`));
        const counts = axis.axes.map(axisCount);
        if (counts.some((count) => count !== counts[0])) {
          say(
            `${place}/axes`,
            "axes that advance together must have equally many values",
            counts.join(" and "),
          );
        }
        break;
      }
      case "sample":
        axis.axes.forEach((inner, j) => checkRange(inner, `${place}/axes/${j}`));
    }
  };
  const checkRange = (axis: { from: number; to: number; scale: "linear" | "log" }, place: string): void => {
    if (axis.from === axis.to) say(`${place}/to`, "to must differ from from", axis.to);
    if (axis.scale === "log" && !(axis.from > 0 && axis.to > 0)) {
      say(
        `${place}/${axis.from > 0 ? "to" : "from"}`,
        "both ends of a logarithmic range must be > 0",
        axis.from > 0 ? axis.to : axis.from,
      );
    }
  };
  data.axes.forEach((axis, i) => checkAxis(axis, `/axes/${i}`));
  const count = data.axes.reduce((product, axis) => product * axisCount(axis), 1);
  if (count > MOST_POINTS) say("/axes", `there must be at most ${MOST_POINTS} points`, count);
  return problems;
}

function toProblems(issue: z.core.$ZodIssue): Problem[] {
  const place = issue.path.map((key) => `/${String(key)}`).join("");
  const key = String(issue.path.at(-1) ?? "sweep");
  const say = (rule: string, value: unknown = issue.input): Problem[] => [{
    place: place || "/",
    message: cannot(
      "read sweep",
      rule,
      value === undefined ? "nothing" : typeof value === "object" ? JSON.stringify(value) : value,
    ),
  }];
  switch (issue.code) {
    case "unrecognized_keys":
      return issue.keys.map((unknown) => ({
        place: `${place}/${unknown}`,
        message: cannot("read sweep", "every key must be known", unknown),
      }));
    case "invalid_type":
      return say(
        issue.input === undefined ? `${key} must be given` : `${key} must be of type ${issue.expected}`,
      );
    case "invalid_value": {
      const choices = issue.values.map(String);
      const near = typeof issue.input === "string" ? suggest(issue.input, choices) : undefined;
      return say(`${key} must be one of ${choices.join(", ")}${near ? ` (did you mean ${near}?)` : ""}`);
    }
    case "invalid_union":
      return say(
        key === "kind"
          ? "kind must be one of list, range, zip, sample (in a zip: list, range)"
          : `${key} must be JSON`,
        key === "kind" ? (issue.input as { kind?: unknown } | undefined)?.kind : issue.input,
      );
    case "too_small":
      return say(`${key} must ${sized(issue.origin)} >= ${issue.minimum}`);
    case "too_big":
      return say(`${key} must ${sized(issue.origin)} <= ${issue.maximum}`);
    case "invalid_format":
      return say(`${key} must be keys joined by dots such as sample.temperatureK`);
    default:
      return say(`${key} must be valid (${issue.message})`);
  }
}

function sized(origin: string): string {
  return origin === "array" ? "have a number of entries" : origin === "string" ? "have a length" : "be";
}
