import assert from "node:assert/strict";
import { compile, type TopLevelSpec } from "vega-lite";
import { renderSvg, spectrumFigure, type SpectrumFigureInput } from "../../src/report/mod.ts";
import { rowsWith, textsOf } from "../support/drawing.ts";

/** Invented counts: a cutoff at 9.7 eV and a Fermi edge at 25.8 eV, on `channels` channels. */
function curve(fromEv: number, toEv: number, channels: number) {
  const energiesEv = Array.from(
    { length: channels },
    (_, i) => fromEv + ((toEv - fromEv) * i) / (channels - 1),
  );
  const counts = energiesEv.map((energy) =>
    Math.round(2 + 5000 / (1 + Math.exp(-(energy - 9.7) / 0.02)) / (1 + Math.exp((energy - 25.8) / 0.03)))
  );
  return { energiesEv, counts };
}

function edge(name: string, positionEv: number) {
  const data = curve(positionEv - 0.5, positionEv + 0.5, 51);
  const fitted = { energiesEv: data.energiesEv, counts: data.counts.map((count) => count + 1) };
  return { name, positionEv, standardUncertaintyEv: 0.0012, data, fitted };
}

const EDGES = [edge("secondary cutoff", 9.7), edge("Fermi edge", 25.8)];
const FIT: SpectrumFigureInput = {
  title: "Gold",
  subtitle: ["W = 5.100(12) eV", "verdict: good"],
  axisTitle: "Kinetic energy as recorded / eV",
  measured: [{ label: "", curve: curve(8.8, 29, 300) }],
  expected: null,
  edges: EDGES,
};

function simulated(channels: number): SpectrumFigureInput {
  const measured = curve(8.8, 29, channels);
  const standardErrors = measured.counts.map(Math.sqrt);
  return {
    ...FIT,
    measured: [{ label: "simulated", curve: measured }],
    expected: { ...measured, standardErrors },
    edges: [],
  };
}

const [low, high] = [curve(8.8, 13, 80), curve(23, 29, 90)];
const FIGURES: readonly (readonly [string, SpectrumFigureInput])[] = [
  ["both edges are fitted", FIT],
  ["one edge is fitted", { ...FIT, edges: EDGES.slice(0, 1) }],
  ["nothing is fitted", { ...FIT, edges: [] }],
  ["the spectrum is simulated", simulated(300)],
  ["there are more channels than dots can show", simulated(2000)],
  ["there are two regions", {
    ...FIT,
    measured: [{ label: "low", curve: low }, { label: "high", curve: high }],
  }],
  ["nothing was counted", {
    ...FIT,
    measured: [{ label: "", curve: { energiesEv: [1, 2, 3], counts: [0, 0, 0] } }],
    edges: [],
  }],
  ["there is one channel", {
    ...FIT,
    measured: [{ label: "", curve: { energiesEv: [9], counts: [4] } }],
    edges: [],
  }],
  ["a position is exact", { ...FIT, edges: [{ ...EDGES[0], standardUncertaintyEv: 0 }] }],
];
for (const [when, input] of FIGURES) {
  Deno.test(`spectrumFigure() compiles without a warning and draws when ${when}`, async () => {
    const warnings: unknown[] = [];
    const keep = (...args: readonly unknown[]) => {
      warnings.push(args);
      return logger;
    };
    const logger = { level: keep, error: keep, warn: keep, info: () => logger, debug: () => logger };
    const figure = spectrumFigure(input);
    compile(figure as unknown as TopLevelSpec, { logger: logger as never });
    assert.deepEqual(warnings, []);
    const svg = await renderSvg(figure);
    assert.match(svg, /^<svg [\s\S]*<\/svg>\s*$/);
    assert.doesNotMatch(svg, /NaN|undefined|Infinity/);
    // Balanced: what opens closes.
    const opened = svg.match(/<[a-zA-Z](?:[^>]*[^\/>])?>/g)?.length;
    assert.equal(svg.match(/<\/[a-zA-Z]+>/g)?.length, opened);
  });
}

Deno.test("spectrumFigure() names its axes and both edges, with their uncertainties, in the drawing", async () => {
  const texts = textsOf(await renderSvg(spectrumFigure(FIT)));
  assert.ok(texts.filter((text) => text === "Kinetic energy as recorded / eV").length >= 2);
  for (
    const text of [
      "Counts (square-root scale)",
      "Counts",
      "Residual / √N",
      "Gold",
      "W = 5.100(12) eV",
      "secondary cutoff 9.7000(12) eV",
      "Fermi edge 25.8000(12) eV",
      "secondary cutoff fit",
      "Fermi edge fit",
      "measured",
    ]
  ) assert.ok(texts.includes(text), `"${text}" is not among ${texts.join(" | ")}`);
});

Deno.test("spectrumFigure() leaves edges out when there are none", async () => {
  const texts = textsOf(await renderSvg(spectrumFigure(simulated(300))));
  assert.ok(!texts.some((text) => /edge|cutoff/.test(text)), texts.join(" | "));
  assert.ok(texts.includes("simulated") && texts.includes("expected ± std. error"));
});

Deno.test("renderSvg() gives the same bytes when other figures were drawn in between", async () => {
  const first = await renderSvg(spectrumFigure(FIT));
  await renderSvg(spectrumFigure(simulated(50)));
  assert.equal(await renderSvg(spectrumFigure(FIT)), first);
  const other = { ...FIT, edges: [{ ...EDGES[0], positionEv: 9.71 }, EDGES[1]] };
  assert.notEqual(await renderSvg(spectrumFigure(other)), first);
});

Deno.test("renderSvg() escapes what a person wrote, wherever it is shown", async () => {
  const text = `<script>alert("1")</script>&"'`;
  const svg = await renderSvg(spectrumFigure({
    title: text,
    subtitle: [text],
    axisTitle: text,
    measured: [{ label: text, curve: low }, { label: "high", curve: high }],
    expected: null,
    edges: [{ ...EDGES[0], name: text }, EDGES[1]],
  }));
  assert.doesNotMatch(svg, /<script|<\/script/i);
  // Outside of tags only entities may begin with &, and nothing with <.
  assert.doesNotMatch(svg.replaceAll(/<[^<>]*>/g, ""), /<|&(?!(amp|lt|gt|quot|apos|#\d+);)/);
  const texts = textsOf(svg);
  for (const shown of [text, `${text} fit`, `${text} 9.7000(12) eV`]) {
    assert.ok(texts.includes(shown), `${shown} is not among ${texts.join(" | ")}`);
  }
});

Deno.test("renderSvg() refuses a chart that Vega-Lite warns of", async () => {
  const chart = {
    data: { values: [{ x: 1 }] },
    mark: "point",
    encoding: { nowhere: { field: "x", type: "quantitative" } },
  };
  await assert.rejects(renderSvg(chart), {
    name: "Error",
    message: /^Cannot draw a chart with warnings:\n.*nowhere/,
  });
});

Deno.test("spectrumFigure() draws (counts - model) / sqrt(model), and says where there is no model", async () => {
  const energiesEv = [1, 2, 3, 4];
  // (9 - 4) / 2 = 2.5, (16 - 16) / 4 = 0, (1 - 9) / 3 = -8/3; none where the model is 0.
  const figure = spectrumFigure({
    ...FIT,
    measured: [{ label: "", curve: { energiesEv, counts: [9, 16, 1, 2] } }],
    expected: { energiesEv, counts: [4, 16, 9, 0], standardErrors: [1, 1, 1, 0] },
    edges: [],
  });
  const residuals = rowsWith(figure, "residual").filter((row) => "energyEv" in row);
  assert.deepEqual(residuals, [
    { energyEv: 1, residual: 2.5 },
    { energyEv: 2, residual: 0 },
    { energyEv: 3, residual: -8 / 3 },
  ]);
  assert.ok(textsOf(await renderSvg(figure)).includes("channels with a model of 0, not drawn: 1"));
});

Deno.test("spectrumFigure() leaves its input alone", () => {
  const before = structuredClone(FIT);
  spectrumFigure(FIT);
  assert.deepEqual(FIT, before);
});

const [ONE] = FIT.measured;
const bent = {
  energiesEv: EDGES[0].data.energiesEv.map((energy) => energy + 0.01),
  counts: EDGES[0].data.counts,
};
/** What is wrong, the input, and the sentence. */
const REFUSED: readonly (readonly [string, Partial<SpectrumFigureInput>, string])[] = [
  ["there is no curve", { measured: [] }, "measured must have a curve: current value is 0"],
  [
    "a curve is empty",
    { measured: [{ label: "", curve: { energiesEv: [], counts: [] } }] },
    'measured must have as many counts as energies, and at least one: current value is "0 energies, 0 counts"',
  ],
  [
    "lengths differ",
    { measured: [{ label: "", curve: { energiesEv: [1, 2], counts: [1] } }] },
    'measured must have as many counts as energies, and at least one: current value is "2 energies, 1 counts"',
  ],
  [
    "a count is NaN",
    { measured: [{ label: "", curve: { energiesEv: [1, 2], counts: [1, NaN] } }] },
    "measured counts must be finite and >= 0: current value is NaN",
  ],
  [
    "a count is negative",
    { measured: [{ label: "", curve: { energiesEv: [1, 2], counts: [1, -2] } }] },
    "measured counts must be finite and >= 0: current value is -2",
  ],
  [
    "an energy is infinite",
    { measured: [{ label: "", curve: { energiesEv: [1, Infinity], counts: [1, 2] } }] },
    "measured energy must be finite: current value is Infinity",
  ],
  [
    "an uncertainty is negative",
    { edges: [{ ...EDGES[0], standardUncertaintyEv: -0.1 }] },
    "secondary cutoff standard uncertainty must be finite and >= 0: current value is -0.1",
  ],
  [
    "a position is NaN",
    { edges: [{ ...EDGES[0], positionEv: NaN }] },
    "secondary cutoff position must be finite: current value is NaN",
  ],
  [
    "fitted energies are not those of the data",
    { edges: [{ ...EDGES[0], fitted: bent }] },
    'secondary cutoff fitted energies must be those of its data: current value is "others"',
  ],
  [
    "a measured energy has no expectation",
    { expected: { energiesEv: [1], counts: [1], standardErrors: [0] }, edges: [] },
    `measured energies must be among the expected ones: current value is "${ONE.curve.energiesEv[0]} eV"`,
  ],
];
for (const [what, part, sentence] of REFUSED) {
  Deno.test(`spectrumFigure() refuses its input when ${what}`, () => {
    assert.throws(() => spectrumFigure({ ...FIT, ...part }), {
      name: "RangeError",
      message: `Cannot draw a spectrum as ${sentence}`,
    });
  });
}
