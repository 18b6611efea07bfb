import assert from "node:assert/strict";
import { parse } from "csv-parse/sync";
import { QUICK_GOLD, sweepText } from "../support/sweep_text.ts";
import { csvParts, inFolder, namesIn, type Outcome, twoedge, twoedgeCommand } from "../support/twoedge.ts";

/** Files of a sweep of twelve quick points; the third and the ninth temperature are no scenario. */
const FILES = {
  "gold.json": QUICK_GOLD,
  "sweep.json": sweepText({
    axes: [
      { kind: "list", path: "sample.temperatureK", values: [100, 200, -1] },
      { kind: "range", path: "light.photonFluxPerS", from: 1e9, to: 8e9, count: 4, scale: "log" },
    ],
  }),
};

/** The table, row by row. */
function table(folder: string): Record<string, string>[] {
  return parse(Deno.readTextFileSync(`${folder}/table.csv`), { columns: true });
}

/** Lines of all record files. */
function recordLines(folder: string): string[] {
  return namesIn(`${folder}/parts`).flatMap((name) =>
    Deno.readTextFileSync(`${folder}/parts/${name}`).split("\n").filter((line) => line !== "")
  );
}

Deno.test("sweep writes one row a point, failures with their reasons, and the same bytes on any number of workers", async () => {
  await inFolder(FILES, async (folder) => {
    const { code, stdout, stderr } = await twoedge(
      folder,
      "sweep",
      "sweep.json",
      "--out",
      "a",
      "--workers",
      "2",
    );
    assert.deepEqual([code, stderr], [1, ""]);
    assert.match(
      stdout,
      /^two by two: 12 points, 8 done, 4 failed, 0 not run\n {2}4 failed: Cannot read scenario as/,
    );
    assert.deepEqual(namesIn(`${folder}/a`), ["figure.svg", "parts", "sweep.json", "table.csv"]);
    const rows = table(`${folder}/a`);
    assert.deepEqual(rows.map(({ point }) => point), Array.from({ length: 12 }, (_, i) => `${i}`));
    assert.deepEqual(rows.map(({ status }) => status), [
      ...Array(8).fill("done"),
      ...Array(4).fill("failed"),
    ]);
    assert.equal(rows[5]["sample.temperatureK"], "200");
    assert.equal(rows[5]["light.photonFluxPerS"], "2000000000");
    assert.match(
      rows[11].reason,
      /temperatureK must be >= 0 K: current value is -1 \(at \/sample\/temperatureK\)/,
    );
    assert.equal(rows[11].peakCounts, "");
    // Without dead time and dark counts the expectation is proportional to the flux; one tally serves the four fluxes.
    const peaks = rows.map(({ peakCounts }) => Number(peakCounts));
    for (const i of [0, 4]) {
      assert.ok(Math.abs(peaks[i + 3] / peaks[i] - 8) < 1e-9, `${peaks[i + 3]} over ${peaks[i]}`);
    }
    assert.notEqual(peaks[0], peaks[4]);

    const again = await twoedge(folder, "sweep", "sweep.json", "--out", "b", "--workers", "1");
    assert.equal(again.code, 1);
    for (const name of ["table.csv", "figure.svg", "sweep.json"]) {
      assert.equal(
        Deno.readTextFileSync(`${folder}/b/${name}`),
        Deno.readTextFileSync(`${folder}/a/${name}`),
        name,
      );
    }
    assert.deepEqual(recordLines(`${folder}/b`).toSorted(), recordLines(`${folder}/a`).toSorted());
  });
});

Deno.test("sweep runs its parts apart, and sweep-collect joins them", async () => {
  await inFolder(FILES, async (folder) => {
    await twoedge(folder, "sweep", "sweep.json", "--out", "whole", "--workers", "1");
    const parts: Outcome[] = [];
    for (const part of ["2/3", "1/3"]) {
      parts.push(
        await twoedge(folder, "sweep", "sweep.json", "--out", "a", "--workers", "1", "--part", part),
      );
    }
    assert.deepEqual(parts.map(({ code, stdout }) => [code, stdout]), [
      [0, "Part 2/3: 4 points run, 0 failed\n"],
      [0, "Part 1/3: 4 points run, 0 failed\n"],
    ]);
    const status = await twoedge(folder, "sweep-status", "a", "--json");
    const { done, failed, missing } = JSON.parse(status.stdout);
    assert.deepEqual([status.code, done, failed, missing], [0, 8, 0, 4]);
    const early = await twoedge(folder, "sweep-collect", "a");
    assert.equal(early.code, 1);
    assert.deepEqual(table(`${folder}/a`).slice(7, 9).map((row) => row.status), ["done", "missing"]);
    // The folder alone is enough to go on.
    Deno.removeSync(`${folder}/gold.json`);
    assert.equal((await twoedge(folder, "sweep", "a", "--part", "3/3", "--workers", "1")).code, 1);
    await twoedge(folder, "sweep-collect", "a");
    assert.equal(
      Deno.readTextFileSync(`${folder}/a/table.csv`),
      Deno.readTextFileSync(`${folder}/whole/table.csv`),
    );
  });
});

/** Starts a sweep of 40 points on one worker, and does something to it when some records are there. */
async function disturbed(
  folder: string,
  args: readonly string[],
  disturb: (child: Deno.ChildProcess) => void,
): Promise<Outcome> {
  const child = twoedgeCommand(folder, ["sweep", "long.json", "--out", "a", "--workers", "1", ...args])
    .spawn();
  const text = (stream: ReadableStream<Uint8Array>) => new Response(stream).text();
  const [stdout, stderr] = [text(child.stdout), text(child.stderr)];
  let ended = false;
  const status = child.status.finally(() => ended = true);
  const lines = (): number => {
    try {
      return recordLines(`${folder}/a`).length;
    } catch {
      return 0; // no folder yet
    }
  };
  while (!ended && lines() < 3) await new Promise((resolve) => setTimeout(resolve, 20));
  disturb(child);
  return { code: (await status).code, stdout: await stdout, stderr: await stderr };
}

const LONG = {
  "gold.json": QUICK_GOLD,
  "long.json": sweepText({
    axes: [{ kind: "range", path: "sample.temperatureK", from: 100, to: 490, count: 40 }],
    record: { values: ["peakCounts"], spectra: true },
  }),
};

Deno.test("sweep loses no more than the points in flight when killed, and reads past a torn line", async () => {
  await inFolder(LONG, async (folder) => {
    const killed = await disturbed(folder, [], (child) => child.kill("SIGKILL"));
    assert.ok(killed.code !== 0);
    // What a kill in the middle of a write leaves.
    const [name] = namesIn(`${folder}/a/parts`);
    const path = `${folder}/a/parts/${name}`;
    const kept = recordLines(`${folder}/a`).length - 1;
    Deno.truncateSync(path, Deno.statSync(path).size - 20);
    const refused = await twoedge(folder, "sweep", "long.json", "--out", "a");
    assert.equal(refused.code, 2);
    assert.match(refused.stderr, /the folder must be new, or --resume be given to go on/);
    const resumed = await twoedge(folder, "sweep", "long.json", "--out", "a", "--resume");
    assert.deepEqual([resumed.code, resumed.stderr], [0, ""]);
    assert.match(resumed.stdout, new RegExp(`40 points, 40 done.*\nRan ${40 - kept} of them now`));
    assert.equal(recordLines(`${folder}/a`).length, 41, "40 records and the torn one");
    await twoedge(folder, "sweep", "long.json", "--out", "whole");
    assert.equal(
      Deno.readTextFileSync(`${folder}/a/table.csv`),
      Deno.readTextFileSync(`${folder}/whole/table.csv`),
    );
    const nothing = await twoedge(folder, "sweep", "a");
    assert.match(nothing.stdout, /\nRan 0 of them now/);
  });
});

Deno.test("sweep finishes the points in flight when interrupted, and says how to go on", async () => {
  await inFolder(LONG, async (folder) => {
    const { code, stderr, stdout } = await disturbed(folder, [], (child) => child.kill("SIGINT"));
    assert.equal(code, 1);
    const [, finished] = /^Stopped after (\d+) points; go on with: twoedge sweep a --resume$/m.exec(stderr) ??
      [];
    assert.ok(Number(finished) >= 3 && Number(finished) < 40, stderr);
    assert.match(
      stdout,
      new RegExp(`40 points, ${finished} done, 0 failed, ${40 - Number(finished)} not run`),
    );
    assert.equal(recordLines(`${folder}/a`).length, Number(finished));
    const spectra = namesIn(`${folder}/a/spectra`).flatMap((name) => namesIn(`${folder}/a/spectra/${name}`));
    assert.equal(spectra.length, Number(finished));
    const { columns, metadata } = csvParts(
      Deno.readTextFileSync(`${folder}/a/spectra/${spectra[0].slice(0, 2)}/${spectra[0]}`),
    );
    assert.equal(metadata.histories, "8192");
    assert.ok(columns.counts.every(Number.isInteger));
  });
});

Deno.test("sweep is not disturbed by another process that runs the same points in the same folder", async () => {
  await inFolder(FILES, async (folder) => {
    const both = await Promise.all(
      [1, 2].map(() =>
        twoedge(folder, "sweep", "sweep.json", "--out", "a", "--part", "1/1", "--workers", "1")
      ),
    );
    assert.deepEqual(both.map(({ code, stderr }) => [code, stderr]), [[1, ""], [1, ""]]);
    await twoedge(folder, "sweep-collect", "a");
    await twoedge(folder, "sweep", "sweep.json", "--out", "whole");
    assert.equal(
      Deno.readTextFileSync(`${folder}/a/table.csv`),
      Deno.readTextFileSync(`${folder}/whole/table.csv`),
    );
    assert.ok(namesIn(`${folder}/a`).every((name) => !name.endsWith(".partial")));
  });
});

Deno.test("sweep goes on with a longer axis and keeps the points that it has", async () => {
  await inFolder(LONG, async (folder) => {
    const withCount = (count: number, to: number) =>
      sweepText({ axes: [{ kind: "range", path: "sample.temperatureK", from: 100, to, count }] });
    Deno.writeTextFileSync(`${folder}/s.json`, withCount(3, 120));
    assert.equal((await twoedge(folder, "sweep", "s.json", "--out", "a")).code, 0);
    Deno.writeTextFileSync(`${folder}/s.json`, withCount(5, 140));
    const refused = await twoedge(folder, "sweep", "s.json", "--out", "a");
    assert.equal(refused.code, 2);
    assert.match(refused.stderr, /the folder must hold the same sweep, or --resume be given to change it/);
    const { code, stdout } = await twoedge(folder, "sweep", "s.json", "--out", "a", "--resume");
    assert.equal(code, 0);
    assert.match(stdout, /5 points, 5 done, 0 failed, 0 not run\nRan 2 of them now/);
  });
});

Deno.test("sweep stops at a failing point when --fail-fast is given", async () => {
  await inFolder(FILES, async (folder) => {
    const reversed = FILES["sweep.json"].replace("[100,200,-1]", "[-1,100,200]");
    Deno.writeTextFileSync(`${folder}/sweep.json`, reversed);
    const args = ["sweep", "sweep.json", "--out", "a", "--fail-fast", "--workers", "1"];
    const { code, stderr, stdout } = await twoedge(folder, ...args);
    assert.equal(code, 1);
    assert.match(stderr, /^A point failed: .*temperatureK must be >= 0 K/);
    assert.match(stdout, /12 points, 0 done, 1 failed, 11 not run/);
  });
});

Deno.test("sweep --dry-run says how much there is to do, and writes nothing", async () => {
  await inFolder(FILES, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "sweep", "sweep.json", "--dry-run");
    assert.deepEqual([code, stderr], [0, ""]);
    // Two temperatures that are scenarios, each with one tally of 8192 photons for its four fluxes.
    assert.match(
      stdout,
      /^two by two: 12 points, 4 of them will fail\n {2}2 tallies, 1\.64e\+4 photons to follow\n/,
    );
    assert.match(
      stdout,
      /\n {2}about [\d.]+ (s|min|h) on \d+ workers? like this one\n {2}about [\d.]+ kB on disk\n/,
    );
    assert.deepEqual(namesIn(folder), Object.keys(FILES));
  });
});

/** What is wrong, the arguments, the exit code, and what the message must say. */
const REFUSED: readonly (readonly [string, readonly string[], number, RegExp])[] = [
  ["a file that is not there", ["none.json"], 3, /^Cannot read none\.json: it does not exist$/],
  ["a scenario that is not there", ["lost.json"], 3, /^Cannot read lost_gold\.json: it does not exist$/],
  ["an unknown path", ["path.json"], 2, /did you mean biasV\?.* \(at \/axes\/0\/path\)$/],
  ["a part beyond the last", ["sweep.json", "--part", "3/2"], 2, /must be I\/N with 1 <= I <= N, not "3\/2"/],
  ["a folder that --out did not write", ["."], 2, /sweep\.json must be what sweep --out wrote/],
];
for (const [what, args, code, message] of REFUSED) {
  Deno.test(`sweep refuses ${what} with exit code ${code} and writes nothing`, async () => {
    const files = {
      ...FILES,
      "lost.json": sweepText({ scenario: "lost_gold.json" }),
      "path.json": sweepText({ axes: [{ kind: "list", path: "bias", values: [1] }] }),
    };
    await inFolder(files, async (folder) => {
      const outcome = await twoedge(folder, "sweep", ...args, "--out", "a");
      assert.deepEqual([outcome.code, outcome.stdout], [code, ""]);
      assert.match(
        outcome.stderr.trimEnd(),
        message,
      );
      assert.deepEqual(namesIn(folder), Object.keys(files).toSorted());
    });
  });
}

Deno.test("sweep reads the tables that its axes name, and needs them no more afterwards", async () => {
  const files = {
    "gold.json": QUICK_GOLD,
    "short.csv": "energy_ev,length_nm\n1,9\n5,3\n9,1\n15,0.5\n30,0.4\n",
    "long.csv": "energy_ev,length_nm\n1,90\n5,30\n9,10\n15,5\n30,4\n",
    "s.json": sweepText({
      axes: [{ kind: "list", path: "sample.meanFreePathFile", values: ["short.csv", "long.csv"] }],
    }),
  };
  await inFolder(files, async (folder) => {
    assert.equal((await twoedge(folder, "sweep", "s.json", "--out", "a", "--part", "1/2")).code, 0);
    Deno.removeSync(`${folder}/long.csv`);
    assert.equal((await twoedge(folder, "sweep", "a", "--resume")).code, 0);
    const [short, long] = table(`${folder}/a`).map(({ peakCounts }) => Number(peakCounts));
    assert.ok(long > short, "electrons that travel farther come out in greater number");
  });
});
