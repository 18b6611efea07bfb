import type { Estimate } from "../base/mod.ts";
import { escapeHtml } from "./page.ts";
import { renderSvg } from "./render.ts";
import {
  type FigureCurve,
  type FigureEdge,
  spectrumFigure,
  type SpectrumFigureInput,
} from "./spectrum_figure.ts";
import { formatEstimate } from "./values.ts";

/** A value that a notebook shows as a table and a figure, by its method `Symbol.for("Jupyter.display")`. */
export interface Displayed {
  /** Gives contents by media type: `text/plain`, `text/html` and `image/svg+xml`. */
  readonly [display: symbol]: () => Promise<Record<string, string>>;
}

/** A fitted edge, as a fit returns it. */
export interface DisplayEdge {
  /** `true` when the minimizer converged. */
  readonly converged: boolean;
  /** Position on the kinetic axis, eV. */
  readonly positionEv: Estimate;
  /** Energies of the window, eV, shape (n). */
  readonly energiesEv: ArrayLike<number>;
  /** Counts there, shape (n). */
  readonly counts: ArrayLike<number>;
  /** Fitted counts there, shape (n). */
  readonly fittedCounts: ArrayLike<number>;
}

/** What is shown of a fit; the answer of `measureWorkFunction` is one. */
export interface DisplayFit {
  /** Work function, eV. */
  readonly workFunctionEv: Estimate | null;
  /** Maximum kinetic energy, eV. */
  readonly maxKineticEnergyEv: Estimate | null;
  /** Ionization energy, eV. */
  readonly ionizationEnergyEv: Estimate | null;
  /** Secondary cutoff, eV. */
  readonly cutoffEv: Estimate | null;
  /** Fermi edge, eV. */
  readonly fermiEdgeEv: Estimate | null;
  /** How far to trust it. */
  readonly verdict: string;
  /** Why not further. */
  readonly reasons: readonly string[];
  /** Photon energy and kind of axis. */
  readonly inputs: {
    readonly photonEnergyEv: { readonly value: number };
    readonly axis: { readonly kind: "kinetic" | "binding" };
  };
  /** Fitted cutoff. */
  readonly cutoffFit: DisplayEdge | null;
  /** Fitted Fermi or valence edge. */
  readonly upperFit: DisplayEdge | null;
}

const DISPLAY = Symbol.for("Jupyter.display");

const ROWS = [
  ["work function", "workFunctionEv"],
  ["maximum kinetic energy", "maxKineticEnergyEv"],
  ["ionization energy", "ionizationEnergyEv"],
  ["secondary cutoff", "cutoffEv"],
  ["Fermi edge", "fermiEdgeEv"],
] as const;

/**
 * Shows a fit in a notebook: verdict, values with standard uncertainties, and the figure of the spectrum with its edges.
 *
 * @param result The answer of `measureWorkFunction`.
 * @param regions The regions it was given.
 * @returns What a notebook shows when it is the last expression of a cell.
 * @example The plain text of a fit that failed
 * ```ts
 * import { displayFit } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const shown = displayFit({
 *   workFunctionEv: null, maxKineticEnergyEv: null, ionizationEnergyEv: null, cutoffEv: null, fermiEdgeEv: null,
 *   verdict: "failed", reasons: ["no cutoff was found"],
 *   inputs: { photonEnergyEv: { value: 21.218 }, axis: { kind: "kinetic" } }, cutoffFit: null, upperFit: null,
 * }, [{ label: "", energiesEv: [1, 2], counts: [3, 4] }]);
 * const bundle = await shown[Symbol.for("Jupyter.display")]();
 * assert.equal(bundle["text/plain"], "verdict: failed\nbecause no cutoff was found");
 * ```
 */
export function displayFit(
  result: DisplayFit,
  regions: readonly (FigureCurve & { readonly label: string })[],
): Displayed {
  const { verdict, reasons, inputs } = result;
  const rows = ROWS.flatMap(([name, key]) => {
    const estimate = result[key];
    return estimate === null ? [] : [[name, formatEstimate(estimate, "eV")] as const];
  });
  const isBinding = inputs.axis.kind === "binding";
  const onKineticAxis = ({ energiesEv, counts }: FigureCurve): FigureCurve => ({
    energiesEv: isBinding
      ? Array.from(energiesEv, (energyEv) => inputs.photonEnergyEv.value - energyEv)
      : energiesEv,
    counts,
  });
  return displayed(
    [["verdict", verdict], ...reasons.map((reason) => ["because", reason] as const), ...rows],
    {
      title: result.workFunctionEv === null
        ? "No work function"
        : `W = ${formatEstimate(result.workFunctionEv, "eV")}`,
      subtitle: [`verdict: ${verdict}`],
      axisTitle: isBinding ? "hν − binding energy / eV" : "Kinetic energy / eV",
      measured: regions.map((region) => ({ label: region.label, curve: onKineticAxis(region) })),
      expected: null,
      edges: [
        ...edgeOf("secondary cutoff", result.cutoffFit, result.cutoffEv),
        ...(result.fermiEdgeEv !== null
          ? edgeOf("Fermi edge", result.upperFit, result.fermiEdgeEv)
          : edgeOf("valence-band edge", result.upperFit, result.upperFit?.positionEv ?? null)),
      ],
    },
  );
}

/**
 * Shows a simulated spectrum in a notebook.
 *
 * @param title Title of the figure.
 * @param expected Expected counts with their standard errors, as `expectedSpectrum` returns them.
 * @param counts Counts with noise, as `countSpectrum` returns them.
 * @returns What a notebook shows when it is the last expression of a cell.
 */
export function displaySpectrum(
  title: string,
  expected: {
    readonly kineticEnergiesEv: ArrayLike<number>;
    readonly counts: ArrayLike<number>;
    readonly standardErrors: ArrayLike<number>;
  },
  counts: ArrayLike<number>,
): Displayed {
  const energiesEv = expected.kineticEnergiesEv;
  const last = energiesEv.length - 1;
  const total = Array.from(counts).reduce((sum, one) => sum + one, 0);
  return displayed([
    ["spectrum", title],
    [
      "kinetic energy",
      `${energiesEv[0].toFixed(3)} to ${energiesEv[last].toFixed(3)} eV, ${last + 1} channels`,
    ],
    ["counts", `${total} simulated`],
  ], {
    title,
    subtitle: ["simulated"],
    axisTitle: "Kinetic energy as recorded / eV",
    measured: [{ label: "simulated counts", curve: { energiesEv, counts } }],
    expected: { energiesEv, counts: expected.counts, standardErrors: expected.standardErrors },
    edges: [],
  });
}

function displayed(rows: readonly (readonly [string, string])[], figure: SpectrumFigureInput): Displayed {
  return {
    [DISPLAY]: async () => {
      const svg = await renderSvg(spectrumFigure(figure));
      const cells = rows.map(([name, value]) =>
        `<tr><th>${escapeHtml(name)}</th><td>${escapeHtml(value)}</td></tr>`
      );
      return {
        "text/plain": rows.map(([name, value]) =>
          name === "because" ? `because ${value}` : `${name}: ${value}`
        ).join("\n"),
        "text/html": `<table>${cells.join("")}</table>${svg}`,
        "image/svg+xml": svg,
      };
    },
  };
}

function edgeOf(name: string, fit: DisplayEdge | null, position: Estimate | null): FigureEdge[] {
  if (fit === null || position === null || !fit.converged) return [];
  return [{
    name,
    positionEv: position.value,
    standardUncertaintyEv: position.standardUncertainty,
    data: fit,
    fitted: { energiesEv: fit.energiesEv, counts: fit.fittedCounts },
  }];
}
