import assert from "node:assert/strict";
import {
  axisTitle,
  type FigurePoint,
  renderSvg,
  sweepFigure,
  type SweepFigureInput,
} from "../../src/report/mod.ts";

/** Values over settings of one or two paths. */
function input(points: readonly FigurePoint[], ...paths: readonly string[]): SweepFigureInput {
  return {
    title: "Gold",
    subtitle: ["simulated"],
    axes: paths.map((path) => ({ path, isLogarithmic: path.endsWith("PerS") })),
    isGrid: true,
    quantity: "fit.workFunctionEv",
    points,
  };
}

function point(
  settings: Record<string, unknown>,
  value: number | null,
  standardUncertainty: number | null,
): FigurePoint {
  return { settings, value, standardUncertainty };
}

async function svg(figure: Record<string, unknown> | null): Promise<string> {
  assert.ok(figure !== null);
  return await renderSvg(figure); // refuses a chart that draws with a warning
}

const LINE = input([
  point({ biasV: -9 }, 5.101, 0.003),
  point({ biasV: -7 }, null, null),
  point({ biasV: -5 }, 5.098, 0.004),
], "biasV");

Deno.test("sweepFigure() draws one axis with units, uncertainty and what is left out", async () => {
  const text = await svg(sweepFigure(LINE));
  for (
    const words of ["bias / V", "fit work function / eV", "Gold", "simulated", "1 without a value, left out"]
  ) {
    assert.ok(text.includes(words), words);
  }
  assert.match(text, /standard uncertainty 0\.0030 to 0\.0040 eV, shown as band/);
});

Deno.test("sweepFigure() draws names as categories with bars", async () => {
  const faces = ["111", "100"].map((face, i) => point({ "sample.face": face }, 5 + i, 0.1));
  const text = await svg(sweepFigure(input(faces, "sample.face")));
  assert.match(text, />111</);
  assert.match(text, />sample face</);
});

const GRID = [1, 2, 3].flatMap((a) =>
  [1e8, 1e9].map((b) => point({ "sample.temperatureK": 100 * a, "light.photonFluxPerS": b }, a * b, null))
);

Deno.test("sweepFigure() draws two axes as a map with one cell a point", async () => {
  const figure = input(GRID, "sample.temperatureK", "light.photonFluxPerS");
  const text = await svg(sweepFigure(figure));
  for (const words of ["sample temperature / K", "light photon flux / 1/s", ">1e+9<"]) {
    assert.ok(text.includes(words), words);
  }
  const cells = new Set(text.match(/fill="rgb\([^"]*"/g));
  assert.equal(cells.size, 6, "six values in six colors");
});

Deno.test("sweepFigure() draws scattered points of two axes in color", async () => {
  const figure = { ...input(GRID, "sample.temperatureK", "light.photonFluxPerS"), isGrid: false };
  assert.match(await svg(sweepFigure(figure)), /sample temperature \/ K/);
});

Deno.test("sweepFigure() is null where nothing can be drawn", () => {
  assert.equal(sweepFigure({ ...LINE, points: [point({ biasV: -7 }, null, null)] }), null);
  assert.equal(sweepFigure({ ...LINE, axes: [] }), null);
  assert.equal(sweepFigure({ ...LINE, axes: [...LINE.axes, ...LINE.axes, ...LINE.axes] }), null);
});

Deno.test("axisTitle() takes the unit off the name", () => {
  // Names and units as in the scenario and in result.json.
  const titles = {
    "sample.temperatureK": "sample temperature / K",
    biasV: "bias / V",
    "geometry.emissionAngleDeg": "geometry emission angle / degrees",
    "acquisition.darkRateCountsPerS": "acquisition dark rate / counts/s",
    "acquisition.dwellS": "acquisition dwell / s",
    "simulation.histories": "simulation histories",
    "sample.transportMeanFreePathNm": "sample transport mean free path / nm",
    "fit.workFunctionEv": "fit work function / eV",
  };
  for (const [name, title] of Object.entries(titles)) assert.equal(axisTitle(name), title);
});
