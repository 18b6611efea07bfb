import assert from "node:assert/strict";
import fc from "fast-check";
import { InputError } from "../../src/base/mod.ts";
import { lostFacts, readSpectrumFile, type SpectrumRegion } from "../../src/formats/mod.ts";
import { isoText } from "../support/iso14976_sample.ts";

const utf8 = (text: string): Uint8Array => new TextEncoder().encode(text);

const CSV =
  "# region: edge\n# photon_energy_ev: 21.218\n# bias_v: -9\n## by hand\nkinetic_energy_ev,counts,mesh\n" +
  Array.from({ length: 12 }, (_, i) => `${(900 + 2 * i) / 100},${(i * i) % 23},${i / 3}`).join("\n");

/** Bytes changed at some places: other values, lost, doubled, or cut. */
const damage = fc.array(
  fc.record({
    at: fc.nat(),
    kind: fc.constantFrom("flip", "other", "lost", "doubled", "cut"),
    byte: fc.integer({ min: 0, max: 255 }),
  }),
  { minLength: 1, maxLength: 4 },
);

function damaged(bytes: Uint8Array, steps: { at: number; kind: string; byte: number }[]): Uint8Array {
  let all = [...bytes];
  for (const { at, kind, byte } of steps) {
    const i = at % Math.max(1, all.length);
    if (kind === "flip") all[i] ^= 1 << (byte % 8);
    else if (kind === "other") all[i] = byte;
    else if (kind === "lost") all.splice(i, 1);
    else if (kind === "doubled") all.splice(i, 0, all[i]);
    else all = all.slice(0, i);
  }
  return Uint8Array.from(all);
}

/** Regions, or null when the file is refused as bad input; anything else thrown fails the test. */
async function regionsOf(bytes: Uint8Array): Promise<readonly SpectrumRegion[] | null> {
  try {
    return (await readSpectrumFile(bytes, "damaged")).regions;
  } catch (error) {
    if (error instanceof InputError) return null;
    throw error;
  }
}

for (const [what, text] of [["CSV", CSV], ["ISO 14976", isoText()]] as const) {
  Deno.test(`readSpectrumFile() gives spectra or an InputError whatever is done to a file of ${what}`, async () => {
    await fc.assert(
      fc.asyncProperty(damage, async (steps) => {
        for (const region of await regionsOf(damaged(utf8(text), steps)) ?? []) {
          assert.equal(region.counts.length, region.energiesEv.length);
          assert.ok(region.counts.every((count) => count >= 0 && count < Infinity));
          assert.ok(region.energiesEv.every((energyEv, i) => i === 0 || energyEv > region.energiesEv[i - 1]));
        }
      }),
      { seed: 20250302, numRuns: 2000 },
    );
  });
}

Deno.test("readSpectrumFile() refuses any bytes that are no text, and never crashes on those that are", async () => {
  await fc.assert(
    fc.asyncProperty(
      fc.uint8Array({ maxLength: 60 }),
      fc.constantFrom("", "VAMAS", "\x89HDF\r\n\x1a\n"),
      async (bytes, start) => {
        const head = Uint8Array.from(start, (char) => char.charCodeAt(0));
        assert.equal(await regionsOf(Uint8Array.of(...head, ...bytes)), null);
      },
    ),
    { seed: 20250303, numRuns: 500 },
  );
});

/**
 * The redundancy of ISO 14976: counts of entries, the order of items, and the extremes of each variable. So a changed
 * byte is refused, or it changed the one item on its line: never another, and never the number of points.
 */
Deno.test("readIso14976() gives at most one other item, and all points, when one bit is changed", async () => {
  const bytes = utf8(isoText());
  const good = await regionsOf(bytes);
  assert.ok(good !== null);
  let refused = 0;
  for (let at = 0; at < bytes.length; at++) {
    const regions = await regionsOf(bytes.with(at, bytes[at] ^ (1 << (at % 7))));
    if (regions === null) {
      refused++;
      continue;
    }
    assert.deepEqual(regions.map(({ counts }) => counts.length), good.map(({ counts }) => counts.length));
    const changed = good.flatMap((region, i) => {
      const [before, after] = [region, regions[i]];
      const isTurned = before.energiesEv.at(-1) !== after.energiesEv.at(-1) && // the sign of the increment was lost
        before.counts.every((count, k) => count === after.counts.at(-1 - k));
      const others = isTurned ? 0 : before.counts.filter((count, k) => count !== after.counts[k]).length;
      assert.ok(others <= 1, `byte ${at} changed ${others} counts`);
      return lostFacts(before, after);
    });
    // The label of a column is the name of the column before and after, and in the key of its units; an increment of
    // the other sign turns energies, counts and columns round.
    assert.ok(new Set(changed).size <= 3, `byte ${at} changed ${changed.join(", ")}`);
  }
  assert.ok(refused > bytes.length / 3, `only ${refused} of ${bytes.length} were refused`);
});

Deno.test("readIso14976() refuses a file when a count is changed beyond the extremes that it states", async () => {
  const text = isoText();
  assert.ok(await regionsOf(utf8(text)) !== null);
  // 900 is the largest count of the second block, 31 of the third, and 3 the least of the first.
  for (const [from, to] of [["900", "901"], ["900", "100"], ["31", "37"], ["9\r\n2.5", "2\r\n2.5"]]) {
    const at = text.lastIndexOf(from);
    assert.ok(at > 0, from);
    const changed = text.slice(0, at) + to + text.slice(at + from.length);
    assert.equal(await regionsOf(utf8(changed)), null, `${from} to ${to}`);
  }
});
