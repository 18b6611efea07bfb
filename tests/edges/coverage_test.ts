import assert from "node:assert/strict";
import { type Coverage, coverage, fitReplicates, SCENARIOS } from "../support/coverage.ts";

const REPLICATES = 50;

/**
 * Counts of successes of a binomial variable within 3.3 standard deviations, and the mean pull within 3.3 of its standard
 * errors: false alarm about 0.1 % each (normal table), 0.3 % for a scenario.
 */
function covers({ within, meanPull, failed }: Coverage): boolean {
  const n = REPLICATES - failed;
  const agrees = (share: number, expected: number): boolean =>
    Math.abs(share - expected) <= 3.3 * Math.sqrt(expected * (1 - expected) / n);
  return agrees(within[0], 0.6827) && agrees(within[1], 0.9545) && Math.abs(meanPull) <= 3.3 / Math.sqrt(n);
}

for (const name of ["metal", "low counts", "satellites"]) {
  Deno.test(`coverage() of ${name}: k = 1 holds the truth in 68 %, k = 2 in 95 %`, () => {
    const fits = fitReplicates(SCENARIOS[name], REPLICATES);
    const found = coverage(fits);
    assert.ok(covers(found), JSON.stringify(found));
    // Good models are called so: at most 5 %, here 2.5 expected; 9 or more by chance once in 800 (Poisson distribution).
    assert.ok(found.flagged < 9, `${found.flagged} flagged`);
    assert.ok(found.failed < 10, `${found.failed} failed`);
    // Twin: a truth 20 meV away is not covered.
    assert.ok(!covers(coverage(fits, 0.02)));
  });
}
