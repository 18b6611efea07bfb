import { cannot, type Estimate, InputError } from "../base/mod.ts";
import { type FigureSeries, formatEstimate, type SeriesFigureInput } from "../report/mod.ts";
import {
  fitFowler,
  fitPhotoelectricLine,
  fitStoppingSeries,
  type Judgment,
  type PhotoelectricLine,
  PLANCK_EV_S,
  workFunctionAgainstBias,
  workFunctionAgainstTemperature,
  type WorkFunctionSeries,
} from "../series/mod.ts";
import { blamingFile, keyNumber, readNumberTable } from "./number_table.ts";

/** Kinds of series, each with the columns and keys of its file. */
export const SERIES_KINDS = ["fowler", "stopping", "kemax", "bias", "temperature"] as const;

/** One of {@link SERIES_KINDS}. */
export type SeriesKind = (typeof SERIES_KINDS)[number];

/** What a series gave. */
export interface SeriesAnswer {
  /** Verdict of the whole. */
  readonly verdict: Judgment["verdict"];
  /** The result as one JSON object. */
  readonly json: Record<string, unknown>;
  /** The result for a terminal. */
  readonly lines: readonly string[];
  /** What to draw. */
  readonly figure: SeriesFigureInput;
}

/**
 * Reads and fits a series.
 *
 * @param kind What was measured.
 * @param text Contents of the file.
 * @param file Its name, for messages.
 * @param title Title of the figure.
 * @returns The answer.
 * @throws {InputError} If the file breaks a rule.
 */
export function fitSeries(kind: SeriesKind, text: string, file: string, title: string): SeriesAnswer {
  return blamingFile(file, () => ANSWERS[kind](text, file, title));
}

type Answer = (text: string, file: string, title: string) => SeriesAnswer;

const ANSWERS: Readonly<Record<SeriesKind, Answer>> = {
  fowler(text, file, title) {
    const table = readNumberTable(text, file, {
      columns: ["photon_energy_ev", "yield", "yield_uncertainty"],
      keys: ["temperature_k", "band_fwhm_ev"],
    });
    const temperatureK = needed(keyNumber(table, "temperature_k", file), "temperature_k", file);
    const bandFwhmEv = keyNumber(table, "band_fwhm_ev", file) ?? 0;
    const { photon_energy_ev: photonEnergiesEv, yield: yields, yield_uncertainty: yieldUncertainties } =
      table.columns;
    const fit = fitFowler({ photonEnergiesEv, yields, yieldUncertainties, temperatureK, bandFwhmEv });
    const { fitted, ...json } = fit;
    return {
      verdict: fit.verdict,
      json: { ...json, temperatureK, bandFwhmEv },
      lines: [
        ...judgmentLines(fit),
        ...row("work function (emitter)", fit.workFunctionEv, "eV"),
        ...row("yield per eV\u00b2", fit.amplitudePerEv2, ""),
        `Used: ${temperatureK} K, band of the light ${bandFwhmEv} eV`,
      ],
      figure: {
        title,
        subtitle: [summary(fit.verdict, "work function of the emitter", fit.workFunctionEv)],
        xTitle: "Photon energy / eV",
        yTitle: "Yield",
        isReversed: false,
        series: [
          points("measured", photonEnergiesEv, yields, yieldUncertainties),
          curve("Fowler fit", photonEnergiesEv, fitted),
        ],
      },
    };
  },

  stopping(text, file, title) {
    const table = readNumberTable(text, file, {
      columns: ["photon_energy_ev", "retarding_v", "current_a", "current_uncertainty_a"],
      keys: [
        "temperature_k",
        "geometry",
        "dark_current_a",
        "contact_potential_v",
        "contact_potential_uncertainty_v",
      ],
    });
    const { geometry } = table.keys;
    if (geometry !== "plane" && geometry !== "sphere") {
      throw new InputError([{
        place: file,
        message: cannot("read the key geometry", "it must be plane or sphere", geometry ?? "not given"),
      }]);
    }
    const contact = keyNumber(table, "contact_potential_v", file);
    const cell = {
      temperatureK: needed(keyNumber(table, "temperature_k", file), "temperature_k", file),
      geometry,
      darkCurrentA: keyNumber(table, "dark_current_a", file) ?? 0,
      contactPotentialV: contact === null ? null : {
        value: contact,
        standardUncertainty: needed(
          keyNumber(table, "contact_potential_uncertainty_v", file),
          "contact_potential_uncertainty_v",
          file,
        ),
      },
    } as const;
    const { photon_energy_ev: energies, retarding_v: voltages, current_a: currents, current_uncertainty_a } =
      table.columns;
    const curves = [...new Set(energies)].map((photonEnergyEv) => {
      const pick = (column: readonly number[]) => column.filter((_, i) => energies[i] === photonEnergyEv);
      return {
        photonEnergyEv,
        retardingVoltagesV: pick(voltages),
        currentsA: pick(currents),
        currentUncertaintiesA: pick(current_uncertainty_a),
      };
    });
    const result = fitStoppingSeries(curves, cell);
    const verdicts = [...result.curves, ...(result.line === null ? [] : [result.line])].map(({ verdict }) =>
      verdict
    );
    // Curves without a number are left out of the line, which is then to be looked at.
    const verdict = verdicts.every((one) => one === "good")
      ? "good"
      : result.line === null && verdicts.includes("failed")
      ? "failed"
      : "doubtful";
    return {
      verdict,
      json: {
        verdict,
        leftOut: result.leftOut,
        curves: result.curves.map(({ usedVoltagesV, fittedA: _, ...rest }) => ({
          ...rest,
          usedVoltagesV: [usedVoltagesV[0], usedVoltagesV[usedVoltagesV.length - 1]],
        })),
        line: result.line,
        ...cell,
      },
      lines: [
        ...result.curves.flatMap((fit) => [
          `Photon energy ${fit.photonEnergyEv} eV`,
          ...judgmentLines(fit),
          ...row("stopping potential", fit.stoppingPotentialV, "V"),
          ...row("work function (collector)", fit.workFunctionEv, "eV"),
          ...row("work function (emitter)", fit.emitterWorkFunctionEv, "eV"),
          ...row("back-current", fit.backCurrentA, "A"),
          `  fitted                        from ${fit.usedVoltagesV[0]} V on, below ${
            Number((100 * fit.usedShare).toPrecision(2))
          } % of the largest current`,
        ]),
        ...(result.line === null ? [] : ["All photon energies", ...lineLines(result.line)]),
        ...result.leftOut.map(({ photonEnergyEv, reason }) => `Left out: ${photonEnergyEv} eV, as ${reason}`),
        `Used: ${cell.temperatureK} K, ${geometry}, dark current ${cell.darkCurrentA} A`,
      ],
      figure: {
        title,
        subtitle: [summary(verdict, "work function of the collector", result.line?.workFunctionEv ?? null)],
        xTitle: "Retarding voltage / V",
        yTitle: "Current / A",
        isReversed: false,
        series: curves.flatMap((measured, i) => [
          points(
            `${measured.photonEnergyEv} eV`,
            measured.retardingVoltagesV,
            measured.currentsA,
            measured.currentUncertaintiesA,
          ),
          curve(
            `${measured.photonEnergyEv} eV, fit`,
            result.curves[i].usedVoltagesV,
            result.curves[i].fittedA,
          ),
        ]),
      },
    };
  },

  kemax(text, file, title) {
    const quantity = /stopping_potential/.test(text) ? "stopping_potential" : "kinetic_energy_max";
    const unit = quantity === "stopping_potential" ? "v" : "ev";
    const { columns } = readNumberTable(text, file, {
      columns: [
        "frequency_hz",
        "frequency_uncertainty_hz",
        `${quantity}_${unit}`,
        `${quantity}_uncertainty_${unit}`,
      ],
      keys: [],
    });
    const energiesEv = columns[`${quantity}_${unit}`];
    const energyUncertaintiesEv = columns[`${quantity}_uncertainty_${unit}`];
    const line = fitPhotoelectricLine({
      frequenciesHz: columns.frequency_hz,
      frequencyUncertaintiesHz: columns.frequency_uncertainty_hz,
      energiesEv,
      energyUncertaintiesEv,
      quantity: quantity === "stopping_potential" ? "stopping potential" : "maximum kinetic energy",
    });
    const ends = [Math.min(...columns.frequency_hz), Math.max(...columns.frequency_hz)];
    return {
      verdict: line.verdict,
      json: { ...line, planckExactEvS: PLANCK_EV_S },
      lines: lineLines(line),
      figure: {
        title,
        subtitle: [
          summary(line.verdict, `work function of the ${line.workFunctionOf}`, line.workFunctionEv),
          `h/e = ${formatEstimate(line.planckEvS, "V s")}`,
        ],
        xTitle: "Frequency / Hz",
        yTitle: unit === "v" ? "Stopping potential / V" : "Maximum kinetic energy / eV",
        isReversed: false,
        series: [
          points("measured", columns.frequency_hz, energiesEv, energyUncertaintiesEv),
          curve(
            "line",
            ends,
            ends.map((hz) => line.planckEvS.value * hz - line.workFunctionFromInterceptEv.value),
          ),
        ],
      },
    };
  },

  bias(text, file, title) {
    const series = workFunctions(text, file, "bias_v");
    const trend = workFunctionAgainstBias(series);
    return {
      verdict: trend.verdict,
      json: { ...trend },
      lines: [
        ...judgmentLines(trend),
        ...row("work function", trend.workFunctionEv, "eV"),
        ...row("change with bias", trend.slopeEvPerV, "eV/V"),
      ],
      figure: trendFigure(title, series, "Sample bias / V", trend, trend.slopeEvPerV.value),
    };
  },

  temperature(text, file, title) {
    const series = workFunctions(text, file, "temperature_k");
    const trend = workFunctionAgainstTemperature(series);
    return {
      verdict: trend.verdict,
      json: { ...trend },
      lines: [
        ...judgmentLines(trend),
        ...row("change with temperature", trend.slopeEvPerK, "eV/K"),
        ...row(`work function at ${trend.meanTemperatureK.toFixed(1)} K`, trend.workFunctionEv, "eV"),
      ],
      figure: trendFigure(title, series, "Temperature / K", trend, trend.slopeEvPerK.value),
    };
  },
};

function needed(value: number | null, key: string, file: string): number {
  if (value !== null) return value;
  throw new InputError([{
    place: file,
    message: cannot("fit the series", `a line "# ${key}: NUMBER" must be in the file`, "not given"),
  }]);
}

function workFunctions(text: string, file: string, setting: string): WorkFunctionSeries {
  const { columns } = readNumberTable(text, file, {
    columns: [setting, "work_function_ev", "work_function_uncertainty_ev"],
    keys: [],
  });
  const order = columns[setting].map((_, i) => i).sort((a, b) => columns[setting][a] - columns[setting][b]);
  return {
    settings: order.map((i) => columns[setting][i]),
    workFunctionsEv: order.map((i) => ({
      value: columns.work_function_ev[i],
      standardUncertainty: columns.work_function_uncertainty_ev[i],
    })),
  };
}

function trendFigure(
  title: string,
  { settings, workFunctionsEv }: WorkFunctionSeries,
  xTitle: string,
  trend: Judgment & { readonly workFunctionEv: Estimate | null },
  slope: number,
): SeriesFigureInput {
  const weights = workFunctionsEv.map(({ standardUncertainty }) => standardUncertainty ** -2);
  const sum = weights.reduce((a, b) => a + b, 0);
  const center = (values: ArrayLike<number>): number =>
    weights.reduce((total, weight, i) => total + weight * values[i], 0) / sum;
  const values = workFunctionsEv.map(({ value }) => value);
  const ends = [settings[0], settings[settings.length - 1]];
  return {
    title,
    subtitle: [summary(trend.verdict, "work function", trend.workFunctionEv)],
    xTitle,
    yTitle: "Work function / eV",
    isReversed: false,
    series: [
      points(
        "measured",
        settings,
        values,
        workFunctionsEv.map(({ standardUncertainty }) => standardUncertainty),
      ),
      curve("line", ends, ends.map((end) => center(values) + slope * (end - center(settings)))),
    ],
  };
}

function points(
  label: string,
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  yUncertainties: ArrayLike<number>,
): FigureSeries {
  return { label, x, y, yUncertainties, mark: "points" };
}

function curve(label: string, x: ArrayLike<number>, y: ArrayLike<number>): FigureSeries {
  return { label, x, y, yUncertainties: null, mark: "line" };
}

function summary(verdict: string, name: string, estimate: Estimate | null): string {
  const value = estimate === null ? `no ${name}` : `${name} ${formatEstimate(estimate, "eV")}`;
  return `${value}, verdict: ${verdict}`;
}

/** Verdict, reasons and the tests behind them. */
export function judgmentLines(judgment: Judgment): string[] {
  const { chiSquare, degreesOfFreedom, chiSquareProbability, runsProbability } = judgment;
  return [
    `Verdict: ${judgment.verdict}`,
    ...judgment.reasons.map((reason) => `  because ${reason}`),
    `  ${"chi-square".padEnd(30)}${chiSquare.toPrecision(3)} with ${degreesOfFreedom} degrees of freedom ` +
    `(probability ${chiSquareProbability.toPrecision(2)}; of the runs ${runsProbability.toPrecision(2)})`,
  ];
}

/** One estimate as a line; none where there is none. */
export function row(name: string, estimate: Estimate | null, unit: string): string[] {
  return estimate === null ? [] : [`  ${name.padEnd(30)}${formatEstimate(estimate, unit)}`];
}

function lineLines(line: PhotoelectricLine): string[] {
  return [
    ...judgmentLines(line),
    ...row("h/e", line.planckEvS, "V s"),
    `  ${"exact h/e".padEnd(30)}${PLANCK_EV_S.toPrecision(8)} V s, ` +
    `${line.planckDeviation.toFixed(1)} standard uncertainties away`,
    ...row(`work function (${line.workFunctionOf})`, line.workFunctionEv, "eV"),
    ...row("the same from the intercept", line.workFunctionFromInterceptEv, "eV"),
  ];
}
