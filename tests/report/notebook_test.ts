import assert from "node:assert/strict";
import { fileURLToPath } from "node:url";

const FOLDER = new URL("../../scenarios/notebook/", import.meta.url);

interface Cell {
  readonly cell_type: string;
  readonly source: string | readonly string[];
}

function codeCells(name: string): string[] {
  const { cells, nbformat }: { cells: Cell[]; nbformat: number } = JSON.parse(
    Deno.readTextFileSync(new URL(name, FOLDER)),
  );
  assert.equal(nbformat, 4);
  return cells.filter(({ cell_type }) => cell_type === "code").map(({ source }) =>
    [source].flat().join("").trimEnd()
  );
}

/** A last line that is an expression is what a kernel shows. */
function asModule(cells: readonly string[]): string {
  const shown = cells.map((cell) => {
    const lines = cell.split("\n");
    const last = lines.at(-1)!;
    if (!/^(const|import|\})/.test(last)) lines[lines.length - 1] = `shown.push(${last.replace(/;$/, "")});`;
    return lines.join("\n");
  });
  return [
    "const shown: unknown[] = [];",
    ...shown,
    'const display = Symbol.for("Jupyter.display");',
    "const bundles = await Promise.all(shown.map((value) =>",
    '  typeof value === "object" && value !== null && display in value',
    "    ? (value as Record<symbol, () => unknown>)[display]()",
    "    : value",
    "));",
    "console.log(JSON.stringify(bundles));",
  ].join("\n");
}

async function runNotebook(
  cells: readonly string[],
): Promise<{ code: number; stdout: string; stderr: string }> {
  const program = new Deno.Command("deno", {
    args: ["run", "--quiet", "--no-prompt", "--no-check", "--ext=ts", "--allow-read", "-"],
    cwd: fileURLToPath(FOLDER),
    stdin: "piped",
    stdout: "piped",
    stderr: "piped",
  }).spawn();
  const input = program.stdin.getWriter();
  await input.write(new TextEncoder().encode(asModule(cells)));
  await input.close();
  const { code, stdout, stderr } = await program.output();
  return { code, stdout: new TextDecoder().decode(stdout), stderr: new TextDecoder().decode(stderr) };
}

const CELLS = codeCells("two_edges.ipynb");

Deno.test("the example notebook runs cell by cell, shows a spectrum and a fit, and finds what was put in", async () => {
  const { code, stdout, stderr } = await runNotebook(CELLS);
  assert.equal(code, 0, stderr);
  const [spectrum, fit, away] = JSON.parse(stdout);
  for (const bundle of [spectrum, fit]) {
    assert.deepEqual(Object.keys(bundle), ["text/plain", "text/html", "image/svg+xml"]);
    assert.match(bundle["image/svg+xml"], /^<svg [\s\S]*Kinetic energy/);
    assert.match(bundle["text/html"], /^<table><tr><th>.*<\/table><svg /s);
  }
  assert.match(fit["text/plain"], /^verdict: good\nwork function: 5\.\d+\(\d\d\) eV\n/);
  // Fixed seed; 4 standard uncertainties would be passed once in 16 000 seeds.
  assert.ok(Math.abs(away) < 4, `${away}`);
});

Deno.test("the example notebook stops with an error when a cell is wrong", async () => {
  const { code } = await runNotebook([...CELLS.slice(0, 1), "parseScenario('{', 'broken.json')"]);
  assert.notEqual(code, 0);
});
