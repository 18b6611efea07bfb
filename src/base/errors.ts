/** One thing wrong with what a person gave: where, and a whole sentence that names the rule and the value. */
export interface Problem {
  /** A JSON pointer (`/sample/temperatureK`), `file:line`, an option name, or empty when there is no place. */
  readonly place: string;
  /** The sentence, without a full stop. */
  readonly message: string;
}

/**
 * Input from outside (file, scenario, option) that breaks a rule. Carries every problem found, not only the first.
 *
 * @example Every problem is in the message
 * ```ts
 * import { InputError } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const error = new InputError([{ place: "a.csv:3", message: "Cannot read a count" }]);
 * assert.equal(error.message, "Cannot read a count (at a.csv:3)");
 * ```
 */
export class InputError extends SyntaxError {
  /** Always `InputError`. */
  override readonly name = "InputError";
  /** All problems found, in the order of the input. */
  readonly problems: readonly Problem[];

  /**
   * Joins the problems into one message.
   *
   * @param problems At least one problem.
   */
  constructor(problems: readonly Problem[]) {
    super(problems.map((p) => (p.place === "" ? p.message : `${p.message} (at ${p.place})`)).join("\n"));
    this.problems = problems;
  }
}

/**
 * The one sentence form of all messages: what cannot be done, which rule, which value.
 *
 * @param action What was attempted, such as `read spectrum`.
 * @param rule What must hold, such as `dwellS must be > 0 s`.
 * @param value The value found, already with its unit where it has one.
 * @returns `Cannot <action> as <rule>: current value is <value>`.
 */
export function cannot(action: string, rule: string, value: unknown): string {
  const shown = typeof value === "string" ? JSON.stringify(value) : String(value);
  return `Cannot ${action} as ${rule}: current value is ${
    shown.length > 80 ? shown.slice(0, 77) + "..." : shown
  }`;
}

/**
 * The candidate nearest to a mistyped word, or `undefined` when none is near (more than 40 % of letters differ).
 *
 * Distance: V. Levenshtein, Sov. Phys. Dokl. 10, 707 (1966), on lower-case letters.
 *
 * @param word What was typed.
 * @param candidates What would have been right.
 * @returns The nearest candidate or `undefined`.
 */
export function suggest(word: string, candidates: readonly string[]): string | undefined {
  let best: string | undefined;
  let bestDistance = Infinity;
  for (const candidate of candidates) {
    const distance = editDistance(word.toLowerCase(), candidate.toLowerCase());
    if (distance < bestDistance && distance <= Math.ceil(0.4 * Math.max(word.length, candidate.length))) {
      best = candidate;
      bestDistance = distance;
    }
  }
  return best;
}

/**
 * Letters to be changed, left out or added to make one word of another.
 *
 * Source: V. Levenshtein, Sov. Phys. Dokl. 10, 707 (1966).
 *
 * @param a A word.
 * @param b Another one.
 * @returns A whole number >= 0.
 */
export function editDistance(a: string, b: string): number {
  let previous = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const current = [i];
    for (let j = 1; j <= b.length; j++) {
      const substitution = previous[j - 1] + (a[i - 1] === b[j - 1] ? 0 : 1);
      current.push(Math.min(substitution, previous[j] + 1, current[j - 1] + 1));
    }
    previous = current;
  }
  return previous[b.length];
}
