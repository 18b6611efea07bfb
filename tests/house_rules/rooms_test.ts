import assert from "node:assert/strict";
import { VERSION } from "../../src/base/mod.ts";

const ROOT = new URL("../../", import.meta.url);

/** Which rooms each room may import; a room may always import `base`. */
const MAY_IMPORT: Readonly<Record<string, readonly string[]>> = {
  base: [],
  math: [],
  rng: [],
  data: [],
  sample: ["math"],
  transport: ["math", "rng"],
  instrument: ["math", "rng"],
  spectrum: ["math"],
  light: ["data"],
  losses: ["math", "rng"],
  fit: ["math"],
  edges: ["data", "fit", "math", "rng", "spectrum"],
  compare: ["fit", "math"],
  emission: ["data"],
  series: ["data", "emission", "fit", "math"],
  lines: ["data", "fit", "light", "losses", "math", "series", "spectrum"],
  formats: [],
  scenario: ["data", "emission", "instrument", "light", "losses", "math", "sample"],
  model: ["math", "rng", "sample", "spectrum", "transport", "instrument", "scenario"],
  sweep: ["rng", "scenario"],
  run: ["data", "edges", "model", "scenario", "sweep", "transport"],
  plan: ["data", "edges", "rng", "scenario"],
  report: [],
  cli: [
    "compare",
    "data",
    "edges",
    "formats",
    "lines",
    "model",
    "plan",
    "report",
    "run",
    "scenario",
    "series",
    "sweep",
    "transport",
    "light",
  ],
};

/** Rooms that must also run in a browser page. */
const PURE = [
  "base",
  "math",
  "rng",
  "data",
  "sample",
  "transport",
  "instrument",
  "spectrum",
  "fit",
  "edges",
  "formats",
]
  .concat("scenario", "model", "sweep", "light", "losses", "emission", "series", "lines", "compare", "plan");

interface SourceFile {
  readonly room: string;
  readonly path: string;
  readonly text: string;
}

async function sourceFiles(): Promise<SourceFile[]> {
  const files: SourceFile[] = [];
  for await (const room of Deno.readDir(new URL("src/", ROOT))) {
    for await (const file of Deno.readDir(new URL(`src/${room.name}/`, ROOT))) {
      if (!file.name.endsWith(".ts")) continue;
      const path = `src/${room.name}/${file.name}`;
      files.push({ room: room.name, path, text: await Deno.readTextFile(new URL(path, ROOT)) });
    }
  }
  return files;
}

function imports(text: string): string[] {
  return [...text.matchAll(/(?:^|\n)(?:import|export)[^;]*?from\s+"([^"]+)"/g)].map((match) => match[1]);
}

Deno.test("rooms import only the rooms the table allows, through their mod.ts", async () => {
  const broken = (await sourceFiles()).flatMap(({ room, path, text }) =>
    imports(text).filter((target) => target.startsWith("../")).flatMap((target) => {
      const other = /^\.\.\/([a-z]+)\/mod\.ts$/.exec(target)?.[1];
      const allowed = other === "base" || (other !== undefined && MAY_IMPORT[room]?.includes(other));
      return allowed ? [] : [`${path} imports ${target}`];
    })
  );
  assert.deepEqual(broken, []);
});

Deno.test("the table of rooms has no cycle", () => {
  const visit = (room: string, trail: readonly string[]): void => {
    assert.ok(!trail.includes(room), `cycle: ${[...trail, room].join(" -> ")}`);
    for (const next of MAY_IMPORT[room] ?? []) visit(next, [...trail, room]);
  };
  Object.keys(MAY_IMPORT).forEach((room) => visit(room, []));
});

Deno.test("every room has a mod.ts that only re-exports and says what the room is for", async () => {
  for (const { path, text, room } of await sourceFiles()) {
    if (!path.endsWith("/mod.ts")) continue;
    assert.ok(Object.hasOwn(MAY_IMPORT, room), `${room} is not in the table`);
    assert.match(text, /@module/, path);
    assert.doesNotMatch(text, /^(export )?(function|class|const|let)\b/m, path);
  }
});

Deno.test("pure rooms call nothing of Deno, Node, the clock, the console or unseeded randomness", async () => {
  const forbidden =
    /\bDeno\.|"node:|\bprocess\.|\bconsole\.|Math\.random|Date\.now|new Date\(|performance\.now|\bfetch\(/;
  const code = (text: string): string => text.replaceAll(/^ *\/?\*.*$/gm, ""); // examples in docs may import
  const broken = (await sourceFiles()).filter(({ room, text }) =>
    PURE.includes(room) && forbidden.test(code(text))
  );
  assert.deepEqual(broken.map(({ path }) => path), []);
});

Deno.test("VERSION equals the version in deno.json", async () => {
  const config = JSON.parse(await Deno.readTextFile(new URL("deno.json", ROOT)));
  assert.equal(VERSION, config.version);
});

Deno.test("every npm dependency is pinned exactly and has its reason in the README", async () => {
  const config = JSON.parse(await Deno.readTextFile(new URL("deno.json", ROOT)));
  const readme = await Deno.readTextFile(new URL("README.md", ROOT));
  for (const target of Object.values<string>(config.imports)) {
    const [, name] = /^npm:((?:@[^/]+\/)?[^@/]+)@\d+\.\d+\.\d+(?:\/.*)?$/.exec(target) ?? [];
    assert.ok(name !== undefined, `${target} is not an exact npm version`);
    assert.ok(readme.includes(`\`${name}\``), `README gives no reason for ${name}`);
  }
});
