import assert from "node:assert/strict";
import { InputError, type Problem } from "../../src/base/mod.ts";

/** The problems for which an action is refused; fails when it is not refused. */
export function problemsOf(action: () => unknown): readonly Problem[] {
  try {
    action();
  } catch (error) {
    if (error instanceof InputError) return error.problems;
    throw error;
  }
  assert.fail("nothing was refused");
}
