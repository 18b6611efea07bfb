import { fileURLToPath } from "node:url";

const ROOT = new URL("../../", import.meta.url);

/** The scenario of the demo. */
export const GOLD = fileURLToPath(new URL("scenarios/clean_gold_he1.json", ROOT));

/** The program with the permissions that its users give it, as arguments of `deno`. */
const PROGRAM = [
  "run",
  "--quiet",
  "--no-prompt",
  "--allow-read",
  "--allow-write",
  fileURLToPath(new URL("src/cli/main.ts", ROOT)),
];

/** What a run of the program gave. */
export interface Outcome {
  readonly code: number;
  readonly stdout: string;
  readonly stderr: string;
}

/** The program about to run in a folder. */
export function twoedgeCommand(folder: string, args: readonly string[]): Deno.Command {
  return new Deno.Command("deno", {
    args: [...PROGRAM, ...args],
    cwd: folder,
    stdin: "null",
    stdout: "piped",
    stderr: "piped",
  });
}

/** Runs the program in a folder to its end. */
export async function twoedge(folder: string, ...args: readonly string[]): Promise<Outcome> {
  const { code, stdout, stderr } = await twoedgeCommand(folder, args).output();
  const text = (bytes: Uint8Array) => new TextDecoder().decode(bytes);
  return { code, stdout: text(stdout), stderr: text(stderr) };
}

/** Gives a new empty folder, with the files asked for, and removes it afterwards. */
export async function inFolder<T>(
  files: Readonly<Record<string, string | Uint8Array>>,
  use: (folder: string) => Promise<T>,
): Promise<T> {
  const folder = await Deno.makeTempDir();
  try {
    for (const [name, contents] of Object.entries(files)) {
      const bytes = typeof contents === "string" ? new TextEncoder().encode(contents) : contents;
      await Deno.writeFile(`${folder}/${name}`, bytes);
    }
    return await use(folder);
  } finally {
    await Deno.remove(folder, { recursive: true });
  }
}

/** Names in a folder, sorted; hidden ones too. */
export function namesIn(folder: string): string[] {
  return [...Deno.readDirSync(folder)].map(({ name }) => name).sort();
}

/** What a simulation of gold wrote and printed. */
export interface GoldRun {
  readonly csv: string;
  readonly json: string;
  readonly svg: string;
  readonly stdout: string;
  readonly names: readonly string[];
}

let gold: Promise<GoldRun> | undefined;

/**
 * Gold simulated once a test file: fewer photons than in the demo, so that the noise of the simulation stays below that
 * of the counting. The seed is fixed: a check that passes goes on passing.
 */
export function goldRun(): Promise<GoldRun> {
  return gold ??= inFolder({}, async (folder) => {
    const { code, stdout, stderr } = await twoedge(
      folder,
      ...["simulate", GOLD, "--out", "gold", "--json", "--workers", "1"],
      ...["--histories", "2097152", "--seed", "3", "--set", "light.photonFluxPerS=2e9"],
    );
    if (code !== 0) throw new Error(stderr);
    const read = (name: string) => Deno.readTextFile(`${folder}/gold/${name}`);
    return {
      csv: await read("spectrum.csv"),
      json: await read("result.json"),
      svg: await read("spectrum.svg"),
      stdout,
      names: namesIn(`${folder}/gold`),
    };
  });
}

/** A spectrum file taken apart: its metadata, and its columns by name. */
export interface CsvParts {
  readonly metadata: Readonly<Record<string, string>>;
  readonly columns: Readonly<Record<string, number[]>>;
}

/** Takes a file apart without our own reader. */
export function csvParts(csv: string): CsvParts {
  const lines = csv.trimEnd().split("\n");
  const table = lines.filter((line) => !line.startsWith("#")).map((line) => line.split(","));
  return {
    metadata: Object.fromEntries(
      lines.filter((line) => line.startsWith("# ")).map((line) => line.slice(2).split(/: (.*)/, 2)),
    ),
    columns: Object.fromEntries(
      table[0].map((name, i) => [name, table.slice(1).map((row) => Number(row[i]))]),
    ),
  };
}

/** Puts a file together. */
export function csvText({ metadata, columns }: CsvParts): string {
  const lists = Object.values(columns);
  return [
    ...Object.entries(metadata).map(([key, value]) => `# ${key}: ${value}`),
    Object.keys(columns).join(","),
    ...lists[0].map((_, i) => lists.map((list) => list[i]).join(",")),
    "",
  ].join("\n");
}
