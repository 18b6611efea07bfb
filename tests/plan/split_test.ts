import assert from "node:assert/strict";
import fc from "fast-check";
import { leastTimeS, optimalShares, uncertaintyAfter } from "../../src/plan/mod.ts";
import { assertClose } from "../support/assert_close.ts";

/** Variances times time from nearly nothing to much, eV^2 s. */
const varianceTime = fc.double({ min: 1e-9, max: 1, noNaN: true });
const SEED = { seed: 6, numRuns: 200 };

Deno.test("optimalShares() gives time in proportion to the square roots, Neyman's allocation", () => {
  // By Lagrange's multiplier the variance per second of all parts is the same: v_i / t_i^2.
  fc.assert(
    fc.property(varianceTime, varianceTime, varianceTime, (...variances) => {
      const shares = optimalShares(variances);
      assertClose(shares.reduce((sum, share) => sum + share, 0), 1, { relative: 1e-12 });
      const marginal = shares.map((share, i) => variances[i] / share ** 2);
      marginal.forEach((one) => assertClose(one, marginal[0], { relative: 1e-9 }));
    }),
    SEED,
  );
});

Deno.test("optimalShares() is beaten by no other split", () => {
  fc.assert(
    fc.property(
      varianceTime,
      varianceTime,
      fc.double({ min: 0.01, max: 0.99, noNaN: true }),
      (a, b, other) => {
        const variance = (share: number): number => a / share + b / (1 - share);
        const [best] = optimalShares([a, b]);
        assert.ok(variance(best) <= variance(other) * (1 + 1e-12));
      },
    ),
    SEED,
  );
  // A twin: time in proportion to the variances themselves is beaten.
  assert.ok(4 / 0.8 + 1 / 0.2 > 4 / optimalShares([4, 1])[0] + 1 / optimalShares([4, 1])[1]);
});

Deno.test("leastTimeS() is the time after which the uncertainty is the target", () => {
  fc.assert(
    fc.property(
      varianceTime,
      varianceTime,
      fc.double({ min: 0, max: 0.9, noNaN: true }),
      (a, b, floorShare) => {
        const floorEv = 0.01 * floorShare;
        const timeS = leastTimeS([a, b], floorEv, 0.01);
        assertClose(uncertaintyAfter([a, b], floorEv, timeS), 0.01, { relative: 1e-9 });
        // The same from the two parts by themselves.
        const [first, second] = optimalShares([a, b]).map((share, i) => [a, b][i] / (share * timeS));
        assertClose(Math.sqrt(first + second + floorEv ** 2), 0.01, { relative: 1e-9 });
      },
    ),
    SEED,
  );
});

Deno.test("leastTimeS() is infinite when the target is not above the floor", () => {
  assert.equal(leastTimeS([1, 1], 0.01, 0.01), Infinity);
  assert.equal(leastTimeS([1, 1], 0.02, 0.01), Infinity);
});

Deno.test("uncertaintyAfter() adds the floor in squares to what the ideal split leaves", () => {
  // (sqrt v1 + sqrt v2)^2 = 9e-4 eV^2 s.
  assertClose(uncertaintyAfter([1e-4, 4e-4], 0.002, 600), Math.sqrt(9e-4 / 600 + 4e-6), { relative: 1e-12 });
});

Deno.test("the functions of a split refuse variances and targets that are not above zero", () => {
  assert.throws(() => optimalShares([1, 0]), {
    name: "RangeError",
    message: "Cannot split time as every variance must be > 0 and finite: current value is 0",
  });
  assert.throws(() => leastTimeS([1, 1], 0, 0), {
    name: "RangeError",
    message: 'Cannot plan as the target must be > 0 eV: current value is "0 eV"',
  });
});
