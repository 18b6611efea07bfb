import assert from "node:assert/strict";
import { readIso14976, readSpectrumCsv, type SpectrumRegion, writeIso14976 } from "../../src/formats/mod.ts";
import { type IsoItem, isoItems, isoText } from "../support/iso14976_sample.ts";

/** The sample with a comment in its first block that the others do not have: comments of all go to the experiment. */
function sampleItems(): IsoItem[] {
  const items = isoItems();
  const first = items.findIndex(([, line]) => line === "sputtered before");
  return items.with(first, [items[first][0], "not yet sputtered"]);
}

/**
 * The lines that the writer must make of the sample, whose item order is typed from the paper named there: the same but
 * for what the writer is free to choose. Future upgrade entries become comments, 0 and 1e+037 for unknown become 1E37,
 * and the descending block ascends.
 */
function expectedLines(): string[] {
  const items = sampleItems();
  const start = items.findLastIndex(([item]) => item === "block identifier");
  let isExperiment = true;
  return items.flatMap(([item, line], i): string[] => {
    if (item === "block identifier") isExperiment = false;
    const isDescending = i > start;
    const ordinates = items.slice(start).filter(([item]) => /^ordinate of/.test(item));
    const ordinate = items.slice(start, i).filter(([item]) => /^ordinate of/.test(item)).length;
    if (isDescending && item.startsWith("ordinate of")) {
      return [ordinates[ordinates.length - 2 - 2 * (ordinate >> 1) + (ordinate & 1)][1]];
    }
    if (isDescending && item === "abscissa start") return ["-0.5"];
    if (isDescending && item === "abscissa increment") return ["0.5"];
    if (isDescending && item === "source energy") return ["1E37"];
    if (item === "future upgrade experiment entry" || item === "future upgrade block entry") return [];
    if (/^number of future/.test(item)) return ["0"];
    if (item === "number of experiment comment lines") return ["2"];
    if (item === "number of block comment lines") return ["3"];
    if (isExperiment && item === "experiment comment line") return [line, "later still"];
    if (item === "block comment line" && line === "") return [line, "later"];
    return [/^1e\+?0?37$/i.test(line) ? "1E37" : line];
  });
}

Deno.test("writeIso14976() writes every item in the order of the standard when it had read them", () => {
  const written = writeIso14976(readIso14976(isoText(sampleItems()), "s.vms").regions);
  assert.deepEqual(written.split("\r\n"), [...expectedLines(), ""]);
});

/**
 * The spectra of a file of mode NORM, found by counting lines only, as somebody would write it who has the standard but
 * not our reader.
 */
function independentParse(text: string): { energies: number[]; counts: number[]; variables: number[] }[] {
  const lines = text.split("\r\n");
  let at = 5;
  const skip = (count: number) => void (at += count);
  const next = () => lines[at++];
  const many = (linesEach: number) => skip(linesEach * Number(next()));
  many(1); // comments
  assert.equal(next(), "NORM");
  const isRegular = next() === "REGULAR";
  skip(1); // regions
  const variableCount = Number(next());
  skip(2 * variableCount);
  many(1); // exclusions
  many(1); // manual items
  skip(2); // future entries
  const spectra = [];
  for (let block = Number(next()); block > 0; block--) {
    skip(9); // names and time
    many(1); // comments
    skip(1); // technique
    const variables = Array.from({ length: variableCount }, () => Number(next()));
    skip(19); // source, analyzer, bias, take-off angles, labels, charge: no item of these depends on another
    const energies: number[] = [];
    const [start, step] = isRegular ? [at += 2, next(), next()].slice(1).map(Number) : [NaN, NaN];
    const columns = Number(next());
    skip(2 * columns + 7);
    many(3); // parameters
    const values = Number(next());
    skip(2 * columns);
    const rows = Array.from(
      { length: values / columns },
      () => Array.from({ length: columns }, () => Number(next())),
    );
    rows.forEach((row, i) => energies.push(isRegular ? start + i * step : row[0]));
    spectra.push({ energies, counts: rows.map((row) => row[isRegular ? 0 : 1]), variables });
  }
  assert.deepEqual(lines.slice(at), ["end of experiment", ""]);
  return spectra;
}

const region = (energies: readonly number[], angle: number): SpectrumRegion => {
  const rows = energies.map((energyEv, i) => `${energyEv},${(7 * i * i) % 11},${i}`).join("\n");
  const head = `# experimental variable angle: ${angle} degree\n# note: any\nkinetic_energy_ev,counts,more\n`;
  return readSpectrumCsv(head + rows, "a.csv").regions[0];
};

Deno.test("writeIso14976() writes what a parser that only counts lines reads, regular and irregular", () => {
  const even = Array.from({ length: 60 }, (_, i) => (900 + 2 * i) / 100);
  const uneven = [1, 1.5, 1.75, 1.875, 2, 3];
  for (const [first, scan] of [[even, "REGULAR"], [uneven, "IRREGULAR"]] as const) {
    const regions = [region(first, 30), region(even, 62.5)];
    const text = writeIso14976(regions);
    assert.ok(text.includes(`\r\nNORM\r\n${scan}\r\n`));
    independentParse(text).forEach(({ energies, counts, variables }, i) => {
      assert.deepEqual(counts, [...regions[i].counts]);
      assert.deepEqual(variables, [[30], [62.5]][i]);
      energies.forEach((energy, k) => assert.ok(Math.abs(energy - regions[i].energiesEv[k]) < 1e-9));
    });
  }
});

Deno.test("writeIso14976() says start and increment as decimals when the energies are", () => {
  const lines = writeIso14976([region(Array.from({ length: 1001 }, (_, i) => (900 + 2 * i) / 100), 0)]).split(
    "\r\n",
  );
  const at = lines.indexOf("kinetic energy");
  assert.deepEqual(lines.slice(at, at + 4), ["kinetic energy", "eV", "9", "0.02"]);
});

Deno.test("readIso14976() gives the decimals of start and increment, not sums of binary fractions", () => {
  const lines = isoItems().map(([item, line]): IsoItem => [
    item,
    ({ "abscissa start": "0", "abscissa increment": "0.1" } as Record<string, string>)[item] ?? line,
  ]);
  const [{ energiesEv }] = readIso14976(isoText(lines), "s.vms").regions;
  assert.deepEqual([...energiesEv], [0, 0.1, 0.2, 0.3, 0.4, 0.5]);
  assert.notEqual(3 * 0.1, 0.3, "this example shows nothing");
});

Deno.test("writeIso14976() calls a technique by the photon energy when the region names none", () => {
  const technique = (photonEnergyEv: number | null) =>
    readIso14976(writeIso14976([{ ...region([1, 2, 3, 4, 5], 0), photonEnergyEv }]), "a.vms").regions[0]
      .metadata.technique;
  assert.deepEqual([21.218, 1486.6, null].map(technique), ["UPS", "XPS", "UPS"]);
});

Deno.test("readIso14976() reads a file of 100 blocks in well under a second", () => {
  const many = Array.from(
    { length: 100 },
    (_, i) => region(Array.from({ length: 400 }, (_, k) => k / 10), i),
  );
  const text = writeIso14976(many);
  const before = performance.now();
  assert.equal(readIso14976(text, "a.vms").regions.length, 100);
  // The aim is 200 ms on a free processor; ten times that still catches anything that grows with the square.
  assert.ok(performance.now() - before < 2000);
});
