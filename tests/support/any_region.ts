import fc from "fast-check";
import type { SpectrumRegion } from "../../src/formats/mod.ts";

/** Texts that a spectrum file may hold: one line, no blanks around, no NUL; many begin or go on like syntax. */
const words: fc.Arbitrary<string> = fc.oneof(
  fc.string({ unit: "binary", maxLength: 12 }),
  fc.string({ unit: "grapheme", maxLength: 12 }),
  fc.constantFrom(
    "#",
    "## #",
    "# a: b",
    '"a',
    "a: b",
    "a,b;c",
    "1E37",
    "5 eV",
    "1e+037",
    "end of experiment",
    "µ/Ω",
  ),
).map((text) => text.replaceAll(/[\0\r\n\ufeff]/g, "").trim());
const name: fc.Arbitrary<string> = words.map((text) => `n${text}`);

/** -0 is not told from 0: no format keeps its sign on purpose. */
const number: fc.Arbitrary<number> = fc.double({ noNaN: true, noDefaultInfinity: true })
  .filter((value) => value !== 1e37).map((value) => value + 0);
const positive: fc.Arbitrary<number> = number.map(Math.abs).filter((value) => value > 0);
const orNull = <T>(values: fc.Arbitrary<T>): fc.Arbitrary<T | null> => fc.option(values, { nil: null });

/** Decimals as instruments write them, so that energies are often equally spaced. */
const decimal: fc.Arbitrary<number> = fc.integer({ min: -100_000, max: 2_000_000 }).map((n) => n / 1000);

const energies: fc.Arbitrary<number[]> = fc.oneof(
  fc.record({ start: decimal, step: fc.integer({ min: 1, max: 500 }), n: fc.integer({ min: 5, max: 12 }) })
    .map(({ start, step, n }) =>
      Array.from({ length: n }, (_, i) => (Math.round(start * 1000) + i * step) / 1000 + 0)
    ),
  fc.uniqueArray(number, { minLength: 5, maxLength: 12 }).map((values) => values.toSorted((a, b) => a - b)),
);

/** Metadata under keys that the formats have items for, right or not quite, and under any others. */
const metadata: fc.Arbitrary<Record<string, string>> = fc.uniqueArray(
  fc.tuple(
    fc.oneof(
      name,
      fc.constantFrom(
        ...[
          "sample",
          "date",
          "hours ahead of GMT",
          "technique",
          "source label",
          "source energy",
          "instrument",
        ],
        ...["analyzer mode", "analyzer pass energy or retard ratio", "experimental variable Angle", "title"],
        ...[
          "experimental variable T",
          "parameter pressure",
          "counts units",
          "counts label",
          "abscissa label",
        ],
        ...[
          "transition or charge state label",
          "simulated",
          "manually entered items",
          "tilt azimuth",
          "version",
        ],
        ...["institution", "operator", "x coordinate", "charge of detected particle", "experiment mode"],
      ),
    ),
    fc.oneof(
      words,
      fc.constantFrom(
        "12.5 degree",
        "3",
        "-0.25 K",
        "XPS",
        "AES dir",
        "2031-04-05 06:07:08",
        "5.5",
        "FAT",
        "FRR",
      ),
      fc.constantFrom("true", "c/s", "2 3 5", "2031-4-5 06:07:08", "Kinetic energy", "16 eV"),
      fc.constantFrom("12.50 degree", "+3", "05.5", "1e3 K", "1000 K", "-0"),
    ),
  ),
  { maxLength: 6, selector: ([key]) => key.toLowerCase() },
).map(Object.fromEntries);

/** Any region that keeps the promises of its type, with 5 to 12 points. */
export const anyRegion: fc.Arbitrary<SpectrumRegion> = fc.record({
  label: words,
  species: words,
  energyKind: fc.constantFrom("kinetic", "binding", "unknown"),
  energies,
  photonEnergyEv: orNull(positive),
  biasV: orNull(number),
  asRecorded: fc.boolean(),
  analyzerWorkFunctionEv: orNull(number),
  passEnergyEv: orNull(positive),
  dwellS: orNull(positive),
  sweeps: orNull(fc.integer({ min: 1, max: 1e6 })),
  comments: fc.array(words, { maxLength: 4 }),
  metadata,
  names: fc.uniqueArray(name, { maxLength: 3, selector: (text) => text.toLowerCase() }),
  seeds: fc.array(fc.oneof(positive, fc.constantFrom(0, 1, 17)), { minLength: 12, maxLength: 12 }),
}).map(({ energies, names, seeds, ...facts }): SpectrumRegion => ({
  ...facts,
  energiesEv: Float64Array.from(energies),
  counts: Float64Array.from(energies, (_, i) => seeds[i]),
  // Every further column has a number that is not known.
  columns: Object.fromEntries(names.map((name, k) => [
    name,
    Float64Array.from(energies, (_, i) => i === k ? NaN : -seeds[(i + k) % 12] + 0),
  ])),
}));
