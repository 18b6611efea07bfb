import { cannot, InputError } from "../base/mod.ts";
import type { LoadedScenario } from "./simulate.ts";

/** A parameter of a scenario that templates are simulated for. */
export interface ScenarioParameter {
  /** Name, usually the path in the scenario. */
  readonly name: string;
  /** Unit; empty for a number. */
  readonly unit: string;
  /** Value of the scenario. */
  readonly baseValue: number;
  /** Range of a fit. */
  readonly range: readonly [lower: number, upper: number];
  /** Values to simulate beside that of the scenario. */
  readonly values: readonly number[];
  /** `PATH=VALUE` texts that give the scenario a value. */
  readonly overrides: (value: number) => readonly string[];
  /** `true` where the edges stay where they are, whatever the scenario's mean work function says. Default: false. */
  readonly isRigid?: boolean;
}

/** A parameter named on the command line. */
export interface FreePath {
  /** Path in the scenario. */
  readonly path: string;
  /** Least value. */
  readonly low: number;
  /** Largest value. */
  readonly high: number;
}

/** Nodes of a free parameter, in shares of its range. */
const FREE_NODES = [0, 0.25, 0.5, 0.75, 1];
/** A node this close to the scenario's value, in shares of the range, is that value. */
const SAME_NODE = 0.1;

const UNITS: readonly (readonly [RegExp, string])[] = [
  [/CountsPerS$/, "counts/s"],
  [/Ev$/, "eV"],
  [/K$/, "K"],
  [/Nm$/, "nm"],
  [/Deg$/, "degrees"],
  [/S$/, "s"],
  [/V$/, "V"],
];

/**
 * A parameter to fit.
 *
 * @param free Path and range.
 * @param loaded The scenario, whose value must be a number in the range.
 * @returns The parameter with its nodes.
 * @throws {InputError} If it is not.
 */
export function freeParameter({ path, low, high }: FreePath, loaded: LoadedScenario): ScenarioParameter {
  const baseValue = valueAt(path, loaded);
  if (baseValue === null || !(baseValue >= low && baseValue <= high)) {
    throw new InputError([{
      place: `--free ${path}`,
      message: cannot(
        "fit a scenario parameter",
        `the scenario must give a number in ${low}..${high} (or give one with --set ${path}=VALUE)`,
        baseValue ?? "none",
      ),
    }]);
  }
  const nodes = FREE_NODES.map((share) => low + share * (high - low));
  return {
    ...plain(path, baseValue, [low, high], nodes),
    values: nodes.filter((node) => Math.abs(node - baseValue) > SAME_NODE * (high - low)),
  };
}

/**
 * What may differ from a scenario: one change at a time.
 *
 * @param loaded The scenario.
 * @returns Parameters; some may be refused by the scenario when they are tried.
 */
export function suspectParameters(loaded: LoadedScenario): ScenarioParameter[] {
  const { resolved, scenario } = loaded;
  const { workFunctionEv: w, temperatureK: t, resolutionFwhmEv: fwhm, acceptanceHalfAngleDeg: half } =
    resolved;
  const { deadTimeS } = resolved.acquisition;
  const deadTimes = [0, 1e-6, 2e-6].filter((value) => value !== deadTimeS);
  const hasSatellites = scenario.light.kind === "lamp" && scenario.light.satellites;
  return [
    plain("sample.workFunctionEv", w, [w - 0.3, w + 0.3], [w - 0.3, w + 0.3]),
    ...(t < 20
      ? [plain("sample.temperatureK", t, [0, 300], [100, 200, 300])]
      : [plain("sample.temperatureK", t, [0.2 * t, 1.8 * t], [0.2, 0.4, 0.7, 1.4, 1.8].map((f) => f * t))]),
    {
      ...plain(
        "analyzer.resolution.fwhmEv",
        fwhm,
        [0.5 * fwhm, 2 * fwhm],
        [0.5, 0.75, 1.5, 2].map((f) => f * fwhm),
      ),
      overrides: (value: number) => [`analyzer.resolution={"kind":"fwhm","fwhmEv":${value}}`],
    },
    plain("biasV", resolved.biasV, [resolved.biasV - 1, resolved.biasV + 1], [
      resolved.biasV - 1,
      resolved.biasV + 1,
    ]),
    plain(
      "analyzer.acceptanceHalfAngleDeg",
      half,
      [0.7 * half, Math.min(90, 1.4 * half)],
      [0.7, 0.85, 1.2, 1.4].map((f) => Math.min(90, f * half)),
    ),
    ...(scenario.light.kind === "lamp"
      ? [{
        ...plain("light.satellites", hasSatellites ? 1 : 0, [0, 5], [hasSatellites ? 0 : 1]),
        overrides: (value: number) => [`light.satellites=${value > 0.5}`],
      }]
      : []),
    plain(
      "analyzer.transmissionExponent",
      resolved.transmissionExponent,
      [0, 2],
      [0, 0.5, 1, 2].filter((value) => value !== resolved.transmissionExponent),
    ),
    plain("acquisition.deadTimeS", deadTimeS, [0, Math.max(2e-6, deadTimeS)], deadTimes),
    ...overlayer(scenario.sample as unknown as Record<string, unknown>, w),
    {
      ...plain("sample.surface.patches", 0, [0, 0.6], [0.15, 0.4]),
      name: "patches with a work function lower by 0.3 eV",
      isRigid: true,
      overrides: (share: number) => [
        `sample.surface.patches=${
          JSON.stringify([
            { areaFraction: 1 - share, workFunctionEv: w },
            { areaFraction: share, workFunctionEv: w - 0.3 },
          ])
        }`,
      ],
    },
    plain("sample.charging.fwhmEv", 0, [0, 1.5 * fwhm], [0.5 * fwhm, fwhm, 1.5 * fwhm]),
  ];
}

function plain(
  name: string,
  baseValue: number,
  range: readonly [number, number],
  values: readonly number[],
): ScenarioParameter {
  const unit = UNITS.find(([pattern]) => pattern.test(name))?.[1] ?? "";
  return { name, unit, baseValue, range, values, overrides: (value) => [`${name}=${value}`] };
}

/** A film that hardly any sample from air is without. */
const FILM = "C_contamination";

/** The thickness of the uppermost film, or of a film of carbon, at the same work function, where there is none. */
function overlayer(
  { layers }: Readonly<Record<string, unknown>>,
  workFunctionEv: number,
): ScenarioParameter[] {
  const films = Array.isArray(layers) ? layers as { readonly thicknessNm: number }[] : [];
  if (films.length > 0) {
    const thickness = films[0].thicknessNm;
    return [{
      ...plain("sample.layers[0].thicknessNm", thickness, [0.3 * thickness, 2 * thickness], [
        0.3 * thickness,
        2 * thickness,
      ]),
      unit: "nm",
      overrides: (
        value,
      ) => [`sample.layers=${JSON.stringify([{ ...films[0], thicknessNm: value }, ...films.slice(1)])}`],
    }];
  }
  return [{
    ...plain("overlayer thickness", 0, [0, 1.5], [0.3, 0.8, 1.5]),
    name: `thickness of a film of ${FILM}`,
    unit: "nm",
    overrides: (value) => [
      `sample.layers=${JSON.stringify([{ material: FILM, thicknessNm: value }])}`,
      `sample.workFunctionEv=${workFunctionEv}`,
    ],
  }];
}

/** The number that a scenario gives at a path; for what it takes from tables, the resolved one. */
function valueAt(path: string, { scenario, resolved }: LoadedScenario): number | null {
  if (path === "sample.workFunctionEv") return resolved.workFunctionEv;
  let value: unknown = scenario;
  for (const key of path.split(".")) {
    value = typeof value === "object" && value !== null && Object.hasOwn(value, key)
      ? (value as Record<string, unknown>)[key]
      : undefined;
  }
  return typeof value === "number" ? value : null;
}
