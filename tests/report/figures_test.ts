import assert from "node:assert/strict";
import {
  budgetFigure,
  type BudgetFigureInput,
  cutoffFigure,
  type CutoffFigureInput,
  depthFigure,
  type DepthFigureInput,
  levelsFigure,
  type LevelsFigureInput,
  lossFigure,
  type LossFigureInput,
  partialIntensitiesFigure,
  type PartialIntensitiesFigureInput,
  renderSvg,
} from "../../src/report/mod.ts";
import { rowsWith, textsOf } from "../support/drawing.ts";

/** Invented numbers of a gold surface under He I alpha at -9 V. */
const LEVELS: LevelsFigureInput = {
  title: "Gold",
  subtitle: ["from the fit"],
  photonEnergyEv: 21.218,
  workFunctionEv: { value: 5.1, standardUncertainty: 0.012 },
  maxKineticEnergyEv: { value: 16.118, standardUncertainty: 0.012 },
  valenceBandMaximumEv: null,
  recorded: { cutoffEv: 9.7, fermiLevelEv: 25.818 },
  biasV: -9,
  analyzerWorkFunctionEv: 4.4,
};
const at = (value: number) => ({ value, standardUncertainty: 0.001 });
const CUTOFF: CutoffFigureInput = {
  title: "Gold",
  subtitle: [],
  axisTitle: "Kinetic energy / eV",
  measured: {
    energiesEv: Array.from({ length: 100 }, (_, i) => 9 + 0.02 * i),
    counts: Array.from({ length: 100 }, (_, i) => (i < 35 ? 2 : 900 - i)),
  },
  conventions: [
    { name: "model", uncorrectedEv: at(9.7), correctedEv: at(9.7) },
    { name: "half height", uncorrectedEv: at(9.722), correctedEv: at(9.698) },
    { name: "steepest line", uncorrectedEv: at(9.676), correctedEv: at(9.696) },
  ],
};
const BUDGET: BudgetFigureInput = {
  title: "Gold",
  subtitle: ["W = 5.100(5) eV"],
  terms: [{ name: "counting", contributionEv: 0.003 }, { name: "photon energy", contributionEv: 0.004 }],
  combinedEv: 0.005,
};
const DEPTHS = Array.from({ length: 50 }, (_, i) => 0.1 * i);
const DEPTH: DepthFigureInput = {
  title: "Gold",
  subtitle: [],
  curves: [{ label: "no loss", depthsNm: DEPTHS, densitiesPerNm: DEPTHS.map((z) => Math.exp(-z)) }],
  marks: [{ label: "information depth 95 %", depthNm: 2.9957 }],
};
const LOSS: LossFigureInput = {
  title: "Gold",
  subtitle: [],
  axisTitle: "Kinetic energy / eV",
  energiesEv: [1, 2, 3],
  parts: [{ label: "no event", counts: [1, 2, 3] }, { label: "1 or more", counts: [5, 2, 0] }],
};

const PARTIAL: PartialIntensitiesFigureInput = {
  title: "Gold",
  subtitle: [],
  lines: [{ label: "Au 4f7/2", intensities: [1, 0.9, 0.8] }, { label: "Al 2s", intensities: [1, 1.1, 1.2] }],
};

/** Energies of the lines in the column of the analyzer, eV, ascending. */
function analyzerLevels(figure: Record<string, unknown>): number[] {
  return rowsWith(figure, "energyEv").filter((row) => row.from === 5.7 && "to" in row && !("labelEv" in row))
    .map(({ energyEv }) => Number(Number(energyEv).toFixed(9))).sort((a, b) => a - b);
}

/** When, the chart, and texts that must be read in it. */
const FIGURES: readonly (readonly [string, Record<string, unknown>, readonly string[]])[] = [
  ["levelsFigure() of a biased metal", levelsFigure(LEVELS), [
    "Energy from the Fermi level of the sample / eV",
    "photon energy: hν = 21.218 eV",
    "vacuum level: W = 5.100(12) eV",
    "max. kinetic energy 16.118(12) eV",
    "Fermi level at 25.818 eV",
    "cutoff at 9.700 eV",
    "vacuum level: W_A = 4.4 eV",
    "Fermi level: eU = −9 eV",
    "sample",
    "analyzer",
  ]],
  ["levelsFigure() of a semiconductor of which little is known", {
    ...levelsFigure({
      ...LEVELS,
      valenceBandMaximumEv: { value: 0.52, standardUncertainty: 0.03 },
      recorded: null,
      biasV: null,
      analyzerWorkFunctionEv: null,
    }),
  }, ["valence band: -0.520(30) eV", "sample"]],
  ["levelsFigure() of X-rays", levelsFigure({ ...LEVELS, photonEnergyEv: 1486.6, recorded: null }), [
    "photon energy: hν = 1486.6 eV",
  ]],
  ["cutoffFigure() of three conventions", cutoffFigure(CUTOFF), [
    "model",
    "half height",
    "steepest line",
    "Kinetic energy / eV",
    "Counts",
  ]],
  ["cutoffFigure() of exact positions", {
    ...cutoffFigure({
      ...CUTOFF,
      conventions: [{
        name: "model",
        uncorrectedEv: { value: 9.7, standardUncertainty: 0 },
        correctedEv: { value: 9.7, standardUncertainty: 0 },
      }],
    }),
  }, ["model"]],
  ["budgetFigure() of two terms", budgetFigure(BUDGET), [
    "counting",
    "3.0 meV",
    "photon energy",
    "4.0 meV",
    "combined",
    "5.0 meV",
    "Standard uncertainty of the work function / meV",
  ]],
  ["budgetFigure() of nothing but zeros", {
    ...budgetFigure({ ...BUDGET, terms: [{ name: "bias", contributionEv: 0 }], combinedEv: 0 }),
  }, ["0.0 meV"]],
  ["depthFigure() of one curve", depthFigure(DEPTH), [
    "Depth below the surface / nm",
    "Share of the electrons per depth / (1/nm)",
    "information depth 95 %: 3.00 nm",
    "no loss",
  ]],
  ["lossFigure() of two parts", lossFigure(LOSS), [
    "no event",
    "1 or more",
    "all",
    "Counts",
    "Kinetic energy / eV",
  ]],
  ["partialIntensitiesFigure() of two lines", partialIntensitiesFigure(PARTIAL), [
    "Number of energy losses",
    "Electrons relative to those without",
    "Au 4f7/2",
    "Al 2s",
    "2",
  ]],
];
for (const [what, figure, words] of FIGURES) {
  Deno.test(`${what} draws without a warning and can be read`, async () => {
    const svg = await renderSvg(figure); // refuses a chart that Vega-Lite warns of
    assert.doesNotMatch(svg, /NaN|undefined|Infinity/);
    // Drawings that are part of one page must not share names, and none needs one.
    assert.doesNotMatch(svg, / id="/);
    // A page of ours forbids styles in attributes.
    assert.doesNotMatch(svg, / style="/);
    const texts = textsOf(svg);
    for (const word of [...words, "Gold"]) {
      assert.ok(texts.includes(word), `"${word}" is not among ${texts.join(" | ")}`);
    }
  });
}

Deno.test("levelsFigure() puts every level where the model has it: eU, eU + W_A, W, h nu", () => {
  // W - W_A - eU and h nu - W_A - eU as recorded, so the zero of the axis is the analyzer's vacuum level (textbook relation).
  const levels = analyzerLevels(levelsFigure(LEVELS));
  assert.deepEqual(levels, [-9, -4.6, -4.6, 5.1, 21.218]);
});

Deno.test("levelsFigure() shows an axis that is not what it is taken for: its zero leaves the analyzer's vacuum level", () => {
  const wrong = levelsFigure({ ...LEVELS, recorded: { cutoffEv: 0.7, fermiLevelEv: 16.818 } });
  const levels = analyzerLevels(wrong);
  assert.deepEqual(levels, [-9, -4.6, 4.4, 5.1, 21.218]);
});

Deno.test("levelsFigure() keeps labels apart, and in the frame", () => {
  for (const photonEnergyEv of [4.9, 21.218, 1486.6]) {
    const rows = rowsWith(levelsFigure({ ...LEVELS, photonEnergyEv }), "label");
    const span = 1.12 * (photonEnergyEv + 9);
    for (const column of new Set(rows.map(({ from }) => from))) {
      const places = rows.filter(({ from }) => from === column).map(({ energyEv }) => Number(energyEv)).sort((
        a,
        b,
      ) => a - b);
      // 15 of 400 pixels, text of 11.
      places.slice(1).forEach((place, i) =>
        assert.ok(place - places[i] >= (14.9 / 400) * span * 0.8, `${places}`)
      );
    }
  }
});

Deno.test("budgetFigure() sorts its terms and draws them in meV", () => {
  const rows = rowsWith(budgetFigure(BUDGET), "meV");
  assert.deepEqual(rows.map(({ name }) => name), ["photon energy", "counting", "combined"]);
  assert.deepEqual(rows.map(({ text }) => text), ["4.0 meV", "3.0 meV", "5.0 meV"]);
});

Deno.test("lossFigure() adds its parts up", () => {
  const sum = rowsWith(lossFigure(LOSS), "y").filter(({ label }) => label === "all").map(({ y }) => y);
  assert.deepEqual(sum, [6, 4, 3]);
});

Deno.test("figures shorten a title that no figure has room for", async () => {
  const svg = await renderSvg(
    budgetFigure({ ...BUDGET, title: "x".repeat(1e6), subtitle: ["y ".repeat(1e5)] }),
  );
  assert.ok(svg.length < 20_000, `${svg.length}`);
});

/** What is wrong, the call, and the sentence. */
const REFUSED: readonly (readonly [string, () => unknown, RegExp])[] = [
  [
    "an energy is not finite",
    () => levelsFigure({ ...LEVELS, biasV: NaN }),
    /^Cannot draw levels as every energy must be finite: current value is NaN$/,
  ],
  [
    "there is no convention",
    () => cutoffFigure({ ...CUTOFF, conventions: [] }),
    /^Cannot draw a cutoff as there must be a convention: current value is 0$/,
  ],
  [
    "no channel is near the conventions",
    () => cutoffFigure({ ...CUTOFF, measured: { energiesEv: [1, 1.02], counts: [1, 2] } }),
    /^Cannot draw a cutoff as there must be counts in 9\.\d+\.\.9\.\d+ eV/,
  ],
  [
    "lengths differ",
    () => cutoffFigure({ ...CUTOFF, measured: { energiesEv: [1, 2], counts: [1] } }),
    /^Cannot draw a cutoff as there must be as many counts as energies/,
  ],
  [
    "there is no term",
    () => budgetFigure({ ...BUDGET, terms: [] }),
    /^Cannot draw a budget as there must be a term: current value is 0$/,
  ],
  [
    "a contribution is negative",
    () => budgetFigure({ ...BUDGET, terms: [{ name: "bias", contributionEv: -1 }] }),
    /^Cannot draw a budget as bias must be finite and >= 0 eV: current value is "-1 eV"$/,
  ],
  [
    "there is no curve",
    () => depthFigure({ ...DEPTH, curves: [] }),
    /^Cannot draw depths as there must be a curve: current value is 0$/,
  ],
  [
    "a part is too short",
    () => lossFigure({ ...LOSS, parts: [{ label: "no event", counts: [1, 2] }] }),
    /^Cannot draw losses as no event must have as many heights as places/,
  ],
  [
    "there are more lines than colors",
    () => partialIntensitiesFigure({ ...PARTIAL, lines: Array(7).fill(PARTIAL.lines[0]) }),
    /^Cannot draw partial intensities as there must be 1\.\.6 lines: current value is 7$/,
  ],
  [
    "an intensity is not finite",
    () => partialIntensitiesFigure({ ...PARTIAL, lines: [{ label: "Au 4f7/2", intensities: [1, NaN] }] }),
    /^Cannot draw partial intensities as Au 4f7\/2 must be finite: current value is NaN$/,
  ],
];
for (const [what, call, message] of REFUSED) {
  Deno.test(`figures are refused when ${what}`, () => {
    assert.throws(call, { name: "RangeError", message });
  });
}
