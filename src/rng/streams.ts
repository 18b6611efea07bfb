const MASK = (1n << 64n) - 1n;
const GOLDEN_GAMMA = 0x9e3779b97f4a7c15n;

/** What a stream of random numbers is for; each purpose draws from streams of its own. */
export type StreamPurpose = "transport" | "counting" | "replicate" | "sampling";

const PURPOSE_NUMBER: Readonly<Record<StreamPurpose, bigint>> = {
  transport: 1n,
  counting: 2n,
  replicate: 3n,
  sampling: 4n,
};

/**
 * One output of SplitMix64: the finalizer applied to `counter + 0x9e3779b97f4a7c15`.
 *
 * Source: G. Steele, D. Lea, C. Flood, Proc. OOPSLA 2014, 453, doi:10.1145/2660193.2660195.
 *
 * @param counter The state before the step, any 64-bit value.
 * @returns A 64-bit value.
 */
export function splitMix64(counter: bigint): bigint {
  let z = (counter + GOLDEN_GAMMA) & MASK;
  z = ((z ^ (z >> 30n)) * 0xbf58476d1ce4e5b9n) & MASK;
  z = ((z ^ (z >> 27n)) * 0x94d049bb133111ebn) & MASK;
  return z ^ (z >> 31n);
}

/**
 * Start state of the random stream that belongs to (seed, purpose, index).
 *
 * The three numbers are hashed one after the other, so neighboring seeds and indices give unrelated states
 * (common practice; the chance that two of a million streams of 10^9 draws overlap is below 10^-17).
 *
 * @param seed Whole number 0..2^53 - 1.
 * @param purpose What the stream is for.
 * @param index Whole number 0..2^53 - 1, such as a batch number.
 * @returns Four words for {@link Xoshiro128pp}.
 * @throws {RangeError} If seed or index is not such a number.
 */
export function streamState(seed: number, purpose: StreamPurpose, index: number): Uint32Array {
  for (const [name, value] of [["seed", seed], ["index", index]] as const) {
    if (!Number.isSafeInteger(value) || value < 0) {
      throw new RangeError(
        `Cannot derive a stream as ${name} must be a whole number 0..2^53 - 1: current value is ${value}`,
      );
    }
  }
  let hash = splitMix64(BigInt(seed));
  hash = splitMix64(hash ^ PURPOSE_NUMBER[purpose]);
  hash = splitMix64(hash ^ BigInt(index));
  const low = splitMix64(hash);
  const high = splitMix64((hash + GOLDEN_GAMMA) & MASK);
  const words = [low, low >> 32n, high, high >> 32n].map((word) => Number(word & 0xffffffffn));
  return Uint32Array.from(words);
}
