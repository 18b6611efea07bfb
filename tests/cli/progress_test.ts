import assert from "node:assert/strict";
import { progressLine } from "../../src/cli/progress.ts";

/** A stream that keeps what is written, and a clock that is set by hand. */
function terminal(isTTY: boolean) {
  const written: string[] = [];
  const stream = { isTTY, write: (text: string) => void written.push(text) };
  const clock = { ms: 0 };
  return { written, clock, progress: progressLine("Simulating", stream, () => clock.ms) };
}

Deno.test("progressLine() shows share and time left at most ten times a second, and clears its line", () => {
  const { written, clock, progress } = terminal(true);
  clock.ms = 2000;
  progress.update(1, 4); // a quarter in 2 s: 6 s for the rest
  clock.ms = 2050;
  progress.update(2, 4);
  clock.ms = 3000;
  progress.update(3, 4);
  progress.end();
  assert.deepEqual(written, [
    "\rSimulating 25 %, 6 s left \x1b[K",
    "\rSimulating 75 %, 1 s left \x1b[K",
    "\r\x1b[K",
  ]);
});

Deno.test("progressLine() writes nothing when the stream is not a terminal", () => {
  const { written, progress } = terminal(false);
  progress.update(1, 4);
  progress.end();
  assert.deepEqual(written, []);
});
