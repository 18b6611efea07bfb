import assert from "node:assert/strict";
import { judgeMatch, type Match, matchTemplate, placeAxis, testParts } from "../../src/compare/mod.ts";
import { foldGaussian } from "../../src/compare/curve.ts";
import { pullsAreNormal } from "../support/normal.ts";
import { expectedTwoEdges } from "../support/two_edges.ts";
import { BASE, channels, COARSE, draw, measured, withWorkFunction, WORK_FUNCTION } from "./templates.ts";

const ALL = { gain: true, extraFwhm: true, background: true };
const NONE = { gain: false, extraFwhm: false, background: false };

function pull(match: Match, name: string, truth: number): number {
  const { value, standardUncertainty } = match.values.find((found) => found.name === name)!;
  return (value - truth) / standardUncertainty!;
}

Deno.test("matchTemplate() finds a work function within its uncertainty over replicates, and not a wrong one", () => {
  const expected = expectedTwoEdges(withWorkFunction(5.22));
  const matches = Array.from(
    { length: 150 },
    (_, replicate) =>
      matchTemplate(
        BASE,
        [WORK_FUNCTION],
        channels(expected.energiesEv, draw(expected.counts, replicate)),
        NONE,
      ),
  );
  assert.ok(matches.every(({ converged }) => converged));
  // False alarm: 1 in 50 000 (pullsAreNormal).
  assert.ok(pullsAreNormal(matches.map((match) => pull(match, "workFunctionEv", 5.22))));
  const u = matches[0].values.find(({ name }) => name === "workFunctionEv")!.standardUncertainty!;
  assert.ok(u < 0.005, `u ${u} eV`);
  assert.ok(!pullsAreNormal(matches.map((match) => pull(match, "workFunctionEv", 5.22 + u))));
});

Deno.test("matchTemplate() finds offset, gain, width, background and intensity over replicates", () => {
  // The axis is moved and stretched, the width added in quadrature; a wider response also softens the cutoff's top.
  const wide = { ...COARSE, fwhmEv: Math.hypot(COARSE.fwhmEv, 0.15) };
  const { energiesEv, counts } = expectedTwoEdges(wide);
  const moved = energiesEv.map((e) => BASE.fermiEdgeEv + 0.04 + 1.003 * (e - BASE.fermiEdgeEv));
  const expected = counts.map((mean) => 0.7 * (mean - COARSE.dark) + COARSE.dark + 20);
  const truths = { offsetEv: 0.04, gain: 1.003, extraFwhmEv: 0.15, backgroundCounts: 20, intensity1: 0.7 };
  const matches = Array.from(
    { length: 60 },
    (_, replicate) => matchTemplate(BASE, [], channels(moved, draw(expected, replicate)), ALL),
  );
  for (const [name, truth] of Object.entries(truths)) {
    // False alarm: 1 in 1000 for so few pulls (pullsAreNormal); the seed is fixed.
    assert.ok(pullsAreNormal(matches.map((match) => pull(match, name, truth))), name);
  }
  assert.ok(!pullsAreNormal(matches.map((match) => pull(match, "gain", 1.004))));
});

Deno.test("matchTemplate() counts the noise of the simulation: without it the uncertainty is too small", () => {
  // Each replicate has a base template of its own from 16 groups. As in a simulation, their noise is folded with the
  // resolution; that of all groups together is larger than that of the measured counts.
  const groupsOf = (replicate: number): Float64Array[] =>
    Array.from({ length: 16 }, (_, g) => {
      const noise = draw(BASE.counts.map((mean) => mean / 200), replicate * 16 + g, 61)
        .map((count, i) => 200 * count - BASE.counts[i]);
      const folded = new Float64Array(noise.length);
      foldGaussian(noise, COARSE.fwhmEv / 2.3548 / BASE.stepEv, folded);
      return folded.map((value, i) => BASE.counts[i] + value);
    });
  const matches = Array.from({ length: 120 }, (_, replicate) => {
    const groups = groupsOf(replicate);
    const counts = BASE.counts.map((_, i) => groups.reduce((sum, group) => sum + group[i], 0) / 16);
    return matchTemplate({ ...BASE, counts, groups }, [], measured(COARSE, replicate), {
      ...NONE,
      gain: true,
    });
  });
  // False alarm: 1 in 50 000 each.
  for (const name of ["gain", "offsetEv"]) {
    assert.ok(pullsAreNormal(matches.map((match) => pull(match, name, name === "gain" ? 1 : 0))), name);
  }
  const gains = matches.map(({ values }) => values.find(({ name }) => name === "gain")!);
  const share =
    gains.reduce((sum, { fromSimulation, fromCounting }) => sum + (fromSimulation / fromCounting!) ** 2, 0) /
    gains.length;
  const counted = matches.map(({ values }) => {
    const { value, fromCounting } = values.find(({ name }) => name === "gain")!;
    return (value - 1) / fromCounting!;
  });
  // Of the counting uncertainty alone the pulls spread by sqrt(1 + share).
  const variance = counted.reduce((sum, pull) => sum + pull * pull, 0) / counted.length;
  // Standard error of a variance of 120 normal numbers: sqrt(2/120); 4.5 of them, one false alarm in 150 000.
  assert.ok(Math.abs(variance / (1 + share) - 1) < 4.5 * Math.sqrt(2 / 120), `variance ${variance}`);
  assert.ok(variance - 1 > 4.5 * Math.sqrt(2 / 120), `variance ${variance}`);
});

Deno.test("matchTemplate() refuses a region without counts above the dark ones", () => {
  const { energiesEv, counts } = measured(COARSE, 0);
  assert.throws(
    () => matchTemplate(BASE, [], channels(energiesEv, counts.map(() => 0)), NONE),
    /measured and expected counts of region 1 must be above the dark counts/,
  );
});

Deno.test("matchTemplate() gives each region its own intensity", () => {
  const { energiesEv, counts } = measured(COARSE, 3);
  const regions = Int32Array.from(energiesEv, (e) => (e < 18 ? 0 : 1));
  const scaled = counts.map((count, i) => (regions[i] === 0 ? count : 3 * count));
  const { values } = matchTemplate(BASE, [], { energiesEv, counts: scaled, regions, regionCount: 2 }, NONE);
  const intensities = values.filter(({ name }) => name.startsWith("intensity")).map(({ value }) => value);
  assert.deepEqual(intensities.map((value) => Math.round(10 * value) / 10), [1, 3]);
});

Deno.test("judgeMatch() agrees with the truth and names what differs", () => {
  const judged = (shape: typeof COARSE, replicate: number) => {
    const data = measured(shape, replicate);
    const match = matchTemplate(BASE, [], data, ALL);
    return judgeMatch(match, testParts(match, data, BASE, COARSE.fwhmEv), true);
  };
  // Twelve tests at 0.1 %: a false alarm in at most 1.2 % of the true cases, so more than 2 of 40 once in 500 (binomial).
  const truths = Array.from({ length: 40 }, (_, replicate) => judged(COARSE, replicate));
  assert.ok(truths.filter(({ verdict }) => verdict === "differs").length <= 2);
  const other = judged(withWorkFunction(5.2), 0);
  assert.equal(other.verdict, "differs");
  assert.match(other.reasons.join("; "), /edges are further apart than in the scenario by a factor of 0\.99/);
  assert.match(judged({ ...COARSE, fwhmEv: 0.4 }, 0).reasons.join("; "), /broader by a Gaussian of 0\.2/);
  const hot = judged({ ...COARSE, patches: [[5.1, 0.7], [4.3, 0.3]] }, 0);
  assert.match(hot.reasons.join("; "), /chi-square of the cutoff/);
});

Deno.test("testParts() splits chi-square at the edges without losing a channel", () => {
  const data = measured(COARSE, 1);
  const match = matchTemplate(BASE, [], data, ALL);
  const parts = testParts(match, data, BASE, COARSE.fwhmEv);
  assert.deepEqual(parts.map(({ part }) => part), ["cutoff", "middle", "Fermi edge", "all"]);
  const [cutoff, middle, fermi, all] = parts;
  assert.equal(cutoff.channels + middle.channels + fermi.channels, data.counts.length);
  assert.ok(
    Math.abs(cutoff.chiSquare + middle.chiSquare + fermi.chiSquare - all.chiSquare) < 1e-6 * all.chiSquare,
  );
  assert.ok(Math.abs(all.chiSquare - match.chiSquare) < 1e-6 * match.chiSquare);
  assert.ok(cutoff.rangeEv[1] > BASE.cutoffEv && fermi.rangeEv[0] < BASE.fermiEdgeEv);
});

Deno.test("placeAxis() finds the reading of the axis and the offset beyond it", () => {
  const { energiesEv, counts } = measured(COARSE, 2);
  const file = channels(energiesEv.map((e) => e - 9 + 0.5), counts);
  const readings = [{ shiftEv: 0, how: "as recorded" }, { shiftEv: 9, how: "bias off" }, {
    shiftEv: 4.6,
    how: "both off",
  }];
  const [best, next] = placeAxis(BASE, file, readings);
  assert.equal(best.how, "bias off");
  assert.ok(Math.abs(best.startOffsetEv - 0.5) < 0.1, `${best.startOffsetEv}`);
  assert.ok(next.deviance > 10 * best.deviance);
});
