import { z } from "zod";
import { cannot, InputError, pointerStep, type Problem, readJsonText, suggest } from "../base/mod.ts";
import { LAMP_NAMES, MATERIAL_IDS } from "../data/mod.ts";
import { applyOverrides } from "./overrides.ts";
import type { Scenario } from "./types.ts";

const energy = (low: number, high: number) => z.number().min(low).max(high);

/** Any text, as a file of the user may define the material; the built-in names are there for editors. */
const materialName = z.union([z.enum(MATERIAL_IDS), z.string().min(1)]);

const transportMeanFreePathNm = z.number().positive().max(1e6).nullable().default(null);

const surface = z.strictObject({
  patches: z.array(z.strictObject({
    areaFraction: z.number().positive().max(1),
    workFunctionEv: energy(0.5, 10),
  })).max(8).default([]),
  patchField: z.enum(["strong", "weak"]).default("strong"),
  workFunctionSpreadEv: energy(0, 0.5).default(0),
  facetTiltDeg: z.number().min(0).max(40).default(0),
  extractionFieldVPerM: z.number().min(0).max(1e9).default(0),
  dipoleDensityPerNm2: z.number().min(0).max(20).default(0),
  dipoleMomentDebye: z.number().min(-20).max(20).default(0),
});

const charging = z.strictObject({ shiftEv: energy(-20, 100).default(0), fwhmEv: energy(0, 20).default(0) });

const sample = z.strictObject({
  material: materialName,
  materialFile: z.string().min(1).nullable().default(null),
  face: z.string().min(1).default("polycrystalline"),
  temperatureK: z.number().min(0).max(3000).default(300),
  workFunctionEv: energy(0.5, 10).nullable().default(null),
  barrier: z.enum(["classical", "quantum"]).default("classical"),
  transportMeanFreePathNm,
  densityOfStatesFile: z.string().min(1).nullable().default(null),
  meanFreePathFile: z.string().min(1).nullable().default(null),
  layers: z.array(z.strictObject({
    material: materialName,
    thicknessNm: z.number().min(0.01).max(10_000),
    transportMeanFreePathNm,
  })).max(8).default([]),
  surface: surface.default(() => surface.parse({})),
  valenceMaximumBelowFermiEv: energy(0, 15).nullable().default(null),
  bandBending: z.strictObject({
    surfaceShiftEv: energy(-5, 5),
    widthNm: z.number().min(0.1).max(10_000),
  }).nullable().default(null),
  charging: charging.default(() => charging.parse({})),
  fastMeanFreePath: z.enum(["TPP-2M", "Seah-Dench"]).default("TPP-2M"),
  lossFile: z.string().min(1).nullable().default(null),
  surfaceExcitationFactor: z.number().min(0.05).max(20).nullable().default(null),
});

const common = {
  photonFluxPerS: z.number().positive().max(1e20).default(1e10),
  polarization: z.enum(["none", "s", "p"]).default("none"),
};

const light = z.discriminatedUnion("kind", [
  z.strictObject({
    kind: z.literal("lamp"),
    lamp: z.enum(LAMP_NAMES),
    satellites: z.boolean().default(true),
    ...common,
  }),
  z.strictObject({
    kind: z.literal("anode"),
    anode: z.enum(["Mg", "Al"]),
    satellites: z.boolean().default(true),
    ...common,
  }),
  z.strictObject({
    kind: z.literal("monochromatedAluminum"),
    fwhmEv: energy(0.05, 0.9).default(0.25),
    ...common,
  }),
  z.strictObject({
    kind: z.literal("band"),
    centerEv: energy(1, 3000),
    fwhmEv: energy(0, 5).default(0),
    ...common,
  }),
  z.strictObject({ kind: z.literal("table"), file: z.string().min(1), ...common }),
  z.strictObject({
    kind: z.literal("thermal"),
    temperatureK: z.number().min(500).max(6000),
    lowEv: energy(0.5, 20),
    highEv: energy(0.5, 20),
    ...common,
  }),
  z.strictObject({
    kind: z.literal("laser"),
    photonEnergyEv: energy(1, 12),
    bandwidthEv: energy(0, 1).default(0.002),
    repetitionHz: z.number().min(1).max(1e10).default(1e6),
    ...common,
  }),
]);

const geometry = z.strictObject({
  incidenceAngleDeg: z.number().min(0).max(89).default(45),
  emissionAngleDeg: z.number().min(0).max(89).default(0),
});

const resolution = z.discriminatedUnion("kind", [
  z.strictObject({ kind: z.literal("fwhm"), fwhmEv: energy(0.0005, 5) }),
  z.strictObject({
    kind: z.literal("hemisphere"),
    passEnergyEv: energy(0.1, 500),
    slitWidthMm: z.number().positive().max(50),
    meanRadiusMm: z.number().min(10).max(1000),
    slitHalfAngleDeg: z.number().min(0).max(20),
  }),
]);

const analyzer = z.strictObject({
  workFunctionEv: energy(0.5, 10),
  acceptanceHalfAngleDeg: z.number().positive().max(89),
  resolution,
  transmissionExponent: z.number().min(0).max(2).default(0),
  detectionFraction: z.number().positive().max(1).default(1),
});

const acquisition = z.strictObject({
  startEv: energy(-20, 3000),
  endEv: energy(-20, 3000),
  stepEv: energy(0.0001, 5),
  dwellS: z.number().positive().max(1e6),
  sweeps: z.int().min(1).max(1e6).default(1),
  darkRateCountsPerS: z.number().min(0).max(1e9).default(0),
  deadTimeS: z.number().min(0).max(1e-3).default(0),
});

const simulation = z.strictObject({
  histories: z.int().min(8192).max(1e12).default(20_000_000),
  seed: z.int().min(0).default(1),
  energyStepEv: energy(0.002, 0.1).default(0.02),
  maxLossEv: energy(5, 500).default(100),
});

const scenario = z.strictObject({
  $schema: z.string().optional(),
  title: z.string().min(1).max(200),
  note: z.string().max(10_000).default(""),
  sample,
  light,
  geometry: geometry.default(() => geometry.parse({})),
  analyzer,
  biasV: z.number().min(-100).max(10).default(0),
  acquisition,
  simulation: simulation.default(() => simulation.parse({})),
});

/**
 * JSON Schema of scenario files, for editors and for `scenarios/scenario.schema.json`.
 *
 * @returns A JSON Schema (draft 2020-12) object.
 */
export function scenarioJsonSchema(): Record<string, unknown> {
  return { title: "Twoedge scenario", ...z.toJSONSchema(scenario, { io: "input" }) };
}

/**
 * Reads a scenario: JSON in which comments and trailing commas are allowed.
 *
 * Every problem is reported at once, each with a JSON pointer, the rule, the value, and the nearest known word.
 *
 * @param text Contents of the file.
 * @param fileName Name for messages.
 * @param overrides `PATH=VALUE` texts, see {@link applyOverrides}. Default: none.
 * @returns The scenario with defaults filled in.
 * @throws {InputError} If the text is not JSON or breaks a rule.
 */
export function parseScenario(text: string, fileName: string, overrides: readonly string[] = []): Scenario {
  const { data: written, repeated } = readJsonText(text, fileName, "read scenario");
  const data = applyOverrides(written, overrides, (keys) => schemaAt(keys) instanceof z.ZodString);
  const checked = scenario.safeParse(data, { reportInput: true });
  const problems = [
    ...repeated,
    ...unknownMaterials(data),
    ...(checked.success ? crossChecks(checked.data) : checked.error.issues.flatMap(toProblems)),
  ];
  if (problems.length > 0) throw new InputError(problems);
  return checked.data as Scenario;
}

/** Materials that are neither built in nor possibly the user's own. */
function unknownMaterials(data: unknown): Problem[] {
  const sample =
    (data as { sample?: { material?: unknown; materialFile?: unknown; layers?: unknown } } | null)
      ?.sample;
  if (typeof sample?.materialFile === "string") return [];
  const layers = Array.isArray(sample?.layers) ? sample.layers : [];
  const named: [string, unknown][] = [
    ["/sample/material", sample?.material],
    ...layers.map((layer, i): [string, unknown] => [`/sample/layers/${i}/material`, layer?.material]),
  ];
  return named.flatMap(([place, id]) => {
    if (typeof id !== "string" || id === "" || MATERIAL_IDS.includes(id)) return [];
    const near = suggest(id, MATERIAL_IDS);
    const rule = `material must be one of ${MATERIAL_IDS.join(", ")}${
      near ? ` (did you mean ${near}?)` : ""
    }, or that of a materialFile`;
    return [{ place, message: cannot("read scenario", rule, id) }];
  });
}

function crossChecks(data: Scenario): Problem[] {
  const problems: Problem[] = [];
  const { startEv, endEv, stepEv } = data.acquisition;
  if (!(endEv > startEv)) {
    problems.push({
      place: "/acquisition/endEv",
      message: cannot("use scenario", `endEv must be > startEv (${startEv} eV)`, `${endEv} eV`),
    });
  } else if ((endEv - startEv) / stepEv > 100_000 || (endEv - startEv) / stepEv < 10) {
    problems.push({
      place: "/acquisition/stepEv",
      message: cannot(
        "use scenario",
        `the window of ${endEv - startEv} eV must hold 10..100000 channels`,
        `${stepEv} eV`,
      ),
    });
  }
  const { patches, facetTiltDeg } = data.sample.surface;
  const area = patches.reduce((sum, patch) => sum + patch.areaFraction, 0);
  if (patches.length > 0 && Math.abs(area - 1) > 1e-6) {
    problems.push({
      place: "/sample/surface/patches",
      message: cannot("use scenario", "the areaFraction of all patches must add up to 1", area),
    });
  }
  if (facetTiltDeg > 0 && data.geometry.emissionAngleDeg !== 0) {
    problems.push({
      place: "/sample/surface/facetTiltDeg",
      message: cannot(
        "use scenario",
        "facetTiltDeg must be 0 off normal emission",
        `${facetTiltDeg} degrees`,
      ),
    });
  }
  return problems;
}

const UNITS: readonly (readonly [RegExp, string])[] = [
  [/CountsPerS$/, "counts/s"],
  [/PerS$/, "1/s"],
  [/PerNm2$/, "1/nm^2"],
  [/VPerM$/, "V/m"],
  [/Debye$/, "D"],
  [/Ev$/, "eV"],
  [/K$/, "K"],
  [/Nm$/, "nm"],
  [/Mm$/, "mm"],
  [/Deg$/, "degrees"],
  [/S$/, "s"],
  [/V$/, "V"],
];

function toProblems(issue: z.core.$ZodIssue): Problem[] {
  const pointer = issue.path.map(pointerStep).join("");
  const key = String(issue.path.at(-1) ?? "scenario");
  const unit = UNITS.find(([pattern]) => pattern.test(key))?.[1];
  const withUnit = (value: unknown): string => (unit ? `${value} ${unit}` : String(value));
  const say = (rule: string, value: unknown): Problem[] => [{
    place: pointer || "/",
    message: cannot("read scenario", rule, typeof value === "object" ? JSON.stringify(value) : value),
  }];
  const input = issue.input;
  switch (issue.code) {
    case "unrecognized_keys": {
      const known = knownKeys(issue.path, input);
      return issue.keys.map((unknown) => {
        const near = suggest(unknown, known);
        const hint = near ? ` (did you mean ${near}?)` : ` (known here: ${known.join(", ")})`;
        return {
          place: pointer + pointerStep(unknown),
          message: cannot("read scenario", `every key must be known${hint}`, unknown),
        };
      });
    }
    case "invalid_type":
      return input === undefined
        ? say(`${key} must be given`, "nothing")
        : say(`${key} must be ${article(issue.expected)}${unit ? ` in ${unit}` : ""}`, input);
    case "too_small":
      return say(
        `${key} must be ${issue.inclusive ? ">=" : ">"} ${withUnit(issue.minimum)}${
          issue.origin === "string" ? " characters" : ""
        }`,
        input,
      );
    case "too_big":
      return say(
        `${key} must be <= ${withUnit(issue.maximum)}${issue.origin === "string" ? " characters" : ""}`,
        input,
      );
    case "invalid_value": {
      const choices = issue.values.map(String);
      const near = typeof input === "string" ? suggest(input, choices) : undefined;
      return say(
        `${key} must be one of ${choices.join(", ")}${near ? ` (did you mean ${near}?)` : ""}`,
        input,
      );
    }
    case "invalid_union":
      return say(
        `${key} must be ${key === "kind" ? `one of ${kindsAt(issue.path).join(", ")}` : "known"}`,
        key === "kind" ? (input as { kind?: unknown }).kind ?? "nothing" : input,
      );
    default:
      return say(`${key} must be valid (${issue.message})`, input);
  }
}

function article(expected: string): string {
  return expected === "int" ? "a whole number" : expected === "object" ? "an object" : `a ${expected}`;
}

type AnySchema = z.core.$ZodType;

/** The schema at a path; a union is narrowed by the `kind` of the input where there is one. */
function schemaAt(path: readonly PropertyKey[]): AnySchema | undefined {
  let schema: AnySchema | undefined = scenario;
  for (const key of path) {
    schema = unwrap(schema);
    if (schema instanceof z.ZodObject) schema = schema.shape[String(key)] as AnySchema | undefined;
    else return undefined;
  }
  return unwrap(schema);
}

function unwrap(schema: AnySchema | undefined): AnySchema | undefined {
  let inner = schema;
  while (inner instanceof z.ZodDefault || inner instanceof z.ZodNullable || inner instanceof z.ZodOptional) {
    inner = inner.unwrap() as AnySchema;
  }
  return inner;
}

function knownKeys(path: readonly PropertyKey[], input: unknown): string[] {
  const schema = schemaAt(path);
  if (schema instanceof z.ZodObject) return Object.keys(schema.shape);
  if (!(schema instanceof z.ZodDiscriminatedUnion)) return [];
  const kind = (input as { kind?: unknown } | undefined)?.kind;
  const options = schema.options as z.ZodObject[];
  const chosen = options.filter((option) =>
    option.safeParse({ kind }).error?.issues.every((i) => i.path[0] !== "kind")
  );
  return [...new Set((chosen.length > 0 ? chosen : options).flatMap((option) => Object.keys(option.shape)))];
}

function kindsAt(path: readonly PropertyKey[]): string[] {
  const schema = schemaAt(path.slice(0, -1));
  if (!(schema instanceof z.ZodDiscriminatedUnion)) return [];
  return (schema.options as z.ZodObject[]).flatMap((option) => {
    const kind = option.shape.kind;
    return kind instanceof z.ZodLiteral ? [...kind.values].map(String) : [];
  });
}
