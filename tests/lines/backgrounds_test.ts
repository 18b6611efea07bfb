import assert from "node:assert/strict";
import { shirleyBackground, tougaardBackground, tougaardDensityPerEv } from "../../src/lines/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { integrate } from "../support/integrate.ts";

Deno.test("shirleyBackground() gives the step of a line back", () => {
  // A Gaussian line with a step in proportion to its integral above; the step of the line is erfc (closed form).
  const energies = Float64Array.from({ length: 401 }, (_, i) => 90 + 0.05 * i);
  const line = energies.map((e) => 300 * Math.exp(-((e - 100) ** 2)));
  let above = 0;
  const step = new Float64Array(401);
  for (let i = 399; i >= 0; i--) {
    above += 0.025 * (line[i] + line[i + 1]);
    step[i] = 0.1 * above;
  }
  const background = shirleyBackground(energies, line.map((value, i) => value + step[i] + 40), 1);
  background.forEach((value, i) => assertClose(value, step[i] + 40, { absolute: 1e-6 }, `channel ${i}`));
  // The whole step is a tenth of the area, 300 sqrt(pi) (exact).
  assertClose(background[0] - background[400], 30 * Math.sqrt(Math.PI), { relative: 1e-6 });
});

Deno.test("shirleyBackground() refuses a spectrum without a line", () => {
  const energies = [1, 2, 3, 4];
  assert.throws(() => shirleyBackground(energies, [5, 5, 5, 5], 1), {
    message:
      'Cannot compute a Shirley background as the iteration must settle, which needs a line: current value is "no line"',
  });
  assert.throws(() => shirleyBackground(energies, [5, 5, 5, 5], 3), {
    message: "Cannot compute a Shirley background as endChannels must be in 1..2: current value is 3",
  });
});

/** Classes of S. Tougaard, Surf. Interface Anal. 25, 137 (1997) and the universal form of 11, 453 (1988) (from memory). */
const CLASSES = [
  { name: "universal", cEv2: 1643, dEv2: null, topEv: 23.4023, b: 3286, onsetEv: 0 },
  { name: "polymers", cEv2: 551, dEv2: 436, topEv: 21.1643, b: 395.530, onsetEv: 0 },
  { name: "SiO2", cEv2: 542, dEv2: 275, topEv: 21.8076, b: 298.972, onsetEv: 0 },
  { name: "Si", cEv2: 325, dEv2: 96, topEv: 17.3626, b: 131.205, onsetEv: 0 },
  { name: "Ge", cEv2: 260, dEv2: 62, topEv: 15.6441, b: 92.9825, onsetEv: 0 },
  { name: "Al", cEv2: 230, dEv2: 4.5, topEv: 15.1287, b: 21.3837, onsetEv: 0 },
];

Deno.test("tougaardDensityPerEv() is normalized and has its maxima where the closed forms put them", () => {
  for (const { name, topEv, b, ...shape } of CLASSES) {
    const density = (loss: number): number => tougaardDensityPerEv(loss, shape);
    for (const step of [-0.01, 0.01]) assert.ok(density(topEv + step) < density(topEv), `${name}: maximum`);
    const { cEv2, dEv2 } = shape;
    const published = dEv2 === null
      ? b * topEv / (cEv2 + topEv ** 2) ** 2
      : b * topEv / ((cEv2 - topEv ** 2) ** 2 + dEv2 * topEv ** 2);
    assertClose(density(topEv), published, { relative: 3e-6 }, `${name}: height`);
    // From 500 eV on the tails are C-free: 1/T^3, whose integral is b/(2 500^2) within 2 C/500^2.
    const integral = integrate(density, [0, 10, 14, 15, 16, 20, 30, 60, 150, 500], 400) + b / (2 * 500 ** 2);
    assertClose(integral, 1, { absolute: 2e-4 }, `${name}: integral`);
  }
});

Deno.test("tougaardDensityPerEv() is normalized above an onset", () => {
  for (const shape of [{ cEv2: 542, dEv2: 275, onsetEv: 9 }, { cEv2: 1643, dEv2: null, onsetEv: 20 }]) {
    const density = (loss: number): number => tougaardDensityPerEv(loss, shape);
    assert.equal(density(shape.onsetEv - 0.01), 0);
    const to = 2000;
    const tail = density(to) * to / 2;
    const integral = integrate(density, [shape.onsetEv * (1 + 1e-12), 30, 60, 200, to], 2000) + tail;
    assertClose(integral, 1, { absolute: 2e-4 }, `onset ${shape.onsetEv}`);
  }
  assert.throws(() => tougaardDensityPerEv(5, { cEv2: 10, dEv2: 50, onsetEv: 0 }), {
    message:
      'Cannot use Tougaard\'s cross-section as cEv2 must be > 0, dEv2 in 0..4 cEv2 and onsetEv >= 0: current value is "10, 50, 0"',
  });
});

Deno.test("tougaardBackground() spreads a single channel like the cross-section", () => {
  const energies = Float64Array.from({ length: 101 }, (_, i) => i);
  const counts = new Float64Array(101);
  counts[90] = 1000;
  const shape = { cEv2: 1643, dEv2: null, onsetEv: 0 };
  const background = tougaardBackground(energies, counts, shape, 0.8);
  for (const i of [0, 40, 89, 90, 95]) {
    const loss = 90 - i;
    const expected = loss > 0 ? 0.8 * 1000 * 2 * 1643 * loss / (1643 + loss * loss) ** 2 : 0;
    assertClose(background[i], expected, { relative: 1e-12 }, `channel ${i}`);
  }
});
