/**
 * Room `base`: errors and messages that every other room may use. Imports nothing.
 *
 * @module
 */
export { cannot, InputError, type Problem, suggest } from "./errors.ts";
export { VERSION } from "./version.ts";
export type { Estimate, Notice } from "./values.ts";
