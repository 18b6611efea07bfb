import assert from "node:assert/strict";
import fc from "fast-check";
import { terminalPlot } from "../../src/cli/terminal_plot.ts";

const energiesEv = Array.from({ length: 710 }, (_, i) => 8 + 0.02 * i);
const STEP = { energiesEv, counts: energiesEv.map((energy) => (energy < 9.7 ? 0 : 400)), marks: [] };

Deno.test("terminalPlot() draws a step where it is: ten channels a column, full height above it", () => {
  const lines = terminalPlot(STEP).split("\n");
  // 85 channels below 9.7 eV, ten a column: eight empty columns, the ninth holds the step.
  assert.equal(lines[1], `    400 ┤${" ".repeat(8)}${"█".repeat(63)}`);
  assert.equal(lines[10].slice(9), `${" ".repeat(8)}${"█".repeat(63)}`);
  assert.equal(lines[12], `         8.00${"22.18 eV".padStart(67)}`);
});

Deno.test("terminalPlot() has a square-root scale: a quarter of the counts stands half as high", () => {
  const counts = energiesEv.map((energy) => (energy < 15 ? 100 : 400));
  const lines = terminalPlot({ ...STEP, counts }).split("\n");
  const heightAt = (column: number) => lines.slice(1, 11).filter((line) => line[9 + column] === "█").length;
  assert.deepEqual([heightAt(2), heightAt(60)], [5, 10]);
});

Deno.test("terminalPlot() points at a mark, with words on the side that has room", () => {
  const marks = [{ label: "cutoff", energyEv: 9.7 }, { label: "Fermi edge", energyEv: 22.1 }];
  const [left, right] = terminalPlot({ ...STEP, marks }).split("\n").slice(-2);
  assert.equal(left, `${" ".repeat(9 + 8)}↑ cutoff 9.700 eV`);
  assert.equal(right, `${"Fermi edge 22.100 eV ↑".padStart(9 + 71)}`);
  const outside = terminalPlot({ ...STEP, marks: [{ label: "cutoff", energyEv: 1 }] });
  assert.doesNotMatch(outside, /cutoff/);
});

Deno.test("terminalPlot() fits 80 columns and has no control characters, whatever the counts", () => {
  const channel = fc.tuple(
    fc.double({ min: 0.001, max: 10, noNaN: true }),
    fc.double({ min: 0, max: 1e12, noNaN: true }),
  );
  fc.assert(
    fc.property(fc.array(channel, { minLength: 1, maxLength: 300 }), (channels) => {
      let energyEv = 1;
      const energies = channels.map(([step]) => (energyEv += step));
      const text = terminalPlot({
        energiesEv: energies,
        counts: channels.map(([, counts]) => counts),
        marks: [{ label: "Fermi edge", energyEv: energies[energies.length >> 1] }],
      });
      for (const line of text.split("\n")) assert.ok([...line].length <= 80, line);
      // deno-lint-ignore no-control-regex
      assert.doesNotMatch(text, /[\u0000-\u0009\u000b-\u001f]|NaN|undefined|Infinity/);
    }),
    { seed: 1, numRuns: 200 },
  );
});

Deno.test("terminalPlot() refuses to draw nothing", () => {
  assert.throws(() => terminalPlot({ energiesEv: [], counts: [], marks: [] }), {
    name: "RangeError",
    message: "Cannot plot a spectrum as there must be a channel: current value is 0",
  });
});
