import assert from "node:assert/strict";
import { QUICK_GOLD } from "../support/sweep_text.ts";
import { inFolder, namesIn, twoedge } from "../support/twoedge.ts";

/** Enough photons on coarse tables that the noise of the simulation is small beside that of the counting. */
const HISTORIES = ["--set", "simulation.histories=1200000", "--set", "light.photonFluxPerS=2e7"];
const MEASURE = ["simulate", "gold.json", ...HISTORIES, "--workers", "1", "--seed", "9"];
const COMPARE = ["compare", "m/spectrum.csv", "gold.json", ...HISTORIES, "--workers", "1"];

interface Value {
  readonly name: string;
  readonly value: number;
  readonly standardUncertainty: number;
}

const named = (values: readonly Value[], name: string): Value => values.find((value) => value.name === name)!;

Deno.test("compare finds the work function of a file that was simulated with another one", async () => {
  await inFolder({ "gold.json": QUICK_GOLD }, async (folder) => {
    await twoedge(folder, ...MEASURE, "--set", "sample.workFunctionEv=5.22", "--out", "m");
    const { code, stdout, stderr } = await twoedge(
      folder,
      ...[...COMPARE, "--suspect", "sample.workFunctionEv", "--free", "sample.workFunctionEv=4.9:5.3"],
      ...["--json", "--out", "o"],
    );
    assert.deepEqual([code, stderr], [0, ""]);
    const found = JSON.parse(stdout);
    assert.equal(found.agreement.verdict, "differs");
    assert.equal(found.suspects.named[0], "sample.workFunctionEv");
    for (
      const { value, standardUncertainty: u } of [
        named(found.fitted.values, "sample.workFunctionEv"),
        found.suspects.suspects[0].best as Value,
      ]
    ) {
      // 4.5 standard uncertainties: one false alarm in 150 000. The scenario's 5.1 eV must be found out.
      assert.ok(Math.abs(value - 5.22) < 4.5 * u, `${value} +- ${u} eV`);
      assert.ok(Math.abs(value - 5.1) > 4.5 * u, `${value} +- ${u} eV`);
    }
    assert.ok(named(found.fitted.values, "sample.workFunctionEv").standardUncertainty > 0);
    assert.deepEqual(namesIn(`${folder}/o`), ["compare.csv", "compare.json", "compare.svg"]);
    assert.deepEqual(JSON.parse(await Deno.readTextFile(`${folder}/o/compare.json`)), found);
    const svg = await Deno.readTextFile(`${folder}/o/compare.svg`);
    for (const text of ["measured", "model", "Residual", "sample.workFunctionEv"]) {
      assert.ok(svg.includes(text), text);
    }
  });
});

Deno.test("compare agrees with a file of its own scenario, on a binding axis too", async () => {
  await inFolder({ "gold.json": QUICK_GOLD }, async (folder) => {
    await twoedge(folder, ...MEASURE, "--out", "m");
    const kinetic = await twoedge(folder, ...COMPARE, "--suspect", "none");
    assert.equal(kinetic.code, 0, kinetic.stderr);
    assert.match(kinetic.stdout, /^Verdict: agrees\n/);
    assert.doesNotMatch(kinetic.stdout, /Suspects/);
    // Binding energy is photon energy - analyzer work function - e x bias - kinetic energy: 21.218 - 4.4 + 9 eV.
    const rows = (await Deno.readTextFile(`${folder}/m/spectrum.csv`)).split("\n").filter((row) =>
      /^\d/.test(row)
    )
      .map((row) => row.split(","));
    const binding = rows.map(([energy, , counts]) => `${(25.81802 - Number(energy)).toFixed(5)},${counts}`);
    await Deno.writeTextFile(`${folder}/b.csv`, ["binding_energy_ev,counts", ...binding, ""].join("\n"));
    const other = await twoedge(
      folder,
      "compare",
      "b.csv",
      ...COMPARE.slice(2),
      "--suspect",
      "none",
      "--json",
    );
    const { agreement, alignment, axis } = JSON.parse(other.stdout);
    assert.equal(agreement.verdict, "agrees");
    assert.match(axis.how, /^binding energies/);
    const offset = named(alignment, "offsetEv");
    assert.ok(Math.abs(offset.value) < 4.5 * offset.standardUncertainty);
  });
});

Deno.test("compare refuses what cannot be of one experiment, with the numbers", async () => {
  const csv = (head: string, name: string, energies: readonly number[]): string =>
    `${head}${name},counts\n${energies.map((energy) => `${energy},10\n`).join("")}`;
  const energies = Array.from({ length: 30 }, (_, i) => 10 + i / 2);
  const files = {
    "gold.json": QUICK_GOLD,
    "aluminum.csv": csv("# photon_energy_ev: 1486.7\n", "kinetic_energy_ev", energies),
    "bias.csv": csv("# photon_energy_ev: 21.218\n# bias_v: -5\n", "kinetic_energy_ev", energies),
    "reversed.csv": csv("# photon_energy_ev: 21.218\n", "binding_energy_ev", energies.map((e) => -e)),
    "unknown.csv": csv("", "energy_ev", energies),
    "fine.csv": csv("# photon_energy_ev: 21.218\n", "kinetic_energy_ev", energies),
  };
  await inFolder(files, async (folder) => {
    const cases: readonly (readonly [RegExp, ...string[]])[] = [
      [
        /photon energy must be that of the scenario, 21\.218 eV: current value is "1486\.7 eV/,
        "aluminum.csv",
      ],
      [/bias must be that of the scenario, -9 V \(or --set biasV=-5\): current value is "-5 V"/, "bias.csv"],
      [/energies must overlap those of the scenario, .*35\.82 to 50\.32 eV.*--axis/, "reversed.csv"],
      [
        /kind of energy axis must be in the file or given with --axis/,
        "unknown.csv",
        "--columns",
        "energy_ev,counts",
      ],
      [
        /the scenario must give a number in 4\.\.5 .*current value is 5\.1/,
        "fine.csv",
        "--free",
        "sample.workFunctionEv=4:5",
      ],
      [/must give a number .*current value is "none"/, "fine.csv", "--free", "sample.workFunktion=4:6"],
      [/--free PATH|must be PATH=LO:HI with LO < HI/, "fine.csv", "--free", "sample.temperatureK=300:200"],
      [/try a suspect as it must be one of sample\.workFunctionEv/, "fine.csv", "--suspect", "weather"],
      [/the label must be one of/, "fine.csv", "--region", "valence"],
    ];
    for (const [message, file, ...rest] of cases) {
      const { code, stdout, stderr } = await twoedge(folder, "compare", file, "gold.json", ...rest);
      assert.deepEqual([code, stdout], [2, ""], `${file}: ${stderr}`);
      assert.match(stderr, message);
    }
  });
});
