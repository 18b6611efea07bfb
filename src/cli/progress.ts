/** Shows progress on one line of a terminal; silent when the stream is not one. */
export interface Progress {
  /** Updates the line, at most ten times a second. */
  readonly update: (done: number, all: number) => void;
  /** Clears the line. */
  readonly end: () => void;
}

/** A stream that may be a terminal. */
export interface TerminalStream {
  /** `true` when a person watches. */
  readonly isTTY?: boolean;
  /** Writes text. */
  write(text: string): unknown;
}

/**
 * Progress with time left.
 *
 * @param label What is being done.
 * @param stream Usually standard error.
 * @param now Clock in milliseconds.
 * @param things What is counted, to show how many are done a second. Default: no rate.
 * @returns The progress line.
 */
export function progressLine(
  label: string,
  stream: TerminalStream,
  now: () => number,
  things?: string,
): Progress {
  if (!stream.isTTY) return { update: () => {}, end: () => {} };
  const start = now();
  let last = -Infinity;
  return {
    update: (done, all) => {
      const time = now();
      if (time - last < 100 || done === 0) return;
      last = time;
      const left = ((time - start) / 1000) * (all / done - 1);
      const rate = things ? `, ${((1000 * done) / (time - start)).toPrecision(3)} ${things}/s` : "";
      stream.write(`\r${label} ${Math.floor((100 * done) / all)} %${rate}, ${left.toFixed(0)} s left \x1b[K`);
    },
    end: () => stream.write("\r\x1b[K"),
  };
}
