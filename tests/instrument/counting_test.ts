import assert from "node:assert/strict";
import fc from "fast-check";
import { type Counting, drawCounts, expectedCounts } from "../../src/instrument/mod.ts";
import { streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { assertMean } from "../support/assert_mean.ts";

const IDEAL: Counting = { dwellS: 0.5, sweeps: 4, darkRateCountsPerS: 0, deadTimeS: 0 };
const countsOf = (ratePerS: number, counting: Counting): number =>
  expectedCounts(Float64Array.of(ratePerS), Float64Array.of(0), counting).counts[0];

Deno.test("expectedCounts() of an ideal counter is rate x dwell x sweeps, with the dark rate added", () => {
  // Definition of a rate.
  assert.equal(countsOf(300, IDEAL), 600);
  assert.equal(countsOf(300, { ...IDEAL, darkRateCountsPerS: 7 }), 614);
  assert.equal(countsOf(0, { ...IDEAL, darkRateCountsPerS: 7 }), 14);
});

// m = n/(1 + n tau): G. Knoll, Radiation Detection and Measurement, ch. 4 (from memory); worked by hand.
Deno.test.each([[1e6, 1e-6, 5e5], [1e5, 1e-7, 1e5 / 1.01], [3e6, 5e-7, 1.2e6], [1e12, 1e-6, 1e6]])(
  "expectedCounts() of %s electrons/s with a dead time of %s s counts %s per second",
  (ratePerS, deadTimeS, counted) => {
    const counting = { ...IDEAL, dwellS: 1, sweeps: 1, deadTimeS };
    assertClose(countsOf(ratePerS, counting), counted, { relative: 1e-6 });
    const darkHalf = { ...counting, darkRateCountsPerS: ratePerS / 2 };
    assertClose(
      countsOf(ratePerS / 2, darkHalf),
      counted,
      { relative: 1e-6 },
      "dark counts block as others do",
    );
  },
);

Deno.test("the dead time is that of a counter which ignores electrons while it recovers, not one they prolong", () => {
  // Electron by electron: Poisson arrivals, each within tau of the last recorded one is lost. False alarms: 1 in 150 000.
  const ratePerS = 1e6;
  const deadTimeS = 5e-7;
  const generator = new Xoshiro128pp(streamState(2, "counting", 0));
  const recordedGaps: number[] = [];
  for (let now = 0, last = 0, arrivals = 0; arrivals < 300_000; arrivals++) {
    now -= Math.log(generator.nextUniform()) / ratePerS;
    if (now - last < deadTimeS) continue;
    recordedGaps.push(now - last);
    last = now;
  }
  const n = recordedGaps.length;
  const mean = recordedGaps.reduce((a, b) => a + b) / n;
  const error = Math.sqrt(recordedGaps.reduce((sum, gap) => sum + (gap - mean) ** 2, 0) / n / n);
  const counted = countsOf(ratePerS, { ...IDEAL, dwellS: 1, sweeps: 1, deadTimeS });
  assertMean(mean, error, 1 / counted, "time between counts");
  const paralyzable = ratePerS * Math.exp(-ratePerS * deadTimeS);
  assert.throws(() => assertMean(mean, error, 1 / paralyzable, "time between counts"));
});

Deno.test("expectedCounts() carries standard errors with the slope of the counts", () => {
  // Propagation to first order, JCGM 100, 5.1.2; slope by central difference.
  const counting = { dwellS: 0.2, sweeps: 3, darkRateCountsPerS: 40, deadTimeS: 3e-7 };
  for (const ratePerS of [0, 10, 1e4, 1e6, 1e7]) {
    const h = 1e-3 * (ratePerS + 1);
    const slope = (countsOf(ratePerS + h, counting) - countsOf(ratePerS - h, counting)) / (2 * h);
    const { standardErrors } = expectedCounts(Float64Array.of(ratePerS), Float64Array.of(2), counting);
    assertClose(standardErrors[0], 2 * slope, { relative: 1e-5 }, `at ${ratePerS}`);
  }
});

Deno.test("twice the light gives twice the counts without dead time, fewer with it, and leaves dark counts alone", () => {
  const rates = { min: 0, max: 1e7, noNaN: true };
  fc.assert(
    fc.property(
      fc.double(rates),
      fc.double({ min: 0, max: 100, noNaN: true }),
      (ratePerS, darkRateCountsPerS) => {
        const counting = { ...IDEAL, darkRateCountsPerS };
        const dark = countsOf(0, counting);
        const light = countsOf(ratePerS, counting) - dark;
        assertClose(countsOf(2 * ratePerS, counting) - dark, 2 * light, { absolute: 1e-6 });
        const slow = { ...counting, deadTimeS: 1e-7 };
        assert.ok(countsOf(2 * ratePerS, slow) <= 2 * countsOf(ratePerS, slow));
        assert.ok(countsOf(2 * ratePerS, slow) >= countsOf(ratePerS, slow), "never paralyzed");
      },
    ),
    { seed: 1, numRuns: 200 },
  );
});

/** Mean of drawn counts over channels of one expectation. */
function meanDrawn(expected: number, channels: number): number {
  const generator = new Xoshiro128pp(streamState(4, "counting", Math.round(expected)));
  return drawCounts(new Float64Array(channels).fill(expected), generator).reduce((a, b) => a + b) / channels;
}

Deno.test("drawCounts() has the expectation as mean, and twice it for twice the light", () => {
  // Poisson: standard error sqrt(expected/channels). False alarms: 1 in 150 000 for each check.
  const channels = 40_000;
  for (const expected of [2.5, 80]) {
    const error = Math.sqrt(expected / channels);
    assertMean(meanDrawn(expected, channels), error, expected, "mean");
    assertMean(meanDrawn(2 * expected, channels), Math.SQRT2 * error, 2 * expected, "mean of twice");
    assert.throws(() =>
      assertMean(meanDrawn(1.9 * expected, channels), Math.SQRT2 * error, 2 * expected, "mean of 1.9")
    );
  }
});

Deno.test("drawCounts() gives whole counts, none where none are expected, the same for the same stream", () => {
  const expected = Float64Array.of(0, 0.3, 4, 1e5, 0);
  const draw = (): Float64Array => drawCounts(expected, new Xoshiro128pp(streamState(1, "counting", 0)));
  const counts = draw();
  assert.ok(counts.every((count) => Number.isInteger(count) && count >= 0));
  assert.ok(counts[0] === 0 && counts[4] === 0);
  assert.deepEqual(draw(), counts);
  assert.throws(
    () => drawCounts(Float64Array.of(-1), new Xoshiro128pp(streamState(1, "counting", 0))),
    RangeError,
  );
});
