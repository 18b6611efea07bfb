import assert from "node:assert/strict";
import { GOLD, inFolder, twoedge } from "../support/twoedge.ts";

const COMMANDS = ["simulate", "fit", "validate", "materials", "demo"];

Deno.test("--help names every command with its arguments", async () => {
  await inFolder({}, async (folder) => {
    const help = await twoedge(folder, "--help");
    assert.deepEqual([help.code, help.stderr], [0, ""]);
    for (const command of COMMANDS) assert.match(help.stdout, new RegExp(`^ {2}twoedge ${command} `, "m"));
    assert.deepEqual(await twoedge(folder), help);
  });
});

/** Options that the documentation of each command promises. */
const OPTIONS: Readonly<Record<string, readonly string[]>> = {
  simulate: ["--out", "--seed", "--histories", "--workers", "--set", "--json", "SCENARIO"],
  fit: ["--photon-energy", "--bias", "--axis", "--region", "--columns", "--out", "--json", "FILE"],
  validate: ["--json", "SCENARIO"],
  materials: ["--json", "NAME"],
  demo: ["--out", "--workers"],
};
for (const command of COMMANDS) {
  Deno.test(`${command} --help says what the command does and explains every option`, async () => {
    await inFolder({}, async (folder) => {
      const { code, stdout, stderr } = await twoedge(folder, command, "--help");
      assert.deepEqual([code, stderr], [0, ""]);
      assert.match(stdout, new RegExp(`^USAGE\n {2}twoedge ${command} `));
      for (const option of OPTIONS[command]) {
        assert.match(stdout, new RegExp(`^ +\\[?${option}\\b.*  \\S`, "m"), option);
      }
    });
  });
}

Deno.test("--version prints the version in deno.json", async () => {
  const config = JSON.parse(Deno.readTextFileSync(new URL("../../deno.json", import.meta.url)));
  await inFolder({}, async (folder) => {
    assert.deepEqual(await twoedge(folder, "--version"), {
      code: 0,
      stdout: `${config.version}\n`,
      stderr: "",
    });
  });
});

/** Wrong usage, and what the message must say. */
const USAGE: readonly (readonly [readonly string[], RegExp])[] = [
  [["simulat"], /`simulat`, did you mean `simulate`\?/],
  [["nothing-like-it"], /`nothing-like-it`/],
  [["simulate"], /Expected argument for SCENARIO/],
  [["simulate", GOLD, "again"], /again|arguments/],
  [["simulate", GOLD, "--sed", "1"], /--sed, did you mean --seed\?/],
  [["simulate", GOLD, "--seed"], /Expected input for flag --seed/],
  [["fit"], /at least 1 argument\(s\) for FILE/],
  [["fit", "a.csv", "--axis", "sideways"], /"sideways" to be one of \(kinetic\|binding\)/],
  [["fit", "a.csv", "--columns", "energy"], /"energy" for columns: must be two column names ENERGY,COUNTS/],
  [["fit", "a.csv", "--photon-energy", "21,2"], /"21,2" for photon-energy: must be a decimal number/],
  [
    ["fit", "a.csv", "--photon-energy", "0"],
    /--photon-energy must be in 1\.\.20000 eV: current value is 0 eV/,
  ],
  [["fit", "a.csv", "--bias", ""], /"" for bias: must be a decimal number/],
  [["fit", "a.csv", "--bias", "NaN"], /"NaN" for bias: must be a decimal number/],
  [["fit", "a.csv", "--bias", "0x9"], /"0x9" for bias: must be a decimal number/],
  [["fit", "a.csv", "--bias", "-1e4"], /--bias must be in -1000\.\.1000 V: current value is -10000 V/],
  [["fit", "a.csv", "--temperature", "-1"], /--temperature must be in 0\.\.3000 K: current value is -1 K/],
  [["fit", "a.csv", "--acceptance", "100"], /--acceptance must be in 0\.\.89 degrees/],
  [
    ["materials", "Pb"],
    /material must be one of Au, Ag, .*, ITO \(did you mean Pt\?\): current value is "Pb"/,
  ],
  [["demo", "--workers", "two"], /"two" for workers: must be a whole number >= 1/],
];
for (const [args, message] of USAGE) {
  const shown = args.map((arg) => (arg === GOLD ? "SCENARIO" : JSON.stringify(arg))).join(" ");
  Deno.test(`twoedge ${shown} ends with exit code 2 and prints nothing but its message`, async () => {
    await inFolder({}, async (folder) => {
      const { code, stdout, stderr } = await twoedge(folder, ...args);
      assert.deepEqual([code, stdout], [2, ""]);
      assert.match(stderr, message);
      assert.doesNotMatch(stderr, /defect|\n {4}at /);
    });
  });
}

Deno.test("validate says that a good scenario is valid, and its hash", async () => {
  await inFolder({}, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "validate", GOLD);
    assert.deepEqual([code, stderr], [0, ""]);
    assert.match(stdout, /clean_gold_he1\.json is valid, scenario [0-9a-f]{16}\n$/);
    const hash = /[0-9a-f]{16}/.exec(stdout.slice(stdout.indexOf("scenario ")))?.[0];
    const json = await twoedge(folder, "validate", GOLD, "--json");
    assert.deepEqual(JSON.parse(json.stdout), { valid: true, scenarioHash: hash, warnings: [] });
    const other = await twoedge(folder, "validate", GOLD, "--json", "--set", "sample.temperatureK=301");
    assert.notEqual(JSON.parse(other.stdout).scenarioHash, hash);
  });
});

Deno.test("validate warns of a cutoff below the analyzer's own and of a window that ends too early", async () => {
  // Without bias the cutoff is recorded at W - W_A: 5.1 - 5.3 eV.
  const set = ["biasV=0", "analyzer.workFunctionEv=5.3", "acquisition.startEv=0.1", "acquisition.endEv=10"];
  await inFolder({}, async (folder) => {
    const args = set.flatMap((override) => ["--set", override]);
    const { code, stdout } = await twoedge(folder, "validate", GOLD, ...args);
    assert.equal(code, 0);
    assert.match(stdout, /^Warning: the cutoff would be recorded at -0\.200 eV, below .* \(at \/biasV\)$/m);
    assert.match(stdout, /^Warning: the window ends at 10\.000 eV, before .* \(at \/acquisition\/endEv\)$/m);
    assert.equal(
      JSON.parse((await twoedge(folder, "validate", GOLD, "--json", ...args)).stdout).warnings.length,
      2,
    );
  });
});

Deno.test("materials lists every number with its unit, how sure it is, and its source", async () => {
  await inFolder({}, async (folder) => {
    const names = await twoedge(folder, "materials");
    assert.equal(names.code, 0);
    assert.match(names.stdout, /^Au +gold$/m);
    const { stdout } = await twoedge(folder, "materials", "--json");
    const listed: { id: string; values: Record<string, unknown>[] }[] = JSON.parse(stdout);
    assert.deepEqual(listed.map(({ id }) => id), names.stdout.match(/^\w+/gm));
    for (const { id, values } of listed) {
      assert.ok(values.length > 10, id);
      for (const { quantity, value, source, confidence } of values) {
        // A refractive index is written as a complex number.
        assert.ok(Number.isFinite(value) || /^\d\S* \+ \d\S* i$/.test(String(value)), `${id} ${quantity}`);
        assert.ok(typeof source === "string" && source.length > 10, `${id} ${quantity}`);
        assert.match(String(confidence), /^\w/, `${id} ${quantity}`);
      }
    }
  });
});

Deno.test("materials NAME prints one number a line", async () => {
  await inFolder({}, async (folder) => {
    const { code, stdout } = await twoedge(folder, "materials", "Au");
    assert.equal(code, 0);
    // H. Michaelson, J. Appl. Phys. 48, 4729 (1977): polycrystalline gold 5.1 eV.
    assert.match(stdout, /^work function, polycrystalline: 5\.1 eV \[\S+\] H\. Michaelson, /m);
    const [gold] = JSON.parse((await twoedge(folder, "materials", "Au", "--json")).stdout);
    assert.equal(stdout.trimEnd().split("\n").length, gold.values.length);
    assert.ok(stdout.trimEnd().split("\n").every((line) => /^.+: \S+ .*\[[a-z-]+\] .+$/.test(line)));
    // A ratio has no unit to print.
    assert.doesNotMatch(stdout, /: .+ 1 \[/);
  });
});
