/**
 * Room `rng`: the seeded generator, its independent streams, and sampling of standard distributions.
 *
 * A stream is a function of (seed, purpose, index) alone, so a result never depends on who computed it or when.
 *
 * @module
 */
export { Xoshiro128pp } from "./xoshiro.ts";
export { splitMix64, type StreamPurpose, streamState } from "./streams.ts";
export { sampleAlias, writeAliasRow } from "./alias.ts";
export { samplePoisson } from "./poisson.ts";
