import assert from "node:assert/strict";
import { QUICK_GOLD } from "../support/sweep_text.ts";
import { inFolder, namesIn, twoedge } from "../support/twoedge.ts";

const FILES = { "gold.json": QUICK_GOLD };
const OUTPUT = ["result.json", "spectrum.csv", "spectrum.svg", "losses.svg"];

function read(folder: string, names: readonly string[] = OUTPUT): string[] {
  return names.map((name) => Deno.readTextFileSync(`${folder}/${name}`));
}

async function simulate(folder: string, ...args: readonly string[]) {
  return await twoedge(folder, "simulate", "gold.json", ...args);
}

Deno.test("simulate --checkpoint continued gives the bytes of one long run, also with another instrument", async () => {
  await inFolder(FILES, async (folder) => {
    const sums = ["--checkpoint", "sums"];
    const set = ["--set", "analyzer.resolution.fwhmEv=0.2", "--set", "acquisition.dwellS=3"];
    assert.equal((await simulate(folder, "--histories", "300000", "--out", "short", ...sums)).code, 0);
    assert.equal(
      (await simulate(folder, "--histories", "700000", "--out", "a", "--workers", "1", ...sums)).code,
      0,
    );
    assert.equal(
      (await simulate(folder, "--histories", "700000", "--out", "long", "--workers", "2")).code,
      0,
    );
    assert.deepEqual(read(`${folder}/a`), read(`${folder}/long`));
    assert.notEqual(read(`${folder}/short`)[1], read(`${folder}/a`)[1]);
    await simulate(folder, "--histories", "700000", "--out", "b", ...set, ...sums);
    await simulate(folder, "--histories", "700000", "--out", "fresh", ...set);
    assert.deepEqual(read(`${folder}/b`), read(`${folder}/fresh`));
    assert.deepEqual(namesIn(folder), ["a", "b", "fresh", "gold.json", "long", "short", "sums"]);
  });
});

Deno.test("simulate --checkpoint refuses sums that are damaged, of something else, or of more histories", async () => {
  await inFolder({ ...FILES, "text.sums": "not sums" }, async (folder) => {
    await simulate(folder, "--histories", "100000", "--out", "a", "--checkpoint", "sums");
    const whole = Deno.readFileSync(`${folder}/sums`);
    const refuses = async (message: RegExp, ...args: readonly string[]): Promise<void> => {
      const { code, stdout, stderr } = await simulate(folder, "--out", "b", ...args);
      assert.deepEqual([code, stdout], [2, ""]);
      assert.match(stderr, message);
    };
    const more = ["--histories", "200000", "--checkpoint", "sums"];
    await refuses(/must be of this version, scenario .* and seed/, ...more, "--seed", "2");
    await refuses(/must be of this version, scenario .* and seed/, ...more, "--set", "biasV=-8");
    await refuses(/histories must be >= 102400, which it already holds/, "--checkpoint", "sums");
    await refuses(/must be a checkpoint: .* \(at text\.sums\)/, "--checkpoint", "text.sums");
    Deno.writeFileSync(`${folder}/sums`, whole.subarray(0, whole.length - 8));
    await refuses(/bytes of sums must be whole/, ...more);
    const changed = whole.slice();
    changed[changed.length - 100] ^= 1;
    Deno.writeFileSync(`${folder}/sums`, changed);
    await refuses(/bytes of sums must be whole/, ...more);
    assert.deepEqual(namesIn(folder), ["a", "gold.json", "sums", "text.sums"]);
  });
});

Deno.test("simulate --until stops at the first look that is precise enough, on any workers, interrupted or not", async () => {
  await inFolder(FILES, async (folder) => {
    const until = ["--until", "0.8%"];
    assert.equal((await simulate(folder, ...until, "--out", "a", "--workers", "1")).code, 0);
    const [result] = read(`${folder}/a`).map((text, i) => (i === 0 ? JSON.parse(text) : null));
    assert.equal(result.complete, true);
    assert.equal(result.wantedRelativeStandardError, 0.008);
    assert.ok(result.worstRelativeStandardError < 0.008);
    // A look every 64 batches of 4096; the one before was not precise enough.
    assert.equal(result.histories % (64 * 4096), 0);
    const before = result.histories - 64 * 4096;
    assert.ok(before > 0, "the first look must not be enough, or nothing is tested");
    const short = await simulate(
      folder,
      ...until,
      "--histories",
      `${before}`,
      "--out",
      "b",
      "--checkpoint",
      "sums",
    );
    assert.equal(short.code, 1);
    const stopped = JSON.parse(read(`${folder}/b`)[0]);
    assert.deepEqual([stopped.complete, stopped.histories], [false, before]);
    assert.ok(stopped.worstRelativeStandardError >= 0.008);
    // Half-way between two looks, and on.
    await simulate(
      folder,
      ...until,
      "--histories",
      `${before + 32 * 4096}`,
      "--out",
      "b",
      "--checkpoint",
      "sums",
    );
    assert.equal((await simulate(folder, ...until, "--out", "b", "--checkpoint", "sums")).code, 0);
    assert.deepEqual(read(`${folder}/b`), read(`${folder}/a`));
  });
});

for (const wrong of ["0.5", "0%", "100%", "%", "-1%"]) {
  Deno.test(`simulate refuses --until ${wrong}`, async () => {
    await inFolder(FILES, async (folder) => {
      const { code, stderr } = await simulate(folder, "--until", wrong);
      assert.equal(code, 2);
      assert.match(stderr, /must be a percentage > 0% and < 100% such as 0\.5%|must be a decimal number/);
    });
  });
}

Deno.test("simulate --replicate draws other counts about the same expectation", async () => {
  await inFolder(FILES, async (folder) => {
    const columns = async (replicate: string) => {
      await simulate(folder, "--out", "a", "--replicate", replicate);
      const rows = read(`${folder}/a`, ["spectrum.csv"])[0].split("\n").filter((line) => /^\d/.test(line))
        .map((line) => line.split(","));
      return { expected: rows.map((row) => row[1]).join(), counts: rows.map((row) => row[2]).join() };
    };
    const [zero, three, again] = [await columns("0"), await columns("3"), await columns("3")];
    assert.equal(three.expected, zero.expected);
    assert.notEqual(three.counts, zero.counts);
    assert.deepEqual(again, three);
    assert.equal((await simulate(folder, "--replicate", "-1")).code, 2);
  });
});
