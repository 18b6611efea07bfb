import assert from "node:assert/strict";
import { assertClose } from "../support/assert_close.ts";
import { csvText, goldRun, inFolder, namesIn, twoedge } from "../support/twoedge.ts";
import { countTwoEdges, expectedTwoEdges, METAL, PHOTON_EV, type TwoEdges } from "../support/two_edges.ts";

/** A spectrum as a file. */
function fileOf(shape: TwoEdges, replicate = 1): string {
  const { energiesEv, counts } = expectedTwoEdges(shape);
  return csvText({
    metadata: {
      photon_energy_ev: String(PHOTON_EV),
      bias_v: String(shape.biasV),
      analyzer_work_function_ev: "4.4",
      acceptance_half_angle_deg: "0.5",
      temperature_k: String(shape.temperatureK),
      resolution_fwhm_ev: String(shape.fwhmEv),
    },
    columns: {
      kinetic_energy_ev: Array.from(energiesEv, (energy) => Number(energy.toFixed(9))),
      counts: Array.from(countTwoEdges(counts, replicate)),
    },
  });
}

const METAL_FILE = fileOf(METAL);
const PATCHES_FILE = fileOf({ ...METAL, patches: [[4.8, 0.5], [5.1, 0.5]] });

Deno.test("fit ends with exit code 1 for a doubtful answer only when --strict is given", async () => {
  await inFolder({ "a.csv": METAL_FILE, "b.csv": PATCHES_FILE }, async (folder) => {
    assert.equal((await twoedge(folder, "fit", "a.csv", "--strict")).code, 0);
    assert.equal((await twoedge(folder, "fit", "b.csv")).code, 0);
    const { code, stdout } = await twoedge(folder, "fit", "b.csv", "--strict");
    assert.equal(code, 1);
    assert.match(stdout, /^Verdict: doubtful$/m);
    assert.match(stdout, /^Two cutoffs:$/m);
  });
});

Deno.test("fit --each writes one row and one figure a file, unreadable ones included", async () => {
  const files = { "a.csv": METAL_FILE, "b.csv": PATCHES_FILE, "c.csv": "no spectrum\n" };
  await inFolder(files, async (folder) => {
    const { code, stdout, stderr } = await twoedge(
      folder,
      "fit",
      "a.csv",
      "b.csv",
      "c.csv",
      "--each",
      "--out",
      "o",
    );
    assert.deepEqual([code, stderr], [1, ""]);
    assert.deepEqual(namesIn(`${folder}/o`), ["a.svg", "b.svg", "results.csv"]);
    assert.equal(Deno.readTextFileSync(`${folder}/o/results.csv`), stdout);
    const [header, ...rows] = stdout.trimEnd().split("\n");
    assert.match(header, /^file,verdict,work_function_ev,work_function_standard_uncertainty_ev,/);
    assert.deepEqual(rows.map((row) => row.split(",").slice(0, 2)), [
      ["a.csv", "good"],
      ["b.csv", "doubtful"],
      ["c.csv", "failed"],
    ]);
    assertClose(Number(rows[0].split(",")[2]), 5.1, { absolute: 0.02 });
    assertClose(Number(rows[1].split(",")[2]), 4.8, { absolute: 0.02 });
    assert.match(rows[2], /"?Cannot read/);
    assert.equal((await twoedge(folder, "fit", "a.csv", "--each")).code, 0);
    const both = await twoedge(folder, "fit", "a.csv", "--each", "--json");
    assert.equal(both.code, 2);
    assert.match(both.stderr, /--json must not be given with --each/);
  });
});

Deno.test("fit --calibration divides by the gain of the reference lines and says so", async () => {
  const lines = "line,reference_ev,measured_ev,standard_uncertainty_ev\n" +
    [83.96, 368.21, 932.62].map((ev, i) => `line${i},${ev},${(0.1 + 1.001 * ev).toFixed(5)},0.02`).join("\n");
  await inFolder(
    { "a.csv": METAL_FILE, "lines.csv": `${lines}\n`, "bad.csv": `${lines}\nx,1,two,3\n` },
    async (folder) => {
      const plain = JSON.parse((await twoedge(folder, "fit", "a.csv", "--json")).stdout);
      const scaled = JSON.parse(
        (await twoedge(folder, "fit", "a.csv", "--json", "--calibration", "lines.csv")).stdout,
      );
      assertClose(scaled.inputs.scaleGain.value, 1.001, { absolute: 1e-6 });
      assertClose(scaled.maxKineticEnergyEv.value, plain.maxKineticEnergyEv.value / 1.001, {
        absolute: 1e-4,
      });
      const gain = scaled.budget.find((term: { name: string }) => term.name === "energy scale, gain");
      assert.ok(gain.standardUncertaintyEv > 0);
      assert.ok(plain.warnings.some((text: string) => /gain of the energy scale is not known/.test(text)));
      assert.ok(!scaled.warnings.some((text: string) => /gain of the energy scale is not known/.test(text)));
      const bad = await twoedge(folder, "fit", "a.csv", "--calibration", "bad.csv");
      assert.deepEqual([bad.code, bad.stdout], [2, ""]);
      assert.match(
        bad.stderr,
        /^Cannot read calibration as measured_ev must be a decimal number: current value is "two" \(at bad\.csv:5\)\n$/,
      );
    },
  );
});

Deno.test("fit prints conventions, intervals, budget and an explanation for people, and keys for scripts", async () => {
  await inFolder({ "a.csv": (await goldRun()).csv }, async (folder) => {
    const options = ["--profile", "--bootstrap", "20", "--seed", "3"];
    const { code, stdout } = await twoedge(folder, "fit", "a.csv", "--explain", ...options);
    assert.equal(code, 0);
    for (
      const part of [
        /^ {2}half height +\d+\.\d+\(\d\d\) eV +\d+\.\d+\(\d\d\) eV$/m,
        /^ {2}steepest line +/m,
        /^ {2}cutoff, profile \(k = 1\) +-\d+\.\d, \+\d+\.\d meV$/m,
        /^ {2}Fermi edge, bootstrap +.* 20 of 20 fits$/m,
        /^ {2}work function, expanded \(k = 2\) +\d+\.\d meV/m,
        /^What was done and why:$/m,
      ]
    ) assert.match(stdout, part);
    const answer = JSON.parse((await twoedge(folder, "fit", "a.csv", "--json", ...options)).stdout);
    assert.equal(answer.conventions.rows.length, 3);
    assert.equal(answer.edges.cutoff.bootstrap.replicates, 20);
    assert.ok(answer.edges.upper.profileEv.lower < answer.edges.upper.positionEv.value);
    assert.equal(answer.expanded.workFunctionEv.expandedEv, 2 * answer.workFunctionEv.standardUncertainty);
    assert.equal(answer.patches, null);
    const few = await twoedge(folder, "fit", "a.csv", "--bootstrap", "3");
    assert.equal(few.code, 2);
    assert.match(few.stderr, /--bootstrap must be in 10\.\.1000000 replicates/);
  });
});

Deno.test("fit refuses an acceptance of 90 degrees and a resolution of zero, from options and files", async () => {
  const files = {
    "a.csv": METAL_FILE,
    "zero.csv": METAL_FILE.replace(/^# resolution_fwhm_ev: .*$/m, "# resolution_fwhm_ev: 0"),
    "wide.csv": METAL_FILE.replace(/^# acceptance_half_angle_deg: .*$/m, "# acceptance_half_angle_deg: 90"),
  };
  await inFolder(files, async (folder) => {
    for (
      const [args, stderr] of [
        [
          ["a.csv", "--acceptance", "90"],
          /--acceptance must be in 0\.\.89 degrees: current value is 90 degrees/,
        ],
        [["a.csv", "--resolution", "0"], /--resolution must be in 0\.0001\.\.10 eV: current value is 0 eV/],
        [["zero.csv"], /resolution_fwhm_ev must be > 0 eV.*: current value is "0" \(at zero\.csv(:\d+)?\)/],
        [
          ["wide.csv"],
          /acceptance_half_angle_deg" as it must be in > 0\.\.89 degrees: .* "90" \(at wide\.csv(:\d+)?\)/,
        ],
      ] as const
    ) {
      const outcome = await twoedge(folder, "fit", ...args);
      assert.deepEqual([outcome.code, outcome.stdout], [2, ""], args.join(" "));
      assert.match(outcome.stderr, stderr);
    }
    const { stdout } = await twoedge(folder, "fit", "a.csv", "--bias", "-9.2");
    assert.match(stdout, /^Warning: bias -9\.2 V is used as stated, but the file says -9 V$/m);
    const far = await twoedge(folder, "fit", "a.csv", "--bias", "-10");
    assert.equal(far.code, 1);
    assert.doesNotMatch(far.stdout, /^ {2}(work function|valence-band maximum)/m);
  });
});
