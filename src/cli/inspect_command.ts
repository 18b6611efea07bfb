import { buildCommand } from "@stricli/core";
import { InputError } from "../base/mod.ts";
import { nearestLine } from "../data/mod.ts";
import type { FitInputs } from "../edges/mod.ts";
import type { SpectrumFile, SpectrumRegion } from "../formats/mod.ts";
import { fitFiles } from "./fit.ts";
import { type Context, jsonFlag, text } from "./flags.ts";
import { type ColumnPair, columnsFlag, readSpectra } from "./read.ts";

type InspectFlags = { columns?: ColumnPair; json: boolean };

/** `inspect` */
export const inspectCommand = buildCommand({
  docs: {
    brief: "List what a spectrum file holds and what a fit would assume",
    fullDescription: [
      "List the regions of a spectrum file (CSV, ISO 14976, NeXus NXmpes) with axes, photon energy, bias, counts and units,",
      "and what a fit of it would use and assume.",
      "",
      "Examples:",
      "  twoedge inspect sample.vms",
      "  twoedge inspect sample.nxs --json",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [{ parse: text, brief: "CSV, ISO 14976 or NeXus NXmpes file", placeholder: "FILE" }],
    },
    flags: { columns: columnsFlag, json: jsonFlag },
  },
  async func(this: Context, { columns, json }: InspectFlags, path: string) {
    const file = await readSpectra(path, columns);
    const regions = file.regions.map(describe);
    const fit = await fitAssumptions(path, columns);
    this.process.stdout.write(
      json
        ? `${JSON.stringify({ file: path, format: file.format, regions, fit }, null, 2)}\n`
        : [`${path}: ${FORMAT_NAMES[file.format]}`, ...regions.flatMap(regionLines), ...fitLines(fit), ""]
          .join("\n"),
    );
  },
});

const FORMAT_NAMES: Readonly<Record<SpectrumFile["format"], string>> = {
  csv: "CSV",
  "ISO 14976": "ISO 14976 (VAMAS)",
  NXmpes: "NeXus NXmpes",
};

/** What is told of a region. */
type RegionSummary =
  & Pick<
    SpectrumRegion,
    | "label"
    | "species"
    | "photonEnergyEv"
    | "biasV"
    | "asRecorded"
    | "analyzerWorkFunctionEv"
    | "passEnergyEv"
    | "dwellS"
    | "sweeps"
    | "comments"
    | "metadata"
  >
  & {
    readonly points: number;
    readonly energies: {
      readonly kind: SpectrumRegion["energyKind"];
      readonly firstEv: number;
      readonly lastEv: number;
      /** Null when the steps differ by more than a thousandth. */
      readonly stepEv: number | null;
    };
    readonly counts: {
      readonly total: number;
      readonly highest: number;
      readonly units: "counts" | "counts/s";
      readonly whole: boolean;
    };
    /** Known line nearest to the photon energy. */
    readonly line: string | null;
    readonly simulated: boolean;
    readonly columns: readonly string[];
  };

function describe(region: SpectrumRegion): RegionSummary {
  const { energiesEv, counts, columns, energyKind, ...facts } = region;
  const last = energiesEv.length - 1;
  const stepEv = (energiesEv[last] - energiesEv[0]) / last;
  const isEven = energiesEv.every((energyEv, i) =>
    i === 0 || Math.abs(energyEv - energiesEv[i - 1] - stepEv) <= 1e-3 * stepEv
  );
  return {
    ...facts,
    points: energiesEv.length,
    energies: {
      kind: energyKind,
      firstEv: energiesEv[0],
      lastEv: energiesEv[last],
      stepEv: last > 0 && isEven ? Number(stepEv.toPrecision(9)) : null,
    },
    counts: {
      total: counts.reduce((a, b) => a + b, 0),
      highest: counts.reduce((a, b) => Math.max(a, b)),
      units: region.metadata["counts units"] === "c/s" ? "counts/s" : "counts",
      whole: counts.every(Number.isInteger),
    },
    line: region.photonEnergyEv === null ? null : nearestLine(region.photonEnergyEv)?.name ?? null,
    simulated: region.metadata.simulated === "true",
    columns: Object.keys(columns),
  };
}

function regionLines(region: RegionSummary, index: number): string[] {
  const { energies, counts, points } = region;
  const unit = (value: number | null, units: string) =>
    value === null ? "not given" : `${Number(value.toPrecision(9))} ${units}`;
  const bias = region.biasV === null
    ? "not given"
    : `${region.biasV} V, ${
      region.asRecorded
        ? "negative accelerates, energies as recorded"
        : "as written: its sign and whether the energies include it are not stated"
    }`;
  const variables = Object.entries(region.metadata).filter(([key]) =>
    key.startsWith("experimental variable ")
  )
    // ISO 14976 writes d for dimensionless and n for a unit that is not defined there.
    .map(([key, value]) => `${key.slice("experimental variable ".length)} ${value.replace(/ [dn]$/, "")}`);
  const rows: readonly (readonly [string, string])[] = [
    ["axis", `${energies.kind === "unknown" ? "kind not given" : energies.kind} energy`],
    [
      "energies",
      `${energies.firstEv} to ${energies.lastEv} eV, ${points} points, ${
        energies.stepEv === null ? "uneven steps" : `step ${energies.stepEv} eV`
      }`,
    ],
    [
      "counts",
      `in ${counts.units}${counts.whole ? "" : ", not whole numbers"}; highest ${
        short(counts.highest)
      }, sum ${short(counts.total)}`,
    ],
    ["photon energy", unit(region.photonEnergyEv, "eV") + (region.line === null ? "" : ` (${region.line})`)],
    ["bias", bias],
    ["analyzer work function", unit(region.analyzerWorkFunctionEv, "eV")],
    ["pass energy", unit(region.passEnergyEv, "eV")],
    ["dwell", `${unit(region.dwellS, "s")}, ${plural(region.sweeps, "sweep")}`],
    ...(variables.length > 0 ? [["variables", variables.join(", ")] as const] : []),
    ...(region.columns.length > 0 ? [["further columns", region.columns.join(", ")] as const] : []),
    ...(region.simulated ? [["origin", "simulated, not measured"] as const] : []),
  ];
  const title = [region.label || "(no label)", region.species].filter((part) => part !== "").join(", ");
  return [
    "",
    `Region ${index + 1}: ${title}`,
    ...rows.map(([name, value]) => `  ${name.padEnd(24)}${value}`),
  ];
}

function plural(count: number | null, word: string): string {
  return count === null ? `${word}s not given` : `${count} ${word}${count === 1 ? "" : "s"}`;
}

function short(value: number): string {
  return String(Number(value.toPrecision(6)));
}

/** What a fit would use, or why it would refuse. */
type FitAssumptions = { readonly inputs: FitInputs } | { readonly refused: readonly string[] };

async function fitAssumptions(path: string, columns?: ColumnPair): Promise<FitAssumptions> {
  try {
    const { result } = await fitFiles([path], columns ? { columns } : {});
    return { inputs: result.inputs };
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    return { refused: error.problems.map(({ message }) => message) };
  }
}

function fitLines(fit: FitAssumptions): string[] {
  if ("refused" in fit) {
    return [
      "",
      "A fit would refuse this:",
      ...fit.refused.map((reason) => `  ${reason}`),
    ];
  }
  const { inputs } = fit;
  const rows: readonly (readonly [string, number | null, string, string])[] = [
    ["photon energy", inputs.photonEnergyEv.value, "eV", inputs.photonEnergyEv.from],
    ["bias", inputs.biasV.value, "V", inputs.biasV.from],
    ["analyzer work function", inputs.analyzerWorkFunctionEv.value, "eV", inputs.analyzerWorkFunctionEv.from],
    ["Fermi level on the axis", inputs.fermiLevelEv.value, "eV", inputs.fermiLevelEv.from],
    ["temperature", inputs.temperatureK.value, "K", inputs.temperatureK.from],
    [
      "acceptance half-angle",
      inputs.acceptanceHalfAngleDeg.value,
      "degrees",
      inputs.acceptanceHalfAngleDeg.from,
    ],
  ];
  return [
    "",
    "A fit would use",
    ...inputs.regions.map(({ region, use }) => `  ${region || "the region"} for ${use}`),
    "and assume",
    `  ${"axis".padEnd(24)}${inputs.axis.kind} energy, ${inputs.axis.from}`,
    ...rows.map(([name, value, units, from]) =>
      `  ${name.padEnd(24)}${value === null ? "" : `${Number(value.toFixed(5))} ${units}, `}${from}`
    ),
  ];
}
