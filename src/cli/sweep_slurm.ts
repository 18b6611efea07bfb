import { execFile } from "node:child_process";
import { mkdir } from "node:fs/promises";
import { join, resolve } from "node:path";
import process from "node:process";
import { promisify } from "node:util";
import { cannot, InputError } from "../base/mod.ts";
import { FileError } from "./files.ts";
import { writeWhole } from "./sweep_folder.ts";

/** How a sweep is put on Slurm. */
export interface SlurmOptions {
  /** Array tasks. */
  readonly parts: number;
  /** Processors and worker threads of a task. */
  readonly workers: number;
  /** Time limit as `sbatch --time` takes it. */
  readonly time: string;
  /** Partition; the default one when not given. */
  readonly partition?: string;
  /** More arguments of `sbatch`. */
  readonly extra: readonly string[];
}

/** What was submitted. */
export interface SlurmJobs {
  /** The array. */
  readonly array: string;
  /** The job that writes the table when the array is over. */
  readonly collect: string;
}

/**
 * Submits a job array, one task for each part, and a job that collects when all tasks have ended, well or not.
 *
 * Tasks run this program with `--part I/N` on the folder, which all nodes must see under the same path. A task that is run
 * again, at the same time or later, repeats only points without a record, so `--requeue` is set.
 *
 * @param folder Folder of the sweep, already holding `sweep.json`.
 * @param options How.
 * @returns Job ids.
 * @throws {InputError} If `sbatch` is not there, not allowed, or refuses.
 */
export async function submitSweep(folder: string, options: SlurmOptions): Promise<SlurmJobs> {
  const shared = resolve(folder);
  const scripts = join(shared, "slurm");
  const { parts, workers } = options;
  const common = [
    "--parsable",
    `--time=${options.time}`,
    ...(options.partition === undefined ? [] : [`--partition=${options.partition}`]),
    ...options.extra,
  ];
  try {
    await mkdir(scripts, { recursive: true }); // Slurm does not make the folder of its logs
  } catch (error) {
    throw new FileError("write", scripts, error);
  }
  const part = join(scripts, "part.sh");
  const collect = join(scripts, "collect.sh");
  await writeWhole(
    part,
    script(["sweep", shared, "--workers", String(workers), "--part"], `"$SLURM_ARRAY_TASK_ID/${parts}"`),
  );
  await writeWhole(collect, script(["sweep-collect", shared], ""));
  const array = await sbatch([
    ...common,
    `--array=1-${parts}`,
    "--job-name=twoedge-sweep",
    "--ntasks=1",
    `--cpus-per-task=${workers}`,
    "--requeue",
    "--open-mode=append",
    `--output=${join(scripts, "%A_%a.log")}`,
    part,
  ]);
  const collecting = await sbatch([
    ...common,
    `--dependency=afterany:${array}`,
    "--job-name=twoedge-collect",
    "--ntasks=1",
    `--output=${join(scripts, "%j.log")}`,
    collect,
  ]);
  return { array, collect: collecting };
}

/** A script that runs this program as it runs now. */
function script(args: readonly string[], last: string): string {
  const program = process.versions.deno === undefined
    ? [process.execPath, process.argv[1]]
    : [process.execPath, "run", "--quiet", "--no-prompt", "--allow-read", "--allow-write", process.argv[1]];
  return `#!/bin/sh\nexec ${[...program, ...args].map(quoted).join(" ")} ${last}\n`;
}

function quoted(word: string): string {
  return `'${word.replaceAll("'", "'\\''")}'`;
}

/** Runs `sbatch --parsable`, which prints the job id, and a cluster name after a semicolon where there are several. */
async function sbatch(args: readonly string[]): Promise<string> {
  try {
    const { stdout } = await promisify(execFile)("sbatch", [...args]);
    return stdout.trim().split(";")[0];
  } catch (error) {
    const { name, code, stderr, message } = error as Error & { code?: unknown; stderr?: string };
    const rule = name === "NotCapable"
      ? "the program must be allowed to run it: start it with deno run --allow-run=sbatch --allow-env and its other permissions"
      : code === "ENOENT"
      ? "it must be on the PATH"
      : "Slurm must accept the job";
    throw new InputError([{
      place: "--on slurm",
      message: cannot("run sbatch", rule, (stderr || message).trim()),
    }]);
  }
}
