import assert from "node:assert/strict";
import { inFolder, namesIn, twoedge, twoedgeCommand } from "../support/twoedge.ts";

Deno.test("demo prints the work function found beside the one put in, and writes its figures", async () => {
  await inFolder({}, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "demo");
    assert.deepEqual([code, stderr], [0, ""]);
    assert.match(stdout, /^Verdict: good$/m);
    const number = (pattern: RegExp): number => Number(pattern.exec(stdout)?.[1]);
    const putIn = number(/^Put in: work function ([\d.]+) eV, maximum kinetic energy [\d.]+ eV$/m);
    assert.equal(putIn, 5.1);
    const found = number(/^ {2}work function +([\d.]+)\(\d\d\) eV$/m);
    const [, decimals, digits] = /^ {2}work function +\d\.(\d+)\((\d\d)\) eV$/m.exec(stdout) ?? [];
    const uncertainty = Number(digits) * 10 ** -decimals.length;
    // Four standard uncertainties: one false alarm in 16 000 seeds, and the seed is fixed. Half of the last digit more
    // for rounding.
    const agrees = (truth: number): boolean => Math.abs(found - truth) <= 4.1 * uncertainty;
    assert.ok(agrees(putIn), `${found} +- ${uncertainty}`);
    assert.ok(!agrees(putIn + 0.05) && !agrees(putIn - 0.05), "a work function 50 meV off must be refused");
    const names = ["fit.json", "fit.svg", "losses.svg", "result.json", "spectrum.csv", "spectrum.svg"];
    assert.deepEqual(namesIn(`${folder}/out/demo`), names);
    for (const name of names) assert.ok(stdout.includes(`out/demo/${name}`), name);
    const svg = Deno.readTextFileSync(`${folder}/out/demo/fit.svg`);
    assert.match(svg, /secondary cutoff [\d.]+\(\d\d\) eV/);
    assert.match(svg, /Fermi edge [\d.]+\(\d\d\) eV/);
    assert.match(svg, />simulated</);
    assert.doesNotMatch(svg, />measured</);
  });
});

Deno.test("demo ends with exit code 1 when interrupted", async () => {
  await inFolder({}, async (folder) => {
    const child = twoedgeCommand(folder, ["demo", "--workers", "1"]).spawn();
    await new Promise((resolve) => setTimeout(resolve, 2000));
    child.kill("SIGINT");
    const { code, stderr } = await child.output();
    assert.equal(code, 1);
    assert.match(new TextDecoder().decode(stderr), /^Stopped after \d+ histories\n$/);
  });
});
