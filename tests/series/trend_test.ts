import assert from "node:assert/strict";
import { workFunctionAgainstBias, workFunctionAgainstTemperature } from "../../src/series/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { normalDraws, pullsAreNormal } from "../support/normal.ts";

const BIASES_V = [-15, -12, -9, -6, -3];
const U_EV = 0.01;

/** Work functions at each setting with normal errors of 10 meV. */
function measured(settings: readonly number[], normal: () => number, truth: (setting: number) => number) {
  return {
    settings,
    workFunctionsEv: settings.map((setting) => ({
      value: truth(setting) + U_EV * normal(),
      standardUncertainty: U_EV,
    })),
  };
}

Deno.test("workFunctionAgainstBias() accepts a constant one and covers it", () => {
  // 1000 replicates; false alarm: see pullsAreNormal(). At most 5 % may be doubtful, 2 to 3 % are expected.
  const normal = normalDraws(41);
  const trends = Array.from(
    { length: 1000 },
    () => workFunctionAgainstBias(measured(BIASES_V, normal, () => 5.1)),
  );
  const good = trends.filter(({ verdict }) => verdict === "good");
  assert.ok(good.length >= 950, `${1000 - good.length} of 1000 constant series are doubtful`);
  const pulls = trends.map(({ slopeEvPerV }) => slopeEvPerV.value / slopeEvPerV.standardUncertainty);
  assert.ok(pullsAreNormal(pulls));
  assert.ok(!pullsAreNormal(pulls.map((pull) => 2 * pull)));
  // Five equal uncertainties (exact).
  assertClose(good[0].workFunctionEv!.standardUncertainty, U_EV / Math.sqrt(5), { relative: 1e-12 });
});

Deno.test("workFunctionAgainstBias() exposes a cutoff that is not the sample's", () => {
  // The analyzer's own cutoff stays at 0 on the recorded axis: the apparent work function follows the bias in full at
  // small bias. Here a tenth of that; 100 replicates, at least 95 % must be found.
  const normal = normalDraws(42);
  const trends = Array.from(
    { length: 100 },
    () => workFunctionAgainstBias(measured(BIASES_V, normal, (bias) => 5.1 + 0.01 * (bias + 9))),
  );
  const exposed = trends.filter(({ verdict, workFunctionEv }) =>
    verdict === "doubtful" && workFunctionEv === null
  );
  assert.ok(exposed.length >= 95, `${exposed.length} of 100`);
  assert.match(exposed[0].reasons[0], /the work function moves with bias by \d+\.\d meV\/V/);
});

Deno.test("workFunctionAgainstBias() enlarges the uncertainty of values that scatter too much", () => {
  const workFunctionsEv = [5.1, 5.0, 5.1, 5.0, 5.1].map((value) => ({ value, standardUncertainty: 0.01 }));
  const trend = workFunctionAgainstBias({ settings: BIASES_V, workFunctionsEv });
  assert.equal(trend.verdict, "doubtful");
  // Chi-square: deviations +0.04 (3 times) and -0.06 (twice) over 0.01, 48 + 72 = 120 with 4 degrees of freedom.
  assertClose(trend.chiSquare, 120, { relative: 1e-9 });
  assertClose(trend.inflation, Math.sqrt(30), { relative: 1e-9 });
  assertClose(trend.workFunctionEv!.standardUncertainty, Math.sqrt(30) * 0.01 / Math.sqrt(5), {
    relative: 1e-9,
  });
});

Deno.test("workFunctionAgainstTemperature() gives slope and value with the covariance of the line", () => {
  // 800 replicates; false alarm: see pullsAreNormal(), two calls.
  const normal = normalDraws(43);
  const temperaturesK = [80, 150, 220, 300, 380];
  const trends = Array.from(
    { length: 800 },
    () => workFunctionAgainstTemperature(measured(temperaturesK, normal, (t) => 4.6 - 2e-4 * t)),
  );
  const pulls = trends.map(({ slopeEvPerK }) => (slopeEvPerK.value + 2e-4) / slopeEvPerK.standardUncertainty);
  assert.ok(pullsAreNormal(pulls));
  assert.ok(!pullsAreNormal(pulls.map((pull) => pull - 0.5)), "a wrong slope");
  assertClose(trends[0].meanTemperatureK, 226, { relative: 1e-9 }, "mean of the temperatures");
  assert.ok(
    pullsAreNormal(
      trends.map(({ workFunctionEv }) =>
        (workFunctionEv.value - (4.6 - 2e-4 * 226)) / workFunctionEv.standardUncertainty
      ),
    ),
  );
});

Deno.test("workFunctionAgainstTemperature() doubts a bent series", () => {
  const normal = normalDraws(44);
  const temperaturesK = [80, 120, 160, 200, 240, 280, 320, 360, 400];
  const bent = measured(temperaturesK, normal, (t) => 4.6 + 3e-6 * (t - 240) ** 2);
  assert.equal(workFunctionAgainstTemperature(bent).verdict, "doubtful");
  const straight = measured(temperaturesK, normal, (t) => 4.6 + 3e-4 * (t - 240));
  assert.equal(workFunctionAgainstTemperature(straight).verdict, "good");
});

Deno.test("trends refuse what is no series", () => {
  const value = { value: 5, standardUncertainty: 0.01 };
  assert.throws(() => workFunctionAgainstBias({ settings: [-9, -6], workFunctionsEv: [value, value] }), {
    message: "Cannot draw a line as there must be at least 3 points: current value is 2",
  });
  assert.throws(
    () => workFunctionAgainstTemperature({ settings: [-1, 2, 3], workFunctionsEv: [value, value, value] }),
    { message: "Cannot test a trend as temperature 0 must be >= 0 K: current value is -1" },
  );
  const exact = { value: 5, standardUncertainty: 0 };
  assert.throws(
    () => workFunctionAgainstBias({ settings: [1, 2, 3], workFunctionsEv: [value, exact, value] }),
    {
      message:
        "Cannot test a trend as the standard uncertainty of work function 1 must be > 0 eV: current value is 0",
    },
  );
});
