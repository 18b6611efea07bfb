import { basename, join } from "node:path";
import { type Estimate, VERSION } from "../base/mod.ts";
import {
  budgetFigure,
  cutoffFigure,
  formatEstimate,
  levelsFigure,
  type LevelsFigureInput,
  type PageTable,
  type ReportPageInput,
} from "../report/mod.ts";
import { type FitFile, isOwnSpectrum, type ResultFile, type ResultFolder } from "./report_folder.ts";

/** A chart that a report draws. */
export interface ReportChart {
  /** Name of its file, without ending. */
  readonly name: string;
  /** What it shows, one line. */
  readonly title: string;
  /** What it says, for those who cannot see it. */
  readonly description: string;
  /** Vega-Lite. */
  readonly spec: Record<string, unknown>;
}

/** Names of all charts that a report can draw. */
export const CHART_NAMES = ["levels", "cutoff", "budget"] as const;

/** Results of a fit, in the order of a table. */
const QUANTITIES = [
  ["workFunctionEv", "work function"],
  ["maxKineticEnergyEv", "maximum kinetic energy"],
  ["ionizationEnergyEv", "ionization energy"],
  ["cutoffEv", "secondary cutoff"],
  ["fermiEdgeEv", "Fermi edge"],
  ["valenceBandMaximumEv", "valence-band maximum, linear scale"],
  ["valenceBandMaximumLogarithmicEv", "valence-band maximum, logarithmic scale"],
] as const;

/** Flags of `fit` for what the user may state, by the name of the input. */
const FLAGS = [
  ["photonEnergyEv", "--photon-energy"],
  ["biasV", "--bias"],
  ["temperatureK", "--temperature"],
  ["acceptanceHalfAngleDeg", "--acceptance"],
  ["resolutionFwhmEv", "--resolution"],
  ["fermiLevelEv", "--fermi-level"],
] as const;
const BY_USER = "given by the user";

/** Title of a folder: of the scenario, or the names of the fitted files. */
function titleOf({ result, fit }: ResultFolder): string {
  if (result !== null) return result.title;
  return [...new Set(fit!.inputs.regions.map(({ file }) => basename(file)))].join(", ");
}

/**
 * The charts that the numbers of a folder allow.
 *
 * @param folder What is in it.
 * @returns Charts.
 */
export function reportCharts(folder: ResultFolder): ReportChart[] {
  const { result, fit, spectrum } = folder;
  const title = titleOf(folder);
  const charts: ReportChart[] = [];
  const levels = levelsOf(folder, title);
  if (levels !== null) {
    charts.push({
      name: "levels",
      title: "Energy levels, to scale",
      description: `Energy levels of sample and analyzer: photon energy ${
        levels.photonEnergyEv.toFixed(3)
      } eV, vacuum level ${levels.workFunctionEv.value.toFixed(3)} eV above the Fermi level of the sample`,
      spec: levelsFigure(levels),
    });
  }
  const conventions = fit?.conventions?.rows ?? [];
  if (fit !== null && spectrum !== null && isOwnSpectrum(fit) && conventions.length > 0) {
    charts.push({
      name: "cutoff",
      title: "Secondary cutoff by every convention",
      description:
        "Counts around the secondary cutoff, and its position by each convention; numbers in the table",
      spec: cutoffFigure({
        title,
        subtitle: result === null ? [] : ["simulated counts"],
        axisTitle: "Kinetic energy on the axis of the file / eV",
        measured: spectrum.region,
        conventions,
      }),
    });
  }
  if (fit?.workFunctionEv) {
    const { workFunctionEv, budget } = fit;
    charts.push({
      name: "budget",
      title: "Uncertainty budget of the work function",
      description: "Contributions to the standard uncertainty of the work function; numbers in the table",
      spec: budgetFigure({
        title,
        subtitle: [`W = ${formatEstimate(workFunctionEv, "eV")}`],
        terms: budget.map(({ name, ...term }) => ({ name, contributionEv: contributionEv(term) })),
        combinedEv: workFunctionEv.standardUncertainty,
      }),
    });
  }
  return charts;
}

function contributionEv(
  term: Pick<FitFile["budget"][number], "standardUncertaintyEv" | "sensitivities">,
): number {
  return Math.abs((term.sensitivities.workFunctionEv ?? 0) * term.standardUncertaintyEv);
}

function levelsOf({ result, fit, spectrum }: ResultFolder, title: string): LevelsFigureInput | null {
  if (fit?.workFunctionEv && fit.maxKineticEnergyEv) {
    const { inputs, cutoffEv } = fit;
    const fermiLevelEv = inputs.fermiLevelEv.value;
    return {
      title,
      subtitle: ["from the fit"],
      photonEnergyEv: inputs.photonEnergyEv.value,
      workFunctionEv: fit.workFunctionEv,
      maxKineticEnergyEv: fit.maxKineticEnergyEv,
      valenceBandMaximumEv: fit.valenceBandMaximumEv,
      recorded: cutoffEv === null || fermiLevelEv === null
        ? null
        : { cutoffEv: cutoffEv.value, fermiLevelEv },
      biasV: inputs.biasV.value,
      analyzerWorkFunctionEv: inputs.analyzerWorkFunctionEv.value,
    };
  }
  if (result === null) return null;
  const { workFunctionEv, maxKineticEnergyEv, cutoffEv, fermiEdgeEv } = result.truth;
  return {
    title,
    subtitle: ["as put into the simulation"],
    photonEnergyEv: workFunctionEv + maxKineticEnergyEv,
    workFunctionEv: exact(workFunctionEv),
    maxKineticEnergyEv: exact(maxKineticEnergyEv),
    valenceBandMaximumEv: null,
    recorded: { cutoffEv, fermiLevelEv: fermiEdgeEv },
    biasV: spectrum?.region.biasV ?? null,
    analyzerWorkFunctionEv: spectrum?.region.analyzerWorkFunctionEv ?? null,
  };
}

/** What was put in has no uncertainty. */
function exact(valueEv: number): Estimate {
  return { value: Number(valueEv.toFixed(5)), standardUncertainty: 0 };
}

/**
 * Everything that the report page of a folder says, figures aside.
 *
 * @param path The folder.
 * @param folder What is in it.
 * @returns Texts and tables.
 */
export function reportContent(path: string, folder: ResultFolder): Omit<ReportPageInput, "figures"> {
  const { result, fit, spectrum, doubts } = folder;
  return {
    title: titleOf(folder),
    answer: [
      ...(fit === null ? [] : fitAnswer(fit)),
      ...(result === null ? [] : simulationAnswer(result, fit)),
    ],
    warnings: [
      ...doubts,
      ...(fit?.warnings ?? []),
      ...(result?.warnings ?? []).map(({ message, place }) =>
        place === "" ? message : `${message} (at ${place})`
      ),
    ],
    spectrum: spectrum === null || spectrum.region.energiesEv.length < 2 ? null : {
      axisTitle: spectrum.region.energyKind === "kinetic" ? "Kinetic energy / eV" : "Binding energy / eV",
      energiesEv: spectrum.region.energiesEv,
      counts: spectrum.region.counts,
      expected: spectrum.expected,
    },
    tables: fit === null ? [] : fitTables(fit),
    scenario: result === null ? null : JSON.stringify(result.scenario, null, 2),
    provenance: provenance(result, fit),
    reproduce: reproduce(path, result, fit),
  };
}

function fitAnswer(fit: FitFile): string[] {
  const { workFunctionEv, ionizationEnergyEv, valenceBandMaximumEv, expanded, verdict } = fit;
  const of = (name: string, estimate: Estimate): string =>
    `The ${name} is ${formatEstimate(estimate, "eV")}: ${
      decimals(estimate.value, estimate)
    } eV with a standard uncertainty of ${decimals(estimate.standardUncertainty, estimate)} eV.`;
  const wide = expanded.workFunctionEv;
  return [
    workFunctionEv === null ? "No work function could be found." : of("work function", workFunctionEv),
    ...(workFunctionEv !== null && wide !== undefined
      ? [
        `Expanded uncertainty ${decimals(wide.expandedEv, workFunctionEv)} eV (k = 2)${
          wide.coverageFactorFor95 > 2.05
            ? `; few degrees of freedom: 95 % needs k = ${wide.coverageFactorFor95.toFixed(2)}`
            : ", about 95 % coverage"
        }.`,
      ]
      : []),
    ...(valenceBandMaximumEv !== null && ionizationEnergyEv !== null
      ? [of("ionization energy", ionizationEnergyEv)]
      : []),
    verdict === "good"
      ? "The fit is good."
      : verdict === "doubtful"
      ? "The fit is doubtful: use the number with care."
      : "The fit failed: there is no number to be trusted.",
    ...fit.reasons.map((reason) => `Because ${reason}.`),
  ];
}

/** Of a surface with several work functions, which they are and that the one quoted is their mean; else empty. */
export function workFunctionsText(patches: readonly { readonly workFunctionEv: number }[]): string {
  const ascendingEv = patches.map(({ workFunctionEv }) => workFunctionEv).sort((a, b) => a - b);
  const [lowestEv, highestEv] = [ascendingEv[0], ascendingEv.at(-1)];
  if (lowestEv === undefined || highestEv === undefined || lowestEv === highestEv) return "";
  return `area mean of ${lowestEv.toFixed(3)} to ${highestEv.toFixed(3)} eV`;
}

function simulationAnswer(result: ResultFile, fit: FitFile | null): string[] {
  const { truth, complete, histories, patches } = result;
  const spread = workFunctionsText(patches);
  const put = `These are simulated data: the work function put in is ${truth.workFunctionEv.toFixed(3)} eV${
    spread && `, ${spread}`
  }`;
  // Which of several work functions the cutoff shows is not told by their mean.
  const found = spread === "" ? fit?.workFunctionEv ?? null : null;
  const away = found === null ? NaN : (found.value - truth.workFunctionEv) / found.standardUncertainty;
  return [
    Number.isFinite(away)
      ? `${put}; the one found differs by ${(1000 * (found!.value - truth.workFunctionEv)).toFixed(1)} meV, ${
        Math.abs(away).toFixed(1)
      } standard uncertainties.`
      : `${put}.`,
    ...(fit === null ? ["No fit is in this folder."] : []),
    ...(complete ? [] : [`The simulation was stopped after ${histories} histories.`]),
  ];
}

/** With the digits that the uncertainty allows. */
function decimals(value: number, { standardUncertainty }: Estimate): string {
  const places = standardUncertainty > 0 ? 1 - Math.floor(Math.log10(standardUncertainty)) : 4;
  return value.toFixed(Math.min(8, Math.max(1, places)));
}

function fitTables(fit: FitFile): PageTable[] {
  const { inputs, conventions, budget, expanded, workFunctionEv, bootstrapWorkFunctionEv } = fit;
  const regions = inputs.regions.map(({ file, region, rangeEv, use }) => [
    region === "" ? file : `${file}, region ${region}`,
    `${rangeEv[0]} to ${rangeEv[1]} eV`,
    use,
  ]);
  const number = (name: string, { value, from }: { value: number | null; from: string }, unit: string) => [
    name,
    value === null ? "" : `${Number(value.toPrecision(9))} ${unit}`.trimEnd(),
    from,
  ];
  return [
    {
      caption: "Results",
      head: ["quantity", "value (standard uncertainty)", "expanded uncertainty, k = 2"],
      rows: [
        ...QUANTITIES.flatMap(([key, name]) => {
          const estimate = fit[key];
          const wide = expanded[key];
          return estimate === null ? [] : [[
            name,
            formatEstimate(estimate, "eV"),
            wide === undefined ? "" : `${decimals(wide.expandedEv, estimate)} eV`,
          ]];
        }),
        ...(bootstrapWorkFunctionEv === null
          ? []
          : [["work function by bootstrap", formatEstimate(bootstrapWorkFunctionEv, "eV"), ""]]),
      ],
    },
    ...(workFunctionEv === null ? [] : [{
      caption: "Uncertainty budget of the work function (k = 1)",
      head: ["term", "contribution", "type", "where it comes from"],
      rows: [
        ...budget.map((term) => [term.name, meV(contributionEv(term)), term.evaluation, term.note]),
        ["combined", meV(workFunctionEv.standardUncertainty), "", ""],
      ],
    }]),
    ...(conventions === null ? [] : [{
      caption: "Secondary cutoff by convention",
      head: ["convention", "as given", "less the shifts by resolution and acceptance"],
      rows: conventions.rows.map(({ name, uncorrectedEv, correctedEv }) => [
        name,
        formatEstimate(uncorrectedEv, "eV"),
        formatEstimate(correctedEv, "eV"),
      ]),
    }]),
    {
      caption: "Used by the fit",
      head: ["what", "value", "from"],
      rows: [
        ...regions,
        number("photon energy", inputs.photonEnergyEv, "eV"),
        number("bias", inputs.biasV, "V"),
        number("analyzer work function", inputs.analyzerWorkFunctionEv, "eV"),
        number("temperature", inputs.temperatureK, "K"),
        number("acceptance half-angle", inputs.acceptanceHalfAngleDeg, "degrees"),
        number("resolution, FWHM", inputs.resolutionFwhmEv, "eV"),
        number("gain of the energy scale", inputs.scaleGain, ""),
        number("Fermi level on the axis", inputs.fermiLevelEv, "eV"),
        ["energy axis", inputs.axis.kind, inputs.axis.from],
      ],
    },
  ];
}

function meV(energyEv: number): string {
  return `${(1000 * energyEv).toFixed(1)} meV`;
}

function provenance(result: ResultFile | null, fit: FitFile | null): (readonly [string, string])[] {
  return [
    ...(result === null ? [] : [
      ["Simulated by", `Twoedge ${result.version}`],
      ["Scenario hash", result.scenarioHash],
      ["Seed", String(result.seed)],
      ["Draw of the counting noise", String(result.replicate)],
      ["Photons followed", String(result.histories)],
      [
        "Monte Carlo standard error",
        `${
          (100 * result.worstRelativeStandardError).toPrecision(2)
        } % at most, above a tenth of the highest counts`,
      ],
      ["Work function put in", result.truth.workFunctionSource],
      ["Other numbers of the material", "twoedge materials NAME lists each with its source"],
    ] as const),
    ...(fit === null ? [] : [["Fitted by", `Twoedge ${fit.version}`]] as const),
    ["Report by", `Twoedge ${VERSION}`],
  ];
}

function reproduce(
  path: string,
  result: ResultFile | null,
  fit: FitFile | null,
): ReportPageInput["reproduce"] {
  const notes: string[] = [];
  const commands: string[] = [];
  const again = `${path.replace(/[/\\]+$/, "")}_again`;
  const isOfThis = fit !== null && isOwnSpectrum(fit);
  if (result !== null) {
    commands.push([
      "twoedge simulate",
      quoted(join(path, "scenario.json")),
      ...(result.complete && result.wantedRelativeStandardError === null
        ? []
        : [`--histories ${result.histories}`]),
      ...(result.replicate === 0 ? [] : [`--replicate ${result.replicate}`]),
      `--out ${quoted(again)}`,
    ].join(" "));
    const sample = result.scenario.sample as Record<string, unknown> | undefined;
    const tables = [sample?.densityOfStatesFile, sample?.meanFreePathFile].filter((name) =>
      typeof name === "string"
    );
    if (tables.length > 0) {
      notes.push(`The scenario names tables that must be beside scenario.json: ${tables.join(", ")}.`);
    }
  }
  if (fit !== null) {
    const { inputs } = fit;
    const files = isOfThis && result !== null
      ? [join(again, "spectrum.csv")]
      : [...new Set(inputs.regions.map(({ file }) => file))];
    const regions = [...new Set(inputs.regions.map(({ region }) => region))].filter((region) =>
      region !== ""
    );
    commands.push([
      "twoedge fit",
      ...files.map(quoted),
      ...regions.map((region) => `--region ${quoted(region)}`),
      ...FLAGS.flatMap(([key, flag]) =>
        inputs[key].from.startsWith(BY_USER) ? [`${flag} ${inputs[key].value}`] : []
      ),
      ...(inputs.axis.from === BY_USER ? [`--axis ${inputs.axis.kind}`] : []),
      `--out ${quoted(again)}`,
    ].join(" "));
    if (inputs.scaleGain.from === "reference lines") {
      notes.push("The fit used reference lines: add --calibration with their file.");
    }
    if (fit.bootstrapWorkFunctionEv !== null) {
      notes.push("The fit made a bootstrap: add --bootstrap, and --seed where one was given.");
    }
  }
  return { command: commands.join(" && "), notes };
}

/** As one word of a POSIX shell. */
function quoted(word: string): string {
  return /^[\w./:=+-]+$/.test(word) && !word.startsWith("-") ? word : `'${word.replaceAll("'", "'\\''")}'`;
}
