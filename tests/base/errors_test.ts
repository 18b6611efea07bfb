import assert from "node:assert/strict";
import fc from "fast-check";
import { cannot, InputError, suggest } from "../../src/base/mod.ts";

Deno.test("cannot() says what cannot be done, the rule and the value", () => {
  // The sentence form is the house style's.
  assert.equal(
    cannot("read spectrum", "dwellS must be > 0 s", -1),
    "Cannot read spectrum as dwellS must be > 0 s: current value is -1",
  );
  assert.equal(cannot("do", "x must be y", "text"), 'Cannot do as x must be y: current value is "text"');
  assert.equal(cannot("do", "x must be y", NaN), "Cannot do as x must be y: current value is NaN");
  assert.equal(
    cannot("do", "x must be y", undefined),
    "Cannot do as x must be y: current value is undefined",
  );
});

Deno.test("cannot() keeps 80 characters of the value", () => {
  const shown = (length: number): string => cannot("do", "x", 10n ** BigInt(length - 1)).split("is ")[1];
  assert.equal(shown(80), `1${"0".repeat(79)}`);
  assert.equal(shown(81), `1${"0".repeat(76)}...`);
});

Deno.test("InputError carries every problem and joins them with their places", () => {
  const problems = [{ place: "a.csv:3", message: "Cannot read a count" }, {
    place: "",
    message: "Cannot go on",
  }];
  const error = new InputError(problems);
  assert.equal(error.message, "Cannot read a count (at a.csv:3)\nCannot go on");
  assert.equal(error.name, "InputError");
  assert.ok(error instanceof SyntaxError);
  assert.deepEqual(error.problems, problems);
});

// Distances of textbook pairs: kitten-sitting 3 of 7 letters, Saturday-Sunday 3 of 8, flaw-lawn 2 of 4.
Deno.test.each([
  ["kitten", ["sitting"], "sitting"],
  ["Saturday", ["sunday"], "sunday"],
  ["flaw", ["lawn"], "lawn"],
  ["temperature", ["temperatureK", "material"], "temperatureK"],
  ["he1", ["He I", "He II"], "He I"],
  ["abcdef", ["uvwxyz"], undefined],
  ["x", [], undefined],
  ["biasV", ["dwellS", "sweeps"], undefined],
])("suggest() for %s among %s is %s", (word, candidates, expected) => {
  assert.equal(suggest(word, candidates), expected);
});

Deno.test("suggest() finds a word again after one letter was changed, left out or added", () => {
  const words = ["temperatureK", "workFunctionEv", "passEnergyEv", "dwellS", "sweeps", "lamp"];
  fc.assert(
    fc.property(
      fc.constantFrom(...words),
      fc.nat(),
      fc.constantFrom("", "x"),
      fc.constantFrom(0, 1),
      (word, at, letter, removed) => {
        const index = at % word.length;
        const typed = word.slice(0, index) + letter + word.slice(index + removed);
        assert.equal(suggest(typed.toUpperCase(), words), word);
      },
    ),
    { seed: 1, numRuns: 200 },
  );
});
