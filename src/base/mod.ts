/**
 * Room `base`: errors and messages that every other room may use. Imports no other room.
 *
 * @module
 */
export { cannot, editDistance, InputError, type Problem, suggest } from "./errors.ts";
export { type JsonText, pointerStep, readJsonText } from "./json_text.ts";
export { VERSION } from "./version.ts";
export type { Estimate, Notice } from "./values.ts";
