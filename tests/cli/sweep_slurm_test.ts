import assert from "node:assert/strict";
import { fileURLToPath } from "node:url";
import { QUICK_GOLD, sweepText } from "../support/sweep_text.ts";
import { inFolder, namesIn, twoedge } from "../support/twoedge.ts";

const MAIN = fileURLToPath(new URL("../../src/cli/main.ts", import.meta.url));

/** A stand-in for Slurm that notes its arguments and runs every task of the array, the second one twice, then the rest. */
const SBATCH = `#!/bin/sh
for word in "$@"; do echo "$word" >> "$SBATCH_NOTES"; script=$word; done
echo -- >> "$SBATCH_NOTES"
case "$*" in
  *--array=1-2*) for id in 1 2 2; do SLURM_ARRAY_TASK_ID=$id sh "$script" >> "$SBATCH_NOTES.log" 2>&1; done; echo 71 ;;
  *--dependency*) sh "$script" >> "$SBATCH_NOTES.log" 2>&1; echo "72;cluster" ;;
  *) echo "Invalid job array specification" >&2; exit 1 ;;
esac
`;

/** Runs the program with a stand-in on the path. */
async function withSlurm(
  folder: string,
  args: readonly string[],
  permissions = ["--allow-env", "--allow-run=sbatch"],
) {
  Deno.mkdirSync(`${folder}/bin`, { recursive: true });
  Deno.writeTextFileSync(`${folder}/bin/sbatch`, SBATCH, { mode: 0o755 });
  const { code, stdout, stderr } = await new Deno.Command("deno", {
    args: ["run", "--quiet", "--no-prompt", "--allow-read", "--allow-write", ...permissions, MAIN, ...args],
    cwd: folder,
    env: { PATH: `${folder}/bin:${Deno.env.get("PATH")}`, SBATCH_NOTES: `${folder}/notes` },
  }).output();
  const text = (bytes: Uint8Array) => new TextDecoder().decode(bytes);
  return { code, stdout: text(stdout), stderr: text(stderr) };
}

const FILES = { "gold.json": QUICK_GOLD, "sweep.json": sweepText() };

Deno.test("sweep --on slurm submits an array of parts and a job that collects, with the same table as here", async () => {
  await inFolder(FILES, async (folder) => {
    const out = "it's out"; // a quote and a space: the scripts must quote
    const { code, stdout, stderr } = await withSlurm(folder, [
      ...["sweep", "sweep.json", "--out", out, "--on", "slurm", "--chunk", "2", "--time", "00:10:00"],
      ...["--partition", "short", "--sbatch-arg=--account=me", "--sbatch-arg=--mem=1G"],
    ]);
    assert.deepEqual([code, stderr], [0, ""]);
    assert.match(stdout, /^two by two: 4 points in 2 tasks\n {2}job array 71, table by job 72\n/);
    assert.match(stdout, /squeue -j 71,72\n/);
    const [array, collect] = Deno.readTextFileSync(`${folder}/notes`).split("--\n").map((one) =>
      one.trim().split("\n")
    );
    for (const job of [array, collect]) {
      for (const word of ["--parsable", "--time=00:10:00", "--partition=short", "--account=me", "--mem=1G"]) {
        assert.ok(job.includes(word), word);
      }
    }
    assert.ok(array.includes("--requeue") && array.includes("--cpus-per-task=1"));
    assert.ok(collect.includes("--dependency=afterany:71"), "also when tasks failed");
    const log = Deno.readTextFileSync(`${folder}/notes.log`);
    assert.match(
      log,
      /Part 1\/2: 2 points run, 0 failed\nPart 2\/2: 2 points run, 0 failed\nPart 2\/2: 0 points run/,
    );
    await twoedge(folder, "sweep", "sweep.json", "--out", "here");
    const table = (where: string) => Deno.readTextFileSync(`${folder}/${where}/table.csv`);
    assert.equal(table(out), table("here"));
    const status = await twoedge(folder, "sweep-status", out);
    assert.equal(status.stdout, "two by two: 4 points, 4 done, 0 failed, 0 not run\n");
  });
});

Deno.test("sweep --on slurm says what Slurm said when it refuses, and what is missing when it may not ask", async () => {
  await inFolder(FILES, async (folder) => {
    const args = ["sweep", "sweep.json", "--out", "a", "--on", "slurm", "--chunk", "1"];
    const refused = await withSlurm(folder, args);
    assert.equal(refused.code, 2);
    assert.match(
      refused.stderr,
      /Slurm must accept the job: current value is "Invalid job array specification"/,
    );
    const forbidden = await withSlurm(folder, args, []);
    assert.equal(forbidden.code, 2);
    assert.match(forbidden.stderr, /start it with deno run --allow-run=sbatch --allow-env/);
    assert.deepEqual(namesIn(`${folder}/a`), ["slurm", "sweep.json"]);
  });
});
