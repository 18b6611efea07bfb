import { buildCommand } from "@stricli/core";
import { cannot, InputError } from "../base/mod.ts";
import type { JsonValue } from "../sweep/mod.ts";
import { stem, writeFiles } from "./files.ts";
import {
  type Context,
  count,
  decimal,
  GOOD,
  jsonFlag,
  NOT_TRUSTED,
  optionalNumber,
  outFlag,
  scenarioArgument,
  setFlag,
  workersFlag,
} from "./flags.ts";
import { planFiles } from "./plan_files.ts";
import { type PlanRequest, planScenario } from "./plan_run.ts";
import { planJson, planText } from "./plan_text.ts";
import { progressLine } from "./progress.ts";

type PlanFlags = {
  targetEv: number;
  hours?: number;
  maxRate?: number;
  maxDose?: number;
  spotMm2?: number;
  vary?: readonly Varied[];
  replicates?: number;
  set?: readonly string[];
  histories?: number;
  workers?: number;
  out?: string;
  json: boolean;
};

type Varied = PlanRequest["vary"][number];

/** Fewer runs do not make a standard deviation. */
const LEAST_REPLICATES = 10;

/** Parses `PATH=VALUE,VALUE,...`. */
function varied(text: string): Varied {
  const split = text.indexOf("=");
  const values = text.slice(split + 1).split(",").map((value) => value.trim());
  if (split < 1 || values.includes("")) {
    throw new SyntaxError(`must be PATH=VALUE,VALUE,... such as biasV=-5,-9, not ${JSON.stringify(text)}`);
  }
  if (new Set(values).size < values.length) {
    throw new SyntaxError(`must give every value once, not ${JSON.stringify(text)}`);
  }
  return { path: text.slice(0, split), values: values.map(jsonOrText) };
}

function jsonOrText(text: string): JsonValue {
  try {
    return JSON.parse(text);
  } catch {
    return text;
  }
}

/** `plan` */
export const planCommand = buildCommand({
  docs: {
    brief: "Plan a run: windows, times and settings for a wanted uncertainty of the work function",
    fullDescription: [
      "Simulate a scenario, predict the standard uncertainty of the work function that a fit of its two edges will have,",
      "split the time between the two windows, and say what will go wrong. --vary ranks all combinations of settings.",
      "--out writes plan.json, plan.svg (uncertainty against time) and a run sheet to print (HTML and Markdown).",
      "",
      "The dose is that of the analyzed spot: --max-dose needs its area, --spot-mm2. Where a rate is above --max-rate, the",
      "plan takes less light. Exit code 1: the target is not reached.",
      "",
      "Examples:",
      "  twoedge plan scenarios/clean_gold_he1.json --target-ev 0.005",
      "  twoedge plan scenarios/clean_gold_he1.json --target-ev 0.005 --hours 1 --vary biasV=-3,-6,-9 \\",
      "    --vary analyzer.resolution.passEnergyEv=5,10,20 --out out/plan",
      "  twoedge plan scenarios/clean_gold_he1.json --target-ev 0.005 --replicates 200",
    ].join("\n"),
  },
  parameters: {
    positional: { kind: "tuple", parameters: [scenarioArgument] },
    flags: {
      targetEv: {
        kind: "parsed",
        parse: decimal,
        brief: "Wanted standard uncertainty of the work function, eV",
        placeholder: "EV",
      },
      hours: optionalNumber("Time there is, h", "H"),
      maxRate: optionalNumber("Highest count rate that may be recorded, counts/s", "CPS"),
      maxDose: optionalNumber("Highest dose, photons/cm^2; needs --spot-mm2", "PHOTONS_PER_CM2"),
      spotMm2: optionalNumber("Area of the analyzed spot, mm^2", "MM2"),
      vary: {
        kind: "parsed",
        parse: varied,
        brief: "Setting to vary, such as biasV=-5,-9; repeatable, all combinations",
        placeholder: "PATH=LIST",
        variadic: true,
        optional: true,
      },
      replicates: {
        kind: "parsed",
        parse: count,
        brief: "Simulate and fit so many runs of the plan and compare their scatter with the prediction",
        placeholder: "N",
        optional: true,
      },
      set: setFlag,
      histories: {
        kind: "parsed",
        parse: count,
        brief: "Photons to follow for the best plan (default: the scenario's, at most 4194304)",
        placeholder: "N",
        optional: true,
      },
      workers: workersFlag,
      out: { ...outFlag, brief: "Folder for plan.json, plan.svg and the run sheet (default: none written)" },
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: PlanFlags, path: string) {
    const { stdout, stderr } = this.process;
    const request = requestOf(path, flags);
    const progress = progressLine("Planning", stderr, () => performance.now(), "settings");
    const answer = await planScenario(request, progress.update).finally(progress.end);
    const json = `${JSON.stringify(planJson(answer), null, 2)}\n`;
    stdout.write(flags.json ? json : `${planText(answer)}\n`);
    if (flags.out !== undefined) {
      const written = await writeFiles(flags.out, [
        ["plan.json", json],
        ...await planFiles(answer, stem(path)),
      ]);
      if (!flags.json) stdout.write(`Wrote ${written.join(", ")}\n`);
    }
    this.exitCode = answer.best.plan.status === "reached" ? GOOD : NOT_TRUSTED;
  },
});

/** Checks what the argument parser cannot: ranges, and flags that need each other. */
function requestOf(path: string, flags: PlanFlags): PlanRequest {
  const ranges = [
    ["--target-ev", flags.targetEv, 1e-5, 1, "eV"],
    ["--hours", flags.hours, 1e-3, 1e4, "h"],
    ["--max-rate", flags.maxRate, 1, 1e9, "counts/s"],
    ["--max-dose", flags.maxDose, 1, 1e30, "photons/cm^2"],
    ["--spot-mm2", flags.spotMm2, 1e-9, 1e4, "mm^2"],
    ["--replicates", flags.replicates, LEAST_REPLICATES, 1e6, "runs"],
  ] as const;
  const problems = ranges.flatMap(([place, value, low, high, unit]) =>
    value === undefined || (value >= low && value <= high) ? [] : [{
      place,
      message: cannot("plan", `${place} must be in ${low}..${high} ${unit}`, `${value} ${unit}`),
    }]
  );
  if ((flags.maxDose === undefined) !== (flags.spotMm2 === undefined)) {
    const [there, missing] = flags.maxDose === undefined
      ? ["--spot-mm2", "--max-dose"]
      : ["--max-dose", "--spot-mm2"];
    problems.push({
      place: there as "--max-dose",
      message: cannot("plan", `${there} must be given together with ${missing}`, "alone"),
    });
  }
  if (problems.length > 0) throw new InputError(problems);
  return {
    path,
    overrides: flags.set ?? [],
    targetEv: flags.targetEv,
    hours: flags.hours ?? null,
    mostCountsPerS: flags.maxRate ?? null,
    dose: flags.maxDose === undefined || flags.spotMm2 === undefined
      ? null
      : { photonsPerCm2: flags.maxDose, spotMm2: flags.spotMm2 },
    vary: flags.vary ?? [],
    replicates: flags.replicates ?? 0,
    histories: flags.histories ?? null,
    workers: flags.workers ?? Math.max(1, navigator.hardwareConcurrency),
  };
}
