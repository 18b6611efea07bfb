import { buildCommand } from "@stricli/core";
import { type Context, jsonFlag, NOT_TRUSTED, text } from "./flags.ts";
import { requireSweepFolder } from "./sweep_folder.ts";
import { collectSweep, statusText, sweepStatus } from "./sweep_table.ts";

const parameters = {
  positional: {
    kind: "tuple",
    parameters: [{ parse: text, brief: "Folder of a sweep", placeholder: "DIR" }],
  },
  flags: { json: jsonFlag },
} as const;

/** `sweep-status` */
export const sweepStatusCommand = buildCommand({
  docs: { brief: "Say how many points of a sweep are done, failed and not run yet" },
  parameters,
  async func(this: Context, flags: { json: boolean }, folder: string) {
    const status = await sweepStatus(folder, await requireSweepFolder(folder));
    this.process.stdout.write(flags.json ? `${JSON.stringify(status, null, 2)}\n` : statusText(status));
  },
});

/** `sweep-collect` */
export const sweepCollectCommand = buildCommand({
  docs: {
    brief: "Write table.csv and figure.svg from the points of a sweep that are there",
    fullDescription: [
      "Write table.csv and figure.svg from the points of a sweep that are there, also while it runs. Points that have not",
      "run are rows with the status missing; while there are such or failed ones, the exit code is 1.",
    ].join("\n"),
  },
  parameters,
  async func(this: Context, flags: { json: boolean }, folder: string) {
    const { status, written } = await collectSweep(folder, await requireSweepFolder(folder));
    if (status.done < status.points) this.exitCode = NOT_TRUSTED;
    this.process.stdout.write(
      flags.json
        ? `${JSON.stringify(status, null, 2)}\n`
        : `${statusText(status)}Wrote ${written.join(", ")}\n`,
    );
  },
});
