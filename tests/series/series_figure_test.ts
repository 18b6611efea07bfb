import assert from "node:assert/strict";
import { renderSvg, seriesFigure, type SeriesFigureInput } from "../../src/report/mod.ts";

const INPUT: SeriesFigureInput = {
  title: 'Gold <script> & "foil"',
  subtitle: ["work function 5.1 eV"],
  xTitle: "Photon energy / eV",
  yTitle: "Yield",
  isReversed: false,
  series: [
    { label: "measured", x: [4, 5, 6], y: [0, 1, 4], yUncertainties: [0.1, 0.1, 0.2], mark: "points" },
    { label: "fit", x: [4, 6], y: [0, 4], yUncertainties: null, mark: "line" },
  ],
};

Deno.test("seriesFigure() draws titles, legend and bars without warnings, the same bytes each time", async () => {
  const svg = await renderSvg(seriesFigure(INPUT));
  for (const text of ["Photon energy / eV", "Yield", "measured", "fit", "work function 5.1 eV"]) {
    assert.ok(svg.includes(text), text);
  }
  assert.ok(!svg.includes("<script>"));
  assert.match(svg, /Gold &lt;script&gt; &amp; "foil"/);
  assert.equal(await renderSvg(seriesFigure(INPUT)), svg);
});

Deno.test("seriesFigure() writes small ordinates as powers of ten and others plainly", async () => {
  const [first] = INPUT.series;
  const svgOf = (scale: number): Promise<string> =>
    renderSvg(seriesFigure({
      ...INPUT,
      series: [{ ...first, y: Array.from(first.y, (y) => y * scale), yUncertainties: null }],
    }));
  const labels = (svg: string): string[] =>
    Array.from(svg.matchAll(/>([^<>]+)<\/text>/g), ([, text]) => text);
  const small = labels(await svgOf(1e-12));
  assert.ok(small.includes("2e-12"), small.join(" "));
  assert.ok(small.includes("0") && !small.some((text) => text.startsWith("0.0000")), small.join(" "));
  assert.ok(labels(await svgOf(1)).includes("2.0"));
});

Deno.test("seriesFigure() refuses numbers that cannot be drawn", () => {
  const [first] = INPUT.series;
  assert.throws(() => seriesFigure({ ...INPUT, series: [] }), {
    message: "Cannot draw a series as there must be at least one curve: current value is 0",
  });
  assert.throws(() => seriesFigure({ ...INPUT, series: [{ ...first, y: [1, NaN, 2] }] }), {
    message: "Cannot draw a series as the numbers of measured must be finite: current value is NaN",
  });
  assert.throws(() => seriesFigure({ ...INPUT, series: [{ ...first, y: [1] }] }), {
    message:
      'Cannot draw a series as measured must have as many ordinates and uncertainties as abscissas: current value is "3, 1"',
  });
});
