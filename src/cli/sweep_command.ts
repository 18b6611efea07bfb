import { buildCommand } from "@stricli/core";
import process from "node:process";
import { cannot, InputError } from "../base/mod.ts";
import { runSweep } from "../run/mod.ts";
import { partRange, type PointRecord, sweepPoints } from "../sweep/mod.ts";
import { stem } from "./files.ts";
import { type Context, count, NOT_TRUSTED, outFlag, text, workersFlag } from "./flags.ts";
import { progressLine } from "./progress.ts";
import { spectrumFileText } from "./simulate.ts";
import { estimateSweep, estimateText } from "./sweep_estimate.ts";
import {
  isFolder,
  type Part,
  readRecords,
  readSweepFile,
  readSweepFolder,
  RecordWriter,
  requireSweepFolder,
  spectrumPath,
  type SweepSource,
  writeSweepFolder,
  writeWhole,
} from "./sweep_folder.ts";
import { submitSweep } from "./sweep_slurm.ts";
import { collectSweep, statusText } from "./sweep_table.ts";

/** Array tasks on Slurm where `--chunk` does not say: below the usual limit of an array, 1001. */
const MOST_PARTS = 500;

type SweepFlags = {
  out?: string;
  workers?: number;
  part?: Part;
  resume: boolean;
  dryRun: boolean;
  failFast: boolean;
  on?: "slurm";
  chunk?: number;
  time: string;
  partition?: string;
  sbatchArg?: readonly string[];
};

/** Parses `I/N`. */
function partOf(text: string): Part {
  const [part, of, ...rest] = text.split("/").map(count);
  if (of === undefined || rest.length > 0 || part > of) {
    throw new SyntaxError(`must be I/N with 1 <= I <= N, not ${JSON.stringify(text)}`);
  }
  return { part, of };
}

/** `sweep` */
export const sweepCommand = buildCommand({
  docs: {
    brief: "Simulate and fit many scenarios: parts/*.ndjson, table.csv, figure.svg",
    fullDescription: [
      "Simulate the points of a sweep file and write one record for each into parts/ of the folder, then table.csv (one row",
      "a point, failures with their reasons) and figure.svg. Ctrl-C finishes the points in flight; a killed sweep loses no",
      "more than these. Finished points are never run again, whoever runs the rest: several processes and machines may work",
      "in one folder. Instead of the file, the folder of an earlier sweep may be given.",
      "",
      "--on slurm submits the parts as a job array, and a job that writes the table. It needs permission to run sbatch.",
      "",
      "Examples:",
      "  twoedge sweep scenarios/sweeps/bias.json --dry-run",
      "  twoedge sweep scenarios/sweeps/bias.json --out out/bias",
      "  twoedge sweep scenarios/sweeps/bias.json --out out/bias --resume",
      "  twoedge sweep scenarios/sweeps/bias.json --out out/bias --on slurm --chunk 20 --time 01:00:00",
    ].join("\n"),
  },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [{ parse: text, brief: "Sweep file (JSON), or folder of a sweep", placeholder: "FILE" }],
    },
    flags: {
      out: { ...outFlag, brief: "Folder to write into (default: out/ and the sweep's name)" },
      workers: {
        ...workersFlag,
        brief: "Worker threads, each with its own points (default: one per processor; with --on slurm, 1)",
      },
      part: {
        kind: "parsed",
        parse: partOf,
        brief: "Run only part I of N",
        placeholder: "I/N",
        optional: true,
      },
      resume: {
        kind: "boolean",
        brief: "Go on in a folder that holds points; the sweep may have changed",
        default: false,
        withNegated: false,
      },
      dryRun: {
        kind: "boolean",
        brief: "Print number of points, estimated time and disk; run nothing",
        default: false,
        withNegated: false,
      },
      failFast: {
        kind: "boolean",
        brief: "Stop when a point fails",
        default: false,
        withNegated: false,
      },
      on: {
        kind: "enum",
        values: ["slurm"],
        brief: "Submit to a cluster instead of running here",
        optional: true,
      },
      chunk: {
        kind: "parsed",
        parse: count,
        brief: `With --on slurm, points of a task (default: as many as make ${MOST_PARTS} tasks)`,
        placeholder: "N",
        optional: true,
      },
      time: {
        kind: "parsed",
        parse: text,
        brief: "With --on slurm, time limit of a task",
        placeholder: "HH:MM:SS",
        default: "01:00:00",
      },
      partition: {
        kind: "parsed",
        parse: text,
        brief: "With --on slurm, partition",
        placeholder: "P",
        optional: true,
      },
      sbatchArg: {
        kind: "parsed",
        parse: text,
        brief: "With --on slurm, another argument of sbatch, as in --sbatch-arg=--account=me; repeatable",
        placeholder: "X",
        variadic: true,
        optional: true,
      },
    },
  },
  async func(this: Context, flags: SweepFlags, path: string) {
    const fromFolder = await isFolder(path);
    const source = fromFolder ? await requireSweepFolder(path) : await readSweepFile(path);
    const folder = flags.out ?? (fromFolder ? path : `out/${stem(path)}`);
    const { stdout, stderr } = this.process;
    if (flags.dryRun) {
      const estimate = await estimateSweep(source, () => performance.now());
      stdout.write(estimateText(source.sweep.title, estimate, flags.workers ?? processors()));
      return;
    }
    await prepareFolder(folder, source, {
      mayHoldPoints: flags.resume || flags.part !== undefined || fromFolder,
      mayChange: flags.resume,
    });
    if (flags.on === "slurm") return await submit(this, folder, source, flags);
    const run = await runPart(this, folder, source, flags);
    const goOn = `twoedge sweep ${folder} --resume`;
    if (run.stopped || run.failed > 0) this.exitCode = NOT_TRUSTED;
    if (run.stopped) stderr.write(`Stopped after ${run.finished} points; go on with: ${goOn}\n`);
    if (flags.part !== undefined) {
      stdout.write(
        `Part ${flags.part.part}/${flags.part.of}: ${run.finished} points run, ${run.failed} failed\n`,
      );
      return;
    }
    const { status, written } = await collectSweep(folder, source);
    if (status.failed > 0) this.exitCode = NOT_TRUSTED;
    stdout.write(`${statusText(status)}Ran ${run.finished} of them now. Wrote ${written.join(", ")}\n`);
  },
});

function processors(): number {
  return Math.max(1, navigator.hardwareConcurrency);
}

/** Puts the sweep into the folder, or checks that it is there. */
async function prepareFolder(
  folder: string,
  source: SweepSource,
  { mayHoldPoints, mayChange }: { readonly mayHoldPoints: boolean; readonly mayChange: boolean },
): Promise<void> {
  const present = await readSweepFolder(folder);
  const refuse = (rule: string, value: string): never => {
    throw new InputError([{ place: folder, message: cannot("run sweep", rule, value) }]);
  };
  if (present !== null && present.key !== source.key && !mayChange) {
    refuse(
      "the folder must hold the same sweep, or --resume be given to change it",
      `another sweep, ${present.sweep.title}`,
    );
  }
  if (present !== null && !mayHoldPoints) {
    for await (const _ of readRecords(folder)) {
      refuse("the folder must be new, or --resume be given to go on", "a folder with points");
    }
  }
  if (present?.key !== source.key) await writeSweepFolder(folder, source);
}

/** Runs what is not done yet of a part, or of all. */
async function runPart(
  context: Context,
  folder: string,
  source: SweepSource,
  flags: SweepFlags,
): Promise<{ readonly finished: number; readonly failed: number; readonly stopped: boolean }> {
  const { sweep, load, key } = source;
  const part = flags.part ?? { part: 1, of: 1 };
  const known = new Map<string, string>(); // reason of a failed point, empty for a done one
  for await (const record of readRecords(folder, { ...part, key })) {
    if (record && known.get(record.id) !== "") known.set(record.id, record.reason);
  }
  const range = partRange(part.part, part.of, sweepPoints(sweep).count);
  const stop = new AbortController();
  const onSignal = (): void => {
    context.process.stderr.write("\nFinishing the points in flight; once more to leave them\n");
    stop.abort();
  };
  process.once("SIGINT", onSignal);
  process.once("SIGTERM", onSignal);
  const progress = progressLine("Sweeping", context.process.stderr, () => performance.now(), "points");
  let skipped = 0;
  let finished = 0;
  let failed = 0;
  try {
    await using writer = new RecordWriter(folder, key, part);
    const results = runSweep(sweep, async (overrides) => (await load(overrides)).resolved, {
      ...range,
      workers: flags.workers ?? processors(),
      signal: stop.signal,
      isFinished: (id) => {
        const done = known.get(id) === "";
        if (done) skipped++;
        return done;
      },
    });
    for await (const { record, resolved, spectrum } of results) {
      if (resolved && spectrum && record.scenarioHash) {
        const contents = spectrumFileText(resolved, record.scenarioHash, spectrum);
        await writeWhole(spectrumPath(folder, record.id), contents);
      }
      if (isNews(record, known)) await writer.write(record);
      finished++;
      if (record.status === "failed") failed++;
      if (record.status === "failed" && flags.failFast) {
        stop.abort();
        context.process.stderr.write(`A point failed: ${record.reason}\n`);
      }
      progress.update(finished, range.to - range.from - skipped);
    }
  } finally {
    progress.end();
    process.off("SIGINT", onSignal);
    process.off("SIGTERM", onSignal);
  }
  return { finished, failed, stopped: stop.signal.aborted };
}

/** A point that fails for the same reason again needs no second record. */
function isNews(record: PointRecord, known: ReadonlyMap<string, string>): boolean {
  return record.status === "done" || known.get(record.id) !== record.reason;
}

async function submit(
  context: Context,
  folder: string,
  source: SweepSource,
  flags: SweepFlags,
): Promise<void> {
  const points = sweepPoints(source.sweep).count;
  const parts = Math.ceil(points / (flags.chunk ?? Math.ceil(points / MOST_PARTS)));
  const { partition, time, workers = 1, sbatchArg: extra = [] } = flags;
  const jobs = await submitSweep(folder, { parts, workers, time, extra, ...(partition && { partition }) });
  context.process.stdout.write([
    `${source.sweep.title}: ${points} points in ${parts} tasks`,
    `  job array ${jobs.array}, table by job ${jobs.collect}`,
    `Watch:   squeue -j ${jobs.array},${jobs.collect}`,
    `         twoedge sweep-status ${folder}`,
    `Table:   twoedge sweep-collect ${folder}   (at any time)`,
    `Go on:   twoedge sweep ${folder} --on slurm   (runs what is missing)`,
    `Cancel:  scancel ${jobs.array} ${jobs.collect}`,
    "",
  ].join("\n"));
}
