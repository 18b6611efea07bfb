import assert from "node:assert/strict";
import { samplePoisson, streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import { assertMean } from "../support/assert_mean.ts";
import { FALSE_ALARM, histogramProbability } from "../support/chi_square.ts";

const DRAWS = 100_000;

/** Poisson probabilities by the recurrence p(k + 1) = p(k) mean/(k + 1) about the mode, summed into cells. */
function expectedCells(mean: number, cells: Cells): Float64Array {
  const mode = Math.floor(mean);
  const expected = new Float64Array(cells.count);
  const last = cells.low + cells.count * cells.width - 1;
  let total = 1;
  expected[cells.at(mode)] += 1;
  for (let k = mode, p = 1; k < last; k++) total += p *= mean / (k + 1), expected[cells.at(k + 1)] += p;
  for (let k = mode, p = 1; k > cells.low; k--) total += p *= k / mean, expected[cells.at(k - 1)] += p;
  return expected.map((share) => (DRAWS * share) / total);
}

interface Cells {
  readonly low: number;
  readonly width: number;
  readonly count: number;
  readonly at: (k: number) => number;
}

/** Cells a quarter of the standard deviation wide, from zero or 8 deviations below to 8 above (and 30 counts). */
function cellsAbout(mean: number): Cells {
  const sigma = Math.sqrt(mean);
  const low = Math.max(0, Math.floor(mean - 8 * sigma));
  const width = Math.max(1, Math.floor(sigma / 4));
  const count = Math.ceil((mean + 8 * sigma + 30 - low) / width);
  return { low, width, count, at: (k) => Math.min(count - 1, Math.max(0, Math.floor((k - low) / width))) };
}

// Means on both sides of the change of method at 10; 1e7 counts in a channel are more than any analyzer gives.
Deno.test.each([0.02, 0.7, 3, 9.99, 10, 12.5, 40, 1000, 1e5, 1e7])(
  "samplePoisson() of mean %s has the mean, the variance and the probabilities of Poisson's law",
  (mean) => {
    // False alarms: 1 in 150 000 for mean and for variance, FALSE_ALARM for the chi-square.
    const generator = new Xoshiro128pp(streamState(3, "counting", Math.round(100 * mean)));
    const cells = cellsAbout(mean);
    const counts = new Float64Array(cells.count);
    let sum = 0;
    let squares = 0;
    for (let i = 0; i < DRAWS; i++) {
      const count = samplePoisson(mean, generator);
      assert.ok(Number.isInteger(count) && count >= 0);
      counts[cells.at(count)]++;
      sum += count - mean;
      squares += (count - mean) ** 2;
    }
    // Second and fourth central moments of Poisson's law: m and m + 3 m^2.
    const meanError = Math.sqrt(mean / DRAWS);
    const varianceError = Math.sqrt((mean + 2 * mean * mean) / DRAWS);
    const shift = 0.05 * Math.sqrt(mean);
    assertMean(sum / DRAWS, meanError, 0, "mean");
    assertMean(squares / DRAWS, varianceError, mean, "variance");
    assert.ok(histogramProbability(counts, expectedCells(mean, cells)) > FALSE_ALARM, "probabilities");
    assert.throws(() => assertMean(sum / DRAWS, meanError, shift, "mean"));
    assert.throws(() => assertMean(squares / DRAWS, varianceError, 1.2 * mean, "variance"));
    assert.ok(histogramProbability(counts, expectedCells(mean + shift, cells)) < FALSE_ALARM, "shifted mean");
  },
);

Deno.test("the chi-square of counts rejects a normal law of the same mean and variance", () => {
  // The twin of the tests above: a sampler with the right moments and the wrong law, mean 12.5 (Box-Muller, rounded).
  const generator = new Xoshiro128pp(streamState(3, "counting", 0));
  const cells = cellsAbout(12.5);
  const counts = new Float64Array(cells.count);
  for (let i = 0; i < DRAWS; i++) {
    const radius = Math.sqrt(-2 * Math.log(generator.nextUniform()));
    const normal = radius * Math.cos(2 * Math.PI * generator.nextUniform());
    counts[cells.at(Math.round(12.5 + Math.sqrt(12.5) * normal))]++;
  }
  assert.ok(histogramProbability(counts, expectedCells(12.5, cells)) < FALSE_ALARM);
});

Deno.test("samplePoisson() of mean 0 is 0", () => {
  const generator = new Xoshiro128pp(Uint32Array.of(1, 2, 3, 4));
  for (let i = 0; i < 100; i++) assert.equal(samplePoisson(0, generator), 0);
});

Deno.test.each([-1, NaN, Infinity])("samplePoisson() refuses mean %s", (mean) => {
  assert.throws(() => samplePoisson(mean, new Xoshiro128pp(Uint32Array.of(1, 2, 3, 4))), {
    name: "RangeError",
    message: `Cannot sample counts as mean must be >= 0 and finite: current value is ${mean}`,
  });
});
