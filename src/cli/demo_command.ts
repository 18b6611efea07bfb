import { buildCommand } from "@stricli/core";
import { writeFiles } from "./files.ts";
import { fitFiles, fitJson } from "./fit.ts";
import { fitSvg } from "./fit_figure.ts";
import { fitText } from "./fit_text.ts";
import { type Context, NOT_TRUSTED, outFlag, workersFlag } from "./flags.ts";
import { runScenario, writeSimulation } from "./simulate_command.ts";

const DEMO_SCENARIO = new URL("../../scenarios/clean_gold_he1.json", import.meta.url);

/** `demo` */
export const demoCommand = buildCommand({
  docs: { brief: "Simulate clean gold under a helium lamp, fit it, print the answer beside the truth" },
  parameters: { flags: { out: outFlag, workers: workersFlag } },
  async func(this: Context, flags: { out?: string; workers?: number }) {
    const { fileURLToPath } = await import("node:url");
    const path = fileURLToPath(DEMO_SCENARIO);
    const simulation = await runScenario(this, path, [], flags.workers);
    if (simulation === null) return;
    const folder = flags.out ?? "out/demo";
    const written = await writeSimulation(simulation, folder);
    const run = await fitFiles([written[0]], {});
    written.push(
      ...await writeFiles(folder, [
        ["fit.json", `${JSON.stringify(fitJson(run.result), null, 2)}\n`],
        ["fit.svg", await fitSvg(run, `${simulation.result.title} (simulated)`)],
      ]),
    );
    const { truth } = simulation.result;
    this.process.stdout.write([
      simulation.result.title,
      "",
      fitText(run.result),
      "",
      `Put in: work function ${truth.workFunctionEv.toFixed(3)} eV, maximum kinetic energy ${
        truth.maxKineticEnergyEv.toFixed(3)
      } eV`,
      `Wrote ${written.join(", ")}`,
      "",
    ].join("\n"));
    if (run.result.verdict === "failed") this.exitCode = NOT_TRUSTED;
  },
});
