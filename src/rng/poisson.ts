import type { Xoshiro128pp } from "./xoshiro.ts";

const REJECTION_FROM = 10;

/**
 * Poisson-distributed count.
 *
 * Below mean 10 by multiplying uniforms (D. Knuth, The Art of Computer Programming 2, 3.4.1); from 10 on by transformed
 * rejection, algorithm PTRS of W. Hörmann, Insur. Math. Econ. 12, 39 (1993).
 *
 * @param mean Expected count, finite, >= 0.
 * @param generator Source of randomness.
 * @returns A whole number >= 0.
 * @throws {RangeError} If the mean is negative or not finite.
 */
export function samplePoisson(mean: number, generator: Xoshiro128pp): number {
  if (!(mean >= 0) || !Number.isFinite(mean)) {
    throw new RangeError(`Cannot sample counts as mean must be >= 0 and finite: current value is ${mean}`);
  }
  return mean < REJECTION_FROM ? byProduct(mean, generator) : byRejection(mean, generator);
}

function byProduct(mean: number, generator: Xoshiro128pp): number {
  const limit = Math.exp(-mean);
  let count = -1;
  for (let product = 1; product > limit || count < 0; count++) product *= generator.nextUniform();
  return count;
}

function byRejection(mean: number, generator: Xoshiro128pp): number {
  const b = 0.931 + 2.53 * Math.sqrt(mean);
  const a = -0.059 + 0.02483 * b;
  const inverseAlpha = 1.1239 + 1.1328 / (b - 3.4);
  const fastAccept = 0.9277 - 3.6224 / (b - 2);
  const logMean = Math.log(mean);
  for (;;) {
    const u = generator.nextUniform() - 0.5;
    const v = generator.nextUniform();
    const us = 0.5 - Math.abs(u);
    const count = Math.floor((2 * a / us + b) * u + mean + 0.43);
    if (us >= 0.07 && v <= fastAccept) return count;
    if (count < 0 || (us < 0.013 && v > us)) continue;
    if (Math.log((v * inverseAlpha) / (a / (us * us) + b)) <= count * logMean - mean - logFactorial(count)) {
      return count;
    }
  }
}

/** ln n!, exact sum below 20, Stirling's series above (Abramowitz & Stegun eq. 6.1.41, error below 1e-12). */
function logFactorial(n: number): number {
  if (n < 20) {
    let sum = 0;
    for (let i = 2; i <= n; i++) sum += Math.log(i);
    return sum;
  }
  const x = n + 1;
  const x2 = x * x;
  return (x - 0.5) * Math.log(x) - x + 0.5 * Math.log(2 * Math.PI) +
    (1 / 12 - (1 / 360 - 1 / (1260 * x2)) / x2) / x;
}
