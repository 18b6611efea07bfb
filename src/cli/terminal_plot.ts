/** What a text plot shows. */
export interface TerminalPlotInput {
  /** Energies, eV, ascending, shape (n), n >= 1. */
  readonly energiesEv: ArrayLike<number>;
  /** Counts, >= 0, shape (n). */
  readonly counts: ArrayLike<number>;
  /** Energies to point at, eV; those outside the spectrum are left out. */
  readonly marks: readonly { readonly label: string; readonly energyEv: number }[];
}

/** Columns of a terminal. */
const WIDTH = 80;
/** Columns for the numbers on the left. */
const LEFT = 9;
const COLUMNS = WIDTH - LEFT;
const ROWS = 10;
/** Eighths of a character cell (Unicode block elements). */
const EIGHTHS = " ▁▂▃▄▅▆▇█";

/**
 * A spectrum as text of 80 columns: the highest counts in each column on a square-root scale, and where the edges are.
 *
 * No colors, so there are none to turn off (NO_COLOR), and a file shows the same as a terminal.
 *
 * @param input What to show.
 * @returns Lines, without a line end after the last.
 * @throws {RangeError} If there are no channels.
 */
export function terminalPlot({ energiesEv, counts, marks }: TerminalPlotInput): string {
  const last = energiesEv.length - 1;
  if (last < 0) throw new RangeError("Cannot plot a spectrum as there must be a channel: current value is 0");
  const [low, high] = [energiesEv[0], energiesEv[last]];
  const column = (energyEv: number): number =>
    high > low ? Math.min(COLUMNS - 1, Math.floor((COLUMNS * (energyEv - low)) / (high - low))) : 0;
  const heights: (number | null)[] = Array(COLUMNS).fill(null);
  for (let i = 0; i <= last; i++) {
    const c = column(energiesEv[i]);
    heights[c] = Math.max(heights[c] ?? 0, counts[i]);
  }
  // Fewer channels than columns: a channel reaches to the next one.
  heights.forEach((height, c) => (heights[c] = height ?? heights[c - 1]));
  const top = heights.reduce<number>((a, b) => Math.max(a, b ?? 0), 0);
  const eighths = heights.map((height) => Math.round(8 * ROWS * Math.sqrt((height ?? 0) / Math.max(1, top))));
  const rows = Array.from({ length: ROWS }, (_, r) => {
    const below = ROWS - 1 - r;
    const cells = eighths.map((level) => EIGHTHS[Math.min(8, Math.max(0, level - 8 * below))]).join("");
    // Squares of the share of the height: the scale is that of the square root.
    const isLabeled = r % 3 === 0;
    const label = isLabeled ? axisNumber(Math.max(1, top) * ((below + 1) / ROWS) ** 2) : "";
    return `${label.padStart(LEFT - 2)} ${isLabeled ? "┤" : "│"}${cells}`;
  });
  const left = low.toFixed(2);
  const right = `${high.toFixed(2)} eV`;
  return [
    "Counts (square-root scale)",
    ...rows,
    `${"0".padStart(LEFT - 2)} └${"─".repeat(COLUMNS)}`,
    `${" ".repeat(LEFT)}${left}${right.padStart(COLUMNS - left.length)}`,
    ...marks.filter(({ energyEv }) => energyEv >= low && energyEv <= high).map(({ label, energyEv }) => {
      const c = column(energyEv);
      const words = `${label} ${energyEv.toFixed(3)} eV`;
      // The words stand on the side where they have room.
      const line = c + 2 + words.length <= COLUMNS
        ? `${" ".repeat(c)}↑ ${words}`
        : `${`${words} `.padStart(c)}↑`;
      return `${" ".repeat(LEFT)}${line}`;
    }),
  ].map((line) => line.trimEnd()).join("\n");
}

/** At most six characters. */
function axisNumber(value: number): string {
  return value < 1e6 ? String(Math.round(value)) : value.toExponential(1).replace("e+", "e");
}
