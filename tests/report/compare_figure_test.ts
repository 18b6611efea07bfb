import assert from "node:assert/strict";
import { compareFigure, type CompareFigureInput, renderSvg } from "../../src/report/mod.ts";

const INPUT: CompareFigureInput = {
  title: "Gold",
  subtitle: ["verdict: differs"],
  regions: [{
    label: "",
    energiesEv: [9.6, 9.7, 9.8],
    counts: [3, 52, 110],
    expected: [2, 50, 100],
    standardErrors: [0, 1, 0],
  }],
  suspects: [{ name: "sample.temperatureK", drop: 30, isNamed: true }],
};

Deno.test("compareFigure() draws data, model, residuals in standard deviations and suspects without a warning", async () => {
  const svg = await renderSvg(compareFigure(INPUT));
  for (
    const text of ["Gold", "verdict: differs", "measured", "model", "Residual / σ", "sample.temperatureK"]
  ) {
    assert.ok(svg.includes(text), text);
  }
  const { data } = compareFigure(INPUT) as { data: { values: { residual: number }[] } };
  // (counts - expected)/sqrt(expected + error^2)
  assert.deepEqual(data.values.map(({ residual }) => residual.toFixed(6)), [
    (1 / Math.SQRT2).toFixed(6),
    (2 / Math.sqrt(51)).toFixed(6),
    "1.000000",
  ]);
});

Deno.test("compareFigure() refuses numbers that are none", () => {
  const [region] = INPUT.regions;
  assert.throws(
    () => compareFigure({ ...INPUT, regions: [{ ...region, expected: [1, NaN, 2] }] }),
    /expected must be finite/,
  );
  assert.throws(
    () => compareFigure({ ...INPUT, regions: [{ ...region, counts: [1] }] }),
    /as many counts as energies/,
  );
  assert.throws(() => compareFigure({ ...INPUT, regions: [] }), /there must be a region/);
});
