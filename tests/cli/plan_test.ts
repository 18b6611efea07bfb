import assert from "node:assert/strict";
import { cautions } from "../../src/cli/plan_sheet.ts";
import { parseScenario, type Scenario } from "../../src/scenario/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { SCENARIO_TEXT } from "../support/scenario_text.ts";
import { inFolder, namesIn, twoedge } from "../support/twoedge.ts";

const GOLD_FILE = { "gold.json": SCENARIO_TEXT };
/** Few photons and coarse tables, enough for both edges to be found. */
const QUICK = [
  ...["--histories", "120000", "--workers", "1", "--set", "simulation.energyStepEv=0.05"],
  ...["--set", 'analyzer.resolution={"kind":"fwhm","fwhmEv":0.12}'],
];

Deno.test("plan ranks settings, writes its files, and ends with 0 when the target is reached", async () => {
  await inFolder(GOLD_FILE, async (folder) => {
    const { code, stdout, stderr } = await twoedge(
      folder,
      ...[
        "plan",
        "gold.json",
        "--target-ev",
        "0.02",
        "--vary",
        "biasV=-9,-5",
        "--out",
        "plan",
        "--json",
        ...QUICK,
      ],
      ...["--hours", "1", "--max-dose", "1e20", "--spot-mm2", "2", "--replicates", "10"],
    );
    assert.equal(code, 0, stderr);
    const read = (name: string): string => Deno.readTextFileSync(`${folder}/plan/${name}`);
    assert.deepEqual(namesIn(`${folder}/plan`), [
      "plan.json",
      "plan.svg",
      "run_sheet.html",
      "run_sheet.md",
      "window_cutoff.svg",
      "window_upper.svg",
    ]);
    assert.equal(stdout, read("plan.json"));
    const { best, ranking, replicates, simulated } = JSON.parse(stdout);
    assert.equal(simulated, true);
    assert.equal(best.plan.status, "reached");
    assert.ok(best.plan.uncertaintyEv <= 0.02);
    assert.equal(replicates.valuesEv.length, 10);
    assert.deepEqual(ranking.map((row: { settings: { biasV: number } }) => row.settings.biasV).sort(), [
      -5,
      -9,
    ]);
    assert.deepEqual(ranking[0].settings, best.settings);
    assert.ok(ranking[0].plan.leastTimeS <= ranking[1].plan.leastTimeS);
    // The windows follow the bias: cutoff at W - W_A - e U, 5.1 eV of gold.
    const [cutoff, edge] = best.plan.windows;
    const cutoffEv = 5.1 - 4.4 - best.settings.biasV;
    assert.ok(cutoff.fromEv < cutoffEv - 0.2 && cutoff.toEv > cutoffEv + 0.3);
    assert.ok(
      edge.fromEv < 21.218 - 4.4 - best.settings.biasV && edge.toEv > 21.218 - 4.4 - best.settings.biasV,
    );
    // 5e9 photons per second on 2 mm^2 = 0.02 cm^2.
    assertClose(best.dosePerCm2, (5e9 * best.plan.timeS) / 0.02, { relative: 1e-9 });
    assert.match(read("run_sheet.html"), /Content-Security-Policy/);
    assert.match(read("run_sheet.md"), /^# Run sheet: gold$/m);
    assert.match(read("plan.svg"), /Standard uncertainty \/ meV/);
  });
});

Deno.test("plan ends with 1 and names what stops it when the target cannot be reached", async () => {
  await inFolder(GOLD_FILE, async (folder) => {
    const { code, stdout } = await twoedge(folder, "plan", "gold.json", "--target-ev", "0.0005", ...QUICK);
    assert.equal(code, 1);
    // The photon energy alone is taken for known to 1 meV.
    assert.match(stdout, /no time reaches 0\.500 meV: .* do not shrink with time, most of it /);
    assert.match(stdout, /least time for the target +never/);
    assert.deepEqual(namesIn(folder), ["gold.json"]);
  });
});

Deno.test("plan says that the cutoff is hidden when there is no bias and the analyzer's own limit lies above it", async () => {
  await inFolder(GOLD_FILE, async (folder) => {
    const hidden = ["--set", "biasV=0", "--set", "sample.workFunctionEv=4.2"];
    const { code, stdout } = await twoedge(
      folder,
      "plan",
      "gold.json",
      "--target-ev",
      "0.02",
      ...hidden,
      ...QUICK,
    );
    assert.equal(code, 1);
    assert.match(stdout, /below the analyzer's own limit at 0 eV: apply a bias below/);
  });
});

Deno.test("plan refuses contradictory and impossible input, with the numbers", async () => {
  await inFolder(GOLD_FILE, async (folder) => {
    const refused = async (...args: string[]): Promise<string> => {
      const { code, stdout, stderr } = await twoedge(folder, "plan", "gold.json", ...args);
      assert.deepEqual([code, stdout], [2, ""]);
      return stderr;
    };
    assert.equal(
      await refused("--target-ev", "0", "--hours", "-1", "--max-dose", "1e15"),
      [
        'Cannot plan as --target-ev must be in 0.00001..1 eV: current value is "0 eV" (at --target-ev)',
        'Cannot plan as --hours must be in 0.001..10000 h: current value is "-1 h" (at --hours)',
        'Cannot plan as --max-dose must be given together with --spot-mm2: current value is "alone" (at --max-dose)',
        "",
      ].join("\n"),
    );
    assert.match(await refused("--target-ev", "0.01", "--vary", "bias=-9"), /did you mean biasV\?/);
    assert.match(await refused("--target-ev", "0.01", "--vary", "biasV=-9,-9"), /must give every value once/);
  });
});

Deno.test("plan refuses X-rays, under which there is no secondary cutoff to fit", async () => {
  const file = new URL("../../scenarios/gold_under_aluminum_al_kalpha.json", import.meta.url).pathname;
  await inFolder({}, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "plan", file, "--target-ev", "0.01");
    assert.deepEqual([code, stdout], [2, ""]);
    assert.equal(
      stderr,
      "Cannot plan as the photon energy must be <= 60 eV, for both edges are needed: current value is " +
        `"1486.7 eV" (at ${file})\n`,
    );
  });
});

Deno.test("cautions() names what fits the source and the sample, and defers to local rules", () => {
  const scenario = parseScenario(SCENARIO_TEXT, "gold.json");
  const text = (changes: { readonly light?: unknown; readonly material?: string }): string =>
    cautions({
      ...scenario,
      light: (changes.light ?? scenario.light) as Scenario["light"],
      sample: { ...scenario.sample, material: changes.material ?? "Au" },
    }).join("\n");
  const common = { photonFluxPerS: 1e9, polarization: "none" };
  const gold = text({});
  for (
    const word of [/Local rules/, /Vacuum ultraviolet/, /High voltage/, /Bias of -9 V/, /Vacuum:/, /Bake-out/]
  ) {
    assert.match(gold, word);
  }
  assert.doesNotMatch(gold, /X-rays|Laser|water|Be:/);
  assert.match(
    text({ light: { ...common, kind: "anode", anode: "Mg", satellites: true } }),
    /X-rays: .*licensed/,
  );
  assert.match(text({ light: { ...common, kind: "band", centerEv: 1000, fwhmEv: 0.1 } }), /X-rays/);
  assert.match(
    text({ light: { ...common, kind: "laser", photonEnergyEv: 6, bandwidthEv: 0, repetitionHz: 1 } }),
    /Laser/,
  );
  for (const material of ["Na", "K", "Cs"]) {
    assert.match(text({ material }), new RegExp(`${material}: .*never water`));
  }
  assert.match(text({ material: "Be" }), /Be: its dust/);
});
