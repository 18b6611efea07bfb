import { buildCommand } from "@stricli/core";
import { cannot, InputError } from "../base/mod.ts";
import { cellCurve, type CellSettings, collectingAll, noisyCurrents, pairEngineData } from "../model/mod.ts";
import { type FigureSeries, renderSvg, seriesFigure } from "../report/mod.ts";
import { batchesFor, runHistories } from "../run/mod.ts";
import { stem, writeFiles } from "./files.ts";
import {
  type Context,
  decimal,
  jsonFlag,
  optionalNumber,
  outFlag,
  scenarioArgument,
  setFlag,
  workersFlag,
} from "./flags.ts";
import { loadScenario } from "./simulate.ts";

type CellFlags = {
  collector: number;
  from: number;
  to: number;
  step: number;
  photonEnergies?: readonly number[];
  back?: number;
  dark?: number;
  noise?: number;
  out?: string;
  set?: readonly string[];
  workers?: number;
  json: boolean;
};

const MOST_POINTS = 10_000;

function numberList(text: string): readonly number[] {
  return text.split(",").map((part) => decimal(part.trim()));
}

const needed = (brief: string, placeholder: string) =>
  ({ kind: "parsed", parse: decimal, brief, placeholder }) as const;

/** `cell` */
export const cellCommand = buildCommand({
  docs: {
    brief: "Simulate current against retarding voltage in a cell, for stopping potentials and the yield",
    fullDescription: [
      "Simulate current against retarding voltage between the sample of a scenario and a collector around it, and write",
      "iv.csv (which `series stopping` fits) and iv.svg. The stopping potential belongs to the collector's work function,",
      "threshold and saturation to the sample's.",
      "",
      "Example:",
      "  twoedge cell scenarios/clean_gold_he1.json --collector 4.5 --from -1 --to 5 --step 0.05 \\",
      "    --photon-energies 7,8,9",
    ].join("\n"),
  },
  parameters: {
    positional: { kind: "tuple", parameters: [scenarioArgument] },
    flags: {
      collector: needed("Work function of the collector, eV", "EV"),
      from: needed("First retarding voltage, V; positive holds electrons back", "V"),
      to: needed("Last retarding voltage, V", "V"),
      step: needed("Step, V", "V"),
      photonEnergies: {
        kind: "parsed",
        parse: numberList,
        brief: "Photon energies instead of the scenario's light, eV, separated by commas",
        placeholder: "LIST",
        optional: true,
      },
      back: optionalNumber("Back-current of the collector as a share of saturation (default: 0)", "SHARE"),
      dark: optionalNumber("Dark current, A (default: 0)", "A"),
      noise: optionalNumber("Standard uncertainty of a current, A (default: 0.1 % of saturation)", "A"),
      out: { ...outFlag, brief: "Folder to write into (default: out/ and the scenario's name and _cell)" },
      set: setFlag,
      workers: workersFlag,
      json: jsonFlag,
    },
  },
  async func(this: Context, flags: CellFlags, path: string) {
    const voltagesV = voltages(flags);
    const cell: CellSettings = {
      collectorWorkFunctionEv: flags.collector,
      voltagesV,
      backShare: flags.back ?? 0,
      darkCurrentA: flags.dark ?? 0,
    };
    const base = await loadScenario(path, flags.set ?? []);
    const lights = flags.photonEnergies?.map((centerEv) => {
      const { photonFluxPerS, polarization } = base.scenario.light;
      return [`light=${JSON.stringify({ kind: "band", centerEv, fwhmEv: 0, photonFluxPerS, polarization })}`];
    }) ?? [[]];
    const rows: string[] = [];
    const curves: FigureSeries[] = [];
    const answers = [];
    for (const light of lights) {
      const { resolved } = light.length === 0
        ? base
        : await loadScenario(path, [...(flags.set ?? []), ...light]);
      if (resolved.fast !== null) {
        throw new InputError([{
          place: "/light",
          message: cannot(
            "simulate a retarding cell",
            "photon energies must be <= 60 eV",
            resolved.photonEnergyEv,
          ),
        }]);
      }
      const collecting = collectingAll(resolved);
      const engine = pairEngineData(collecting);
      const tally = await runHistories(engine, resolved.seed, batchesFor(resolved.histories), {
        workers: flags.workers ?? Math.max(1, navigator.hardwareConcurrency),
      });
      const curve = cellCurve(collecting, engine, tally, cell);
      const noiseA = flags.noise ?? 1e-3 * curve.saturatedA;
      const measured = noisyCurrents(curve.currentsA, noiseA, resolved.seed, answers.length);
      measured.forEach((current, i) =>
        rows.push(`${resolved.photonEnergyEv},${voltagesV[i]},${current},${noiseA}`)
      );
      curves.push({
        label: `h\u03bd = ${resolved.photonEnergyEv.toFixed(2)} eV`,
        x: voltagesV,
        y: measured.map((current) => current * 1e12),
        yUncertainties: null,
        mark: "line",
      });
      answers.push({
        photonEnergyEv: resolved.photonEnergyEv,
        yieldPerAbsorbedPhoton: curve.yieldPerPhoton,
        saturatedA: curve.saturatedA,
        stoppingPotentialV: curve.stoppingV,
        stoppingPotentialBelongsTo: "collector",
        emitterWorkFunctionEv: resolved.workFunctionEv,
      });
    }
    const folder = flags.out ?? `out/${stem(path)}_cell`;
    const text = [
      `# temperature_k: ${base.resolved.temperatureK}`,
      "# geometry: sphere",
      `# dark_current_a: ${cell.darkCurrentA}`,
      `# contact_potential_v: ${
        Number((cell.collectorWorkFunctionEv - base.resolved.workFunctionEv).toFixed(6))
      }`,
      "# contact_potential_uncertainty_v: 0.01",
      "photon_energy_ev,retarding_v,current_a,current_uncertainty_a",
      ...rows,
      "",
    ].join("\n");
    const figure = await renderSvg(seriesFigure({
      title: `${base.resolved.title}: retarding cell`,
      subtitle: [`simulated, collector work function ${cell.collectorWorkFunctionEv} eV`],
      xTitle: "Retarding voltage / V",
      yTitle: "Current / pA",
      isReversed: false,
      series: curves,
    }));
    const written = await writeFiles(folder, [["iv.csv", text], ["iv.svg", figure]]);
    this.process.stdout.write(
      flags.json ? `${JSON.stringify(answers, null, 2)}\n` : [
        ...answers.map((answer) =>
          `h nu ${answer.photonEnergyEv.toFixed(3)} eV: yield ${
            answer.yieldPerAbsorbedPhoton.toPrecision(4)
          } per absorbed photon, saturation ${answer.saturatedA.toPrecision(4)} A, last electrons stop at ${
            answer.stoppingPotentialV.toFixed(3)
          } V (collector's work function)`
        ),
        `Wrote ${written.join(", ")}`,
        "",
      ].join("\n"),
    );
  },
});

function voltages({ from, to, step }: CellFlags): number[] {
  if (!(step > 0) || !(to > from) || (to - from) / step > MOST_POINTS) {
    throw new InputError([{
      place: "--step",
      message: cannot(
        "make voltages",
        `--step must be > 0 V and --to above --from, with at most ${MOST_POINTS} points`,
        `${from}..${to} V in steps of ${step} V`,
      ),
    }]);
  }
  const count = Math.floor((to - from) / step + 1e-9) + 1;
  return Array.from({ length: count }, (_, i) => Number((from + i * step).toPrecision(12)));
}
