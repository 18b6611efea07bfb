import { Xoshiro128pp } from "../../src/rng/mod.ts";

/** Standard normal numbers of a seed (G. Box, M. Muller, Ann. Math. Stat. 29, 610 (1958)). */
export function normalDraws(seed: number): () => number {
  const generator = new Xoshiro128pp(Uint32Array.of(seed, 1, 2, 3));
  for (let i = 0; i < 20; i++) generator.nextUint32();
  return () =>
    Math.sqrt(-2 * Math.log(generator.nextUniform())) * Math.cos(2 * Math.PI * generator.nextUniform());
}

/**
 * Passes when pulls (estimate minus truth, over the standard uncertainty) are standard normal: their mean and the shares
 * within 1 and 2 lie within 4.5 standard errors of 0, 0.6827 and 0.9545. One false alarm in 50 000
 * calls for hundreds of pulls, in 1000 for 40.
 */
export function pullsAreNormal(pulls: readonly number[]): boolean {
  const n = pulls.length;
  const share = (k: number): number => pulls.filter((pull) => Math.abs(pull) < k).length / n;
  const within = (value: number, expected: number, variance: number): boolean =>
    Math.abs(value - expected) < 4.5 * Math.sqrt(variance / n);
  const mean = pulls.reduce((sum, pull) => sum + pull, 0) / n;
  return within(mean, 0, 1) && within(share(1), 0.6827, 0.6827 * 0.3173) &&
    within(share(2), 0.9545, 0.9545 * 0.0455);
}
