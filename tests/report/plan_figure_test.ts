import assert from "node:assert/strict";
import { planFigure, type PlanFigureInput, renderSvg } from "../../src/report/mod.ts";

const INPUT: PlanFigureInput = {
  title: "Gold",
  subtitle: ["predicted"],
  targetEv: 0.005,
  curves: [
    { label: "biasV=-9", timesS: [60, 600], uncertaintiesEv: [0.008, 0.004] },
    { label: "biasV=-3", timesS: [60, 600], uncertaintiesEv: [0.009, 0.005] },
  ],
};

Deno.test("planFigure() draws every setting, both axes with their units, and the target", async () => {
  const svg = await renderSvg(planFigure(INPUT));
  for (
    const text of ["Gold", "predicted", "biasV=-9", "biasV=-3", "Time / min", "Standard uncertainty / meV"]
  ) {
    assert.ok(svg.includes(`>${text}<`), text);
  }
  assert.match(svg, /mark-rule/);
});

Deno.test("planFigure() shows minutes and meV", () => {
  const { layer } = planFigure(INPUT) as { layer: { data: { values: unknown[] } }[] };
  assert.deepEqual(layer[0].data.values[1], { label: "biasV=-9", timeMin: 10, uncertaintyMeV: 4 });
  assert.deepEqual(layer[1].data.values, [{ uncertaintyMeV: 5 }]);
});

Deno.test("planFigure() refuses numbers that are not finite", () => {
  const curves = [{ label: "biasV=-9", timesS: [60, Infinity], uncertaintiesEv: [0.008, 0.004] }];
  assert.throws(() => planFigure({ ...INPUT, curves }), {
    name: "RangeError",
    message: "Cannot draw a plan as biasV=-9 must be finite: current value is Infinity",
  });
});
