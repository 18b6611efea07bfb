import assert from "node:assert/strict";
import { csvParts, GOLD, goldRun, inFolder, namesIn, twoedge, twoedgeCommand } from "../support/twoedge.ts";
import { textsOf } from "../support/drawing.ts";
import { assertClose } from "../support/assert_close.ts";

const X_RAYS = new URL("../../scenarios/gold_under_aluminum_al_kalpha.json", import.meta.url).pathname;
const FILES = ["losses.svg", "result.json", "spectrum.csv", "spectrum.svg"];
/** The smallest run: two batches. */
const SMALL = ["--histories", "8192", "--workers", "1"];

Deno.test("simulate writes the promised files and nothing else", async () => {
  assert.deepEqual((await goldRun()).names, FILES);
});

Deno.test("simulate writes the promised columns over the window of the scenario", async () => {
  const { columns } = csvParts((await goldRun()).csv);
  assert.deepEqual(Object.keys(columns), [
    "kinetic_energy_ev",
    "expected_counts",
    "counts",
    "standard_error",
  ]);
  // Window of the scenario: 8.8 to 29 eV in steps of 0.02 eV.
  const energies = columns.kinetic_energy_ev;
  assert.equal(energies.length, 1011);
  energies.forEach((energy, i) => assertClose(energy, 8.8 + 0.02 * i, { absolute: 1e-9 }));
  assert.ok(columns.counts.every((count) => Number.isInteger(count) && count >= 0));
  assert.ok(columns.expected_counts.every((count) => count > 0));
  assert.ok(columns.standard_error.every((error) => error >= 0));
  assert.ok(columns.standard_error.some((error) => error > 0));
});

Deno.test("simulate writes the promised metadata with the values of the scenario", async () => {
  const { metadata } = csvParts((await goldRun()).csv);
  // Helium line: 58.43343 nm in vacuum, 21.2180 eV (NIST Atomic Spectra Database).
  assertClose(Number(metadata.photon_energy_ev), 21.218, { absolute: 1e-3 });
  // Hemisphere, common textbook formula: pass energy x (slit / 2 R0 + half-angle^2 / 4), half-angle in radians.
  assertClose(Number(metadata.resolution_fwhm_ev), 10 * (2 / 300 + (Math.PI / 60) ** 2 / 4), {
    relative: 1e-9,
  });
  const expected = {
    bias_v: "-9",
    analyzer_work_function_ev: "4.4",
    temperature_k: "300",
    dwell_s: "0.5",
    sweeps: "4",
    seed: "3",
    histories: "2097152",
  };
  for (const [key, value] of Object.entries(expected)) assert.equal(metadata[key], value, key);
  assert.match(metadata.version, /^\d+\.\d+\.\d+$/);
  assert.match(metadata.scenario_hash, /^[0-9a-f]{16}$/);
  assert.equal(metadata.simulated, "true");
});

Deno.test("simulate draws counts about its expected counts", async () => {
  const { columns } = csvParts((await goldRun()).csv);
  const { expected_counts: expected, counts } = columns;
  // Pearson's sum over n Poisson counts has mean n and variance sum (2 + 1/mu). Limit 4.5: one false alarm in 150 000.
  const z = (means: readonly number[]): number => {
    const excess = counts.reduce((sum, count, i) => sum + (count - means[i]) ** 2 / means[i] - 1, 0);
    return excess / Math.sqrt(means.reduce((sum, mean) => sum + 2 + 1 / mean, 0));
  };
  assert.ok(Math.abs(z(expected)) < 4.5, `z ${z(expected)}`);
  assert.ok(Math.abs(z(expected.map((mean) => 1.1 * mean))) > 4.5, "counts 10 % off must be refused");
});

Deno.test("simulate writes the values put in to result.json", async () => {
  const result = JSON.parse((await goldRun()).json);
  // W - W_A - e U = 5.1 - 4.4 + 9, h nu - W_A - e U, and h nu - W.
  assertClose(result.truth.workFunctionEv, 5.1, { absolute: 1e-12 });
  assertClose(result.truth.cutoffEv, 9.7, { absolute: 1e-9 });
  assertClose(result.truth.fermiEdgeEv, 21.218 + 4.6, { absolute: 1e-3 });
  assertClose(result.truth.maxKineticEnergyEv, 21.218 - 5.1, { absolute: 1e-3 });
  assert.equal(result.simulated, true);
  assert.equal(result.complete, true);
  assert.equal(result.histories, 2097152);
});

Deno.test("simulate prints one JSON object and nothing else when --json is given", async () => {
  const { stdout, json } = await goldRun();
  assert.equal(stdout, json);
  assert.equal(typeof JSON.parse(stdout), "object");
});

Deno.test("simulate draws a figure that calls the data simulated", async () => {
  const { svg } = await goldRun();
  assert.match(svg, /^<svg [\s\S]*<\/svg>\s*$/);
  assert.match(svg, /Kinetic energy as recorded \/ eV/);
  assert.match(svg, /simulated/);
});

Deno.test("simulate draws what slow electrons went through, in counts", async () => {
  await inFolder({}, async (folder) => {
    assert.equal((await twoedge(folder, "simulate", GOLD, ...SMALL, "--out", "a")).code, 0);
    const texts = textsOf(Deno.readTextFileSync(`${folder}/a/losses.svg`));
    for (const word of ["before any event", "after events", "all", "Counts"]) {
      assert.ok(texts.includes(word), `"${word}" is not among ${texts.join(" | ")}`);
    }
  });
});

Deno.test("simulate tells and draws the number of losses, and the depths, of lines under X-rays", async () => {
  await inFolder({}, async (folder) => {
    const { code, stdout } = await twoedge(folder, "simulate", X_RAYS, ...SMALL, "--out", "a");
    assert.equal(code, 0);
    assert.doesNotMatch(stdout, /cutoff|Fermi edge/);
    assert.deepEqual(namesIn(`${folder}/a`), ["depths.svg", ...FILES]);
    const { levels } = JSON.parse(Deno.readTextFileSync(`${folder}/a/result.json`));
    assert.ok(levels.length > 0);
    for (const { name, kineticEnergyEv, meanEscapeDepthNm, partialIntensities } of levels) {
      const depth = meanEscapeDepthNm.toFixed(2);
      const line = `  ${name.padEnd(26)} ${
        kineticEnergyEv.toFixed(3)
      } eV as recorded, mean escape depth ${depth} nm\n`;
      assert.ok(stdout.includes(line), line);
      assert.equal(partialIntensities[0], 1, name);
      // 70 eV are followed, and all materials lose 10 to 30 eV at a time: no more than some ten losses.
      assert.ok(partialIntensities.every((value: number) => value >= 0 && value < 1.5), name);
      assert.ok(partialIntensities.at(-1) < 0.01, name);
    }
    const texts = textsOf(Deno.readTextFileSync(`${folder}/a/losses.svg`));
    for (const word of ["Number of energy losses", ...levels.map(({ name }: { name: string }) => name)]) {
      assert.ok(texts.includes(word), `"${word}" is not among ${texts.join(" | ")}`);
    }
  });
});

Deno.test("simulate writes the same bytes when the seed is the same, on any number of workers", async () => {
  await inFolder({}, async (folder) => {
    const run = async (out: string, seed: string, workers: string): Promise<string[]> => {
      const args = ["--histories", "73728", "--seed", seed, "--workers", workers, "--out", out];
      assert.equal((await twoedge(folder, "simulate", GOLD, ...args)).code, 0);
      return FILES.map((name) => Deno.readTextFileSync(`${folder}/${out}/${name}`));
    };
    const first = await run("a", "5", "1");
    assert.deepEqual(await run("b", "5", "2"), first);
    const other = await run("c", "6", "1");
    FILES.forEach((name, i) => assert.notEqual(other[i], first[i], name));
  });
});

Deno.test("simulate writes into out/ and the scenario's name, over what was there, when no folder is given", async () => {
  await inFolder({}, async (folder) => {
    for (const seed of ["1", "2"]) {
      const { code, stdout, stderr } = await twoedge(folder, "simulate", GOLD, ...SMALL, "--seed", seed);
      assert.deepEqual([code, stderr], [0, ""]);
      assert.match(stdout, /work function put in +5\.100 eV/);
      assert.deepEqual(namesIn(`${folder}/out/clean_gold_he1`), FILES);
      const { metadata } = csvParts(Deno.readTextFileSync(`${folder}/out/clean_gold_he1/spectrum.csv`));
      assert.equal(metadata.seed, seed);
    }
    assert.deepEqual(namesIn(folder), ["out"]);
  });
});

Deno.test("simulate takes a typed value by its path when --set is given", async () => {
  await inFolder({}, async (folder) => {
    const set = [
      "sample.temperatureK=77",
      "sample.workFunctionEv=4.9",
      "sample.barrier=quantum",
      "light.satellites=false",
      'analyzer.resolution={"kind":"fwhm","fwhmEv":0.05}',
    ].flatMap((override) => ["--set", override]);
    const { code, stdout } = await twoedge(
      folder,
      "simulate",
      GOLD,
      ...SMALL,
      "--out",
      "a",
      "--json",
      ...set,
    );
    assert.equal(code, 0);
    const { scenario, truth } = JSON.parse(stdout);
    assert.equal(scenario.sample.temperatureK, 77);
    assert.equal(scenario.sample.barrier, "quantum");
    assert.equal(scenario.light.satellites, false);
    assert.equal(truth.workFunctionEv, 4.9);
    const { metadata } = csvParts(Deno.readTextFileSync(`${folder}/a/spectrum.csv`));
    assert.equal(metadata.temperature_k, "77");
    assert.equal(metadata.resolution_fwhm_ev, "0.05");
  });
});

/** What is wrong, the arguments, and what the message must say. */
const REFUSED: readonly (readonly [string, readonly string[], RegExp])[] = [
  ["no =", ["--set", "sample"], /must be PATH=VALUE .*current value is "sample" \(at --set\)/],
  [
    "an unknown path",
    ["--set", "sample.temperture=77"],
    /did you mean temperatureK\?.* \(at \/sample\/temperture\)/,
  ],
  [
    "text for a number",
    ["--set", "sample.temperatureK=cold"],
    /temperatureK must be a number in K: current value is "cold" \(at \/sample\/temperatureK\)/,
  ],
  [
    "nothing for a number",
    ["--set", "biasV="],
    /biasV must be a number in V: current value is "" \(at \/biasV\)/,
  ],
  [
    "a number with its unit",
    ["--set", "biasV=-9 V"],
    /biasV must be a number in V: current value is "-9 V" \(at \/biasV\)/,
  ],
  [
    "a value out of range",
    ["--set", "sample.temperatureK=-1"],
    /temperatureK must be >= 0 K: current value is -1 \(at \/sample\/temperatureK\)/,
  ],
  [
    "a path through a number",
    ["--set", "biasV.volts=3"],
    /every key but the last must be an object, .*: current value is "-9" \(at --set biasV\.volts\)/,
  ],
  [
    "a window without channels",
    ["--set", "acquisition.endEv=8"],
    /endEv must be > startEv \(8\.8 eV\): current value is "8 eV" \(at \/acquisition\/endEv\)/,
  ],
  ["too few histories", ["--histories", "10"], /histories must be >= 8192.* \(at \/simulation\/histories\)/],
  [
    "a fraction of a history",
    ["--histories", "9000.5"],
    /histories must be a whole number: current value is 9000\.5/,
  ],
  ["a seed that is no number", ["--seed", "lucky"], /"lucky" for seed: must be a decimal number/],
  ["a negative seed", ["--seed", "-1"], /seed must be >= 0.* \(at \/simulation\/seed\)/],
  ["no workers", ["--workers", "0"], /"0" for workers: must be a whole number >= 1/],
];
for (const [what, args, message] of REFUSED) {
  Deno.test(`simulate refuses ${what} with exit code 2 and writes nothing`, async () => {
    await inFolder({}, async (folder) => {
      const { code, stdout, stderr } = await twoedge(folder, "simulate", GOLD, "--json", ...args);
      assert.deepEqual([code, stdout], [2, ""]);
      assert.match(stderr, message);
      assert.equal(stderr.trimEnd().split("\n").length, 1);
      assert.deepEqual(namesIn(folder), []);
    });
  });
}

Deno.test("simulate reports all problems of a scenario at once", async () => {
  await inFolder({}, async (folder) => {
    const set = ["--set", "sample.material=Gold", "--set", "biasV=high", "--set", "analyzer.passEnergy=5"];
    const { code, stderr } = await twoedge(folder, "simulate", GOLD, ...set);
    assert.equal(code, 2);
    const places = stderr.trimEnd().split("\n").map((line) => /\(at ([^)]+)\)$/.exec(line)?.[1]);
    assert.deepEqual(places.sort(), ["/analyzer/passEnergy", "/biasV", "/sample/material"]);
  });
});

Deno.test("simulate ends with exit code 3 and leaves nothing when it cannot write", async () => {
  await inFolder({ taken: "a file" }, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "simulate", GOLD, ...SMALL, "--out", "taken");
    assert.deepEqual([code, stdout], [3, ""]);
    assert.equal(stderr, "Cannot write taken: a file is where a folder must be\n");
    assert.deepEqual(namesIn(folder), ["taken"]);
    assert.equal(Deno.readTextFileSync(`${folder}/taken`), "a file");
  });
});

Deno.test("simulate leaves no temporary file when a name is taken by a folder", async () => {
  await inFolder({}, async (folder) => {
    Deno.mkdirSync(`${folder}/a/spectrum.svg`, { recursive: true });
    const { code, stdout, stderr } = await twoedge(folder, "simulate", GOLD, ...SMALL, "--out", "a");
    assert.deepEqual([code, stdout], [3, ""]);
    assert.match(stderr, /^Cannot write a: /);
    assert.ok(namesIn(`${folder}/a`).every((name) => FILES.includes(name)));
  });
});

Deno.test("simulate prints warnings on standard error and keeps standard output for the result", async () => {
  await inFolder({}, async (folder) => {
    const args = ["--set", "acquisition.endEv=20", "--json", "--out", "a"];
    const { code, stdout, stderr } = await twoedge(folder, "simulate", GOLD, ...SMALL, ...args);
    assert.equal(code, 0);
    assert.match(
      stderr,
      /^Warning: the window ends at 20\.000 eV, before the Fermi edge .* \(at \/acquisition\/endEv\)\n$/,
    );
    assert.equal(JSON.parse(stdout).warnings[0].code, "fermi-edge-outside");
  });
});

/** Interrupts a run that would take a minute, some time after it has spoken of its scenario. */
async function interrupt(
  folder: string,
  afterMs: number,
): Promise<{ code: number; stdout: string; stderr: string }> {
  // The coarse step has a warning, which tells that the run begins.
  const args = ["--histories", "1e8", "--workers", "1", "--set", "acquisition.stepEv=0.06", "--out", "a"];
  const child = twoedgeCommand(folder, ["simulate", GOLD, ...args]).spawn();
  const stdout = new Response(child.stdout).text();
  let stderr = "";
  let told = false;
  for await (const chunk of child.stderr.pipeThrough(new TextDecoderStream())) {
    stderr += chunk;
    if (told || !stderr.includes("Warning: ")) continue;
    told = true;
    await new Promise((resolve) => setTimeout(resolve, afterMs));
    child.kill("SIGINT");
  }
  const { code } = await child.status;
  return { code, stdout: await stdout, stderr };
}

for (const afterMs of [0, 1500]) {
  Deno.test(`simulate leaves whole files or none, and exit code 1, when interrupted after ${afterMs} ms`, async () => {
    await inFolder({}, async (folder) => {
      const { code, stdout, stderr } = await interrupt(folder, afterMs);
      assert.equal(code, 1);
      const histories = Number(/^Stopped after (\d+) histories$/m.exec(stderr)?.[1]);
      // Without two batches there is no standard error, and nothing is kept.
      if (histories <= 4096) {
        assert.equal(stdout, "");
        return assert.deepEqual(namesIn(folder), []);
      }
      assert.deepEqual(namesIn(`${folder}/a`), FILES);
      const result = JSON.parse(Deno.readTextFileSync(`${folder}/a/result.json`));
      assert.deepEqual([result.complete, result.histories], [false, histories]);
      assert.ok(result.worstRelativeStandardError > 0);
      const { metadata, columns } = csvParts(Deno.readTextFileSync(`${folder}/a/spectrum.csv`));
      assert.equal(metadata.histories, String(histories));
      assert.ok(Object.values(columns).every((column) => column.every(Number.isFinite)));
      assert.match(Deno.readTextFileSync(`${folder}/a/spectrum.svg`), /<\/svg>\s*$/);
    });
  });
}

Deno.test("simulate names the user's table, and its line, when that cannot be used", async () => {
  const scenario = Deno.readTextFileSync(GOLD).replace(
    '"temperatureK": 300',
    '"temperatureK": 300, "meanFreePathFile": "lengths.csv"',
  );
  await inFolder({ "s.json": scenario }, async (folder) => {
    const run = () => twoedge(folder, "simulate", "s.json", ...SMALL, "--out", "a");
    const missing = await run();
    assert.deepEqual([missing.code, missing.stderr], [3, "Cannot read lengths.csv: it does not exist\n"]);
    Deno.writeTextFileSync(`${folder}/lengths.csv`, "energy_ev,length_nm\n1,9\n5,4\n9,2\n15,long\n30,1\n");
    const wrong = await run();
    assert.equal(wrong.code, 2);
    assert.match(wrong.stderr, /current value is "long" \(at lengths\.csv:5\)\n$/);
    assert.deepEqual(namesIn(folder), ["lengths.csv", "s.json"]);
  });
});
