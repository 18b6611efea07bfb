import assert from "node:assert/strict";
import { assertClose } from "../support/assert_close.ts";
import { isoSpectraText, type IsoSpectrum } from "../support/iso14976_spectra.ts";
import { textsOf } from "../support/drawing.ts";
import {
  type CsvParts,
  csvParts,
  csvText,
  goldRun,
  inFolder,
  namesIn,
  type Outcome,
  twoedge,
} from "../support/twoedge.ts";

/** Values of the scenario: W of gold, and W - W_A - e U, h nu - W_A - e U with He I alpha (NIST: 58.43343 nm). */
const WORK_FUNCTION_EV = 5.1;
const PHOTON_EV = 21.218;
const CUTOFF_EV = 9.7;
const FERMI_EDGE_EV = PHOTON_EV + 4.6;

interface Estimate {
  readonly value: number;
  readonly standardUncertainty: number;
}

const ESTIMATES = [
  "workFunctionEv",
  "cutoffEv",
  "fermiEdgeEv",
  "valenceBandMaximumEv",
  "ionizationEnergyEv",
  "maxKineticEnergyEv",
];

/** Four standard uncertainties: one false alarm in 16 000 where the uncertainty is right and the error normal. */
function agrees(estimate: Estimate, truth: number): boolean {
  return Math.abs(estimate.value - truth) <= 4 * estimate.standardUncertainty;
}

/** `true` when the estimate agrees with the truth and would not with a value 0.1 eV away. */
function finds(estimate: Estimate, truth: number): boolean {
  return agrees(estimate, truth) && !agrees(estimate, truth + 0.1) && !agrees(estimate, truth - 0.1);
}

/** The rows of the simulated spectrum that `keep` takes, as energies and counts only. */
async function goldParts(keep: (energyEv: number) => boolean = () => true): Promise<CsvParts> {
  const { metadata, columns } = csvParts((await goldRun()).csv);
  const rows = columns.kinetic_energy_ev.flatMap((energy, i) => (keep(energy) ? [i] : []));
  const pick = (name: string) => rows.map((i) => columns[name][i]);
  return { metadata, columns: { kinetic_energy_ev: pick("kinetic_energy_ev"), counts: pick("counts") } };
}

const NEAR_CUTOFF = (energyEv: number): boolean => energyEv < 13;
const NEAR_FERMI_EDGE = (energyEv: number): boolean => energyEv > 22.5;

/** On a binding-energy axis, descending, nine decimals. */
function onBindingAxis({ metadata, columns }: CsvParts): CsvParts {
  const fermiLevelEv = Number(metadata.photon_energy_ev) - Number(metadata.analyzer_work_function_ev) -
    Number(metadata.bias_v);
  const binding = columns.kinetic_energy_ev.map((energy) => Number((fermiLevelEv - energy).toFixed(9)));
  return { metadata, columns: { binding_energy_ev: binding, counts: columns.counts } };
}

function without({ metadata, columns }: CsvParts, ...keys: readonly string[]): CsvParts {
  const kept = Object.entries(metadata).filter(([key]) => !keys.includes(key));
  return { metadata: Object.fromEntries(kept), columns };
}

/** Fits texts as files `a.csv`, `b.csv`, ... of one measurement. */
function fit(texts: readonly string[], ...args: readonly string[]): Promise<Outcome> {
  const files = Object.fromEntries(texts.map((text, i) => [`${"abc"[i]}.csv`, text]));
  return inFolder(files, (folder) => twoedge(folder, "fit", ...Object.keys(files), "--json", ...args));
}

/** The answer of a fit that is to be trusted. */
// deno-lint-ignore no-explicit-any
async function goodAnswer(outcome: Promise<Outcome>): Promise<any> {
  const { code, stdout, stderr } = await outcome;
  assert.deepEqual([code, stderr], [0, ""]);
  return JSON.parse(stdout);
}

let wholeAnswer: ReturnType<typeof goodAnswer> | undefined;

/** The answer for the file as `simulate` wrote it. */
async function whole(): ReturnType<typeof goodAnswer> {
  return await (wholeAnswer ??= goodAnswer(fit([(await goldRun()).csv])));
}

Deno.test("fit finds what was put in when it reads the file that simulate wrote", async () => {
  const answer = await whole();
  assert.equal(answer.verdict, "good");
  assert.deepEqual(answer.reasons, []);
  assert.ok(finds(answer.workFunctionEv, WORK_FUNCTION_EV));
  assert.ok(finds(answer.ionizationEnergyEv, WORK_FUNCTION_EV));
  assert.ok(finds(answer.maxKineticEnergyEv, PHOTON_EV - WORK_FUNCTION_EV));
  assert.ok(finds(answer.cutoffEv, CUTOFF_EV));
  assert.ok(finds(answer.fermiEdgeEv, FERMI_EDGE_EV));
});

Deno.test("fit prints the promised keys in the promised shapes when --json is given", async () => {
  const answer = await whole();
  for (const key of ESTIMATES.filter((name) => name !== "valenceBandMaximumEv")) {
    assert.deepEqual(Object.keys(answer[key]), ["value", "standardUncertainty"], key);
    assert.ok(Number.isFinite(answer[key].value) && answer[key].standardUncertainty > 0, key);
  }
  assert.equal(answer.valenceBandMaximumEv, null);
  assert.ok(Array.isArray(answer.warnings));
  assert.ok(answer.warnings.every((warning: unknown) => typeof warning === "string"));
  const { regions, axis, photonEnergyEv, biasV } = answer.inputs;
  assert.deepEqual(regions, [
    { file: "a.csv", region: "", rangeEv: [8.8, 29], use: "secondary cutoff and Fermi edge" },
  ]);
  assert.deepEqual(axis, { kind: "kinetic", from: "file" });
  assert.deepEqual(biasV, { value: -9, from: "file" });
  assertClose(photonEnergyEv.value, PHOTON_EV, { absolute: 1e-3 });
  assert.equal(photonEnergyEv.from, "file (He I alpha)");
});

Deno.test("fit gives values that belong together", async () => {
  // Exact: W + KE_max = h nu, and KE_max is the distance of the edges.
  const { workFunctionEv, maxKineticEnergyEv, fermiEdgeEv, cutoffEv, inputs } = await whole();
  const width = fermiEdgeEv.value - cutoffEv.value;
  assertClose(maxKineticEnergyEv.value, width, { absolute: 1e-9 });
  assertClose(workFunctionEv.value + maxKineticEnergyEv.value, inputs.photonEnergyEv.value, {
    absolute: 1e-9,
  });
});

Deno.test("fit prints the same numbers for people, with their uncertainties", async () => {
  const { workFunctionEv } = await whole();
  await inFolder({ "a.csv": (await goldRun()).csv }, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "fit", "a.csv");
    assert.deepEqual([code, stderr], [0, ""]);
    assert.match(stdout, /^Verdict: good$/m);
    for (
      const name of [
        "work function",
        "maximum kinetic energy",
        "ionization energy",
        "secondary cutoff",
        "Fermi edge",
      ]
    ) {
      assert.match(stdout, new RegExp(`^  ${name} +\\d+\\.\\d+\\(\\d\\d\\) eV$`, "m"));
    }
    const [, value, digits] = /work function +([\d.]+)\((\d\d)\) eV/.exec(stdout) ?? [];
    const lastDigit = 10 ** -(value.split(".")[1].length);
    assertClose(Number(value), workFunctionEv.value, { absolute: 0.5001 * lastDigit });
    assertClose(Number(digits) * lastDigit, workFunctionEv.standardUncertainty, {
      absolute: 0.5001 * lastDigit,
    });
    assert.deepEqual(namesIn(folder), ["a.csv"]);
  });
});

Deno.test("fit reads columns of any name when --columns and --axis are given", async () => {
  const { metadata, columns } = await goldParts();
  const text = csvText({ metadata, columns: { N: columns.counts, E: columns.kinetic_energy_ev } });
  const answer = await goodAnswer(fit([text], "--columns", "E,N", "--axis", "kinetic"));
  assert.deepEqual(answer.workFunctionEv, (await whole()).workFunctionEv);
  assert.equal(answer.inputs.axis.from, "given by the user");
});

Deno.test("fit takes what the file does not say from its options", async () => {
  const bare = csvText({ ...await goldParts(), metadata: {} });
  const { photon_energy_ev: photon } = (await goldParts()).metadata;
  const options = ["--photon-energy", photon, "--bias", "-9", "--acceptance", "4", "--temperature", "300"];
  const answer = await goodAnswer(fit([bare], ...options));
  const expected = await whole();
  assertClose(answer.workFunctionEv.value, expected.workFunctionEv.value, { absolute: 1e-3 });
  assert.deepEqual(answer.inputs.biasV, { value: -9, from: "given by the user" });
  assert.match(answer.inputs.photonEnergyEv.from, /^given by the user/);
  assert.deepEqual(answer.inputs.temperatureK, { value: 300, from: "given by the user" });
});

Deno.test("fit finds the same work function when the same counts are on a binding-energy axis", async () => {
  const answer = await goodAnswer(fit([csvText(onBindingAxis(await goldParts()))]));
  assert.equal(answer.inputs.axis.kind, "binding");
  assert.equal(answer.valenceBandMaximumEv, null);
  assertClose(answer.workFunctionEv.value, (await whole()).workFunctionEv.value, { absolute: 1e-3 });
});

Deno.test("fit keeps the truth within its uncertainty when the file does not say the acceptance", async () => {
  const text = csvText(without(await goldParts(), "acceptance_half_angle_deg"));
  const answer = await goodAnswer(fit([text]));
  const { value, standardUncertainty } = answer.workFunctionEv;
  assert.ok(
    answer.verdict !== "good" || agrees(answer.workFunctionEv, WORK_FUNCTION_EV),
    `${answer.verdict}: ${value} +- ${standardUncertainty}`,
  );
});

Deno.test("fit joins a cutoff and a Fermi edge from two files, in any order, and draws both", async () => {
  const cutoff = csvText(await goldParts(NEAR_CUTOFF));
  const edge = csvText(await goldParts(NEAR_FERMI_EDGE));
  for (const names of [["cutoff.csv", "edge.csv"], ["edge.csv", "cutoff.csv"]]) {
    await inFolder({ "cutoff.csv": cutoff, "edge.csv": edge }, async (folder) => {
      const answer = await goodAnswer(twoedge(folder, "fit", ...names, "--json", "--out", "o"));
      assertClose(answer.workFunctionEv.value, (await whole()).workFunctionEv.value, { absolute: 1e-3 });
      const uses = { "cutoff.csv": "secondary cutoff", "edge.csv": "Fermi edge" } as Record<string, string>;
      assert.deepEqual(
        answer.inputs.regions.map(({ file, use }: { file: string; use: string }) => [file, use]),
        names.map((name) => [name, uses[name]]),
      );
      const svg = Deno.readTextFileSync(`${folder}/o/fit.svg`);
      for (const text of [/secondary cutoff [\d.]+\(\d\d\) eV/, /Fermi edge [\d.]+\(\d\d\) eV/]) {
        assert.match(svg, text);
      }
    });
  }
});

Deno.test("fit takes only the regions named when --region is given", async () => {
  const labeled = async (keep: (energyEv: number) => boolean, region: string) => {
    const { metadata, columns } = await goldParts(keep);
    return csvText({ metadata: { ...metadata, region }, columns });
  };
  const texts = [
    await labeled(() => true, "survey"),
    await labeled(NEAR_CUTOFF, "low"),
    await labeled(NEAR_FERMI_EDGE, "high"),
  ];
  const answer = await goodAnswer(fit(texts, "--region", "low", "--region", "high"));
  assert.deepEqual(
    answer.inputs.regions.map(({ region, use }: { region: string; use: string }) => [region, use]),
    [["low", "secondary cutoff"], ["high", "Fermi edge"]],
  );
  const unknown = await fit(texts, "--region", "hihg");
  assert.deepEqual([unknown.code, unknown.stdout], [2, ""]);
  assert.match(unknown.stderr, /did you mean high\?.*current value is "hihg" \(at --region\)/);
});

Deno.test("fit refuses, or reads rightly, a cutoff and an edge on different kinds of axis", async () => {
  const cutoff = csvText(await goldParts(NEAR_CUTOFF));
  const edge = csvText(onBindingAxis(await goldParts(NEAR_FERMI_EDGE)));
  for (const texts of [[cutoff, edge], [edge, cutoff]]) {
    const { code, stdout } = await fit(texts);
    if (code !== 0) {
      assert.equal(code, 2);
      continue;
    }
    const { ionizationEnergyEv, workFunctionEv } = JSON.parse(stdout);
    assert.ok(agrees(workFunctionEv, WORK_FUNCTION_EV), `work function ${workFunctionEv.value}`);
    assert.ok(agrees(ionizationEnergyEv, WORK_FUNCTION_EV), `ionization energy ${ionizationEnergyEv.value}`);
  }
});

Deno.test("fit writes fit.json, the object it prints, and fit.svg when --out is given", async () => {
  const { csv } = await goldRun();
  const untitled = csv.replace(/^# title: .*\n/m, "");
  assert.notEqual(untitled, csv);
  await inFolder({ "gold <1> & 2.csv": untitled, "b.csv": csv }, async (folder) => {
    const { code, stdout } = await twoedge(folder, "fit", "gold <1> & 2.csv", "--json", "--out", "o");
    assert.equal(code, 0);
    assert.deepEqual(namesIn(`${folder}/o`), ["fit.json", "fit.svg"]);
    assert.equal(Deno.readTextFileSync(`${folder}/o/fit.json`), stdout);
    const svg = Deno.readTextFileSync(`${folder}/o/fit.svg`);
    assert.match(svg, /gold &lt;1&gt; &amp; 2/);
    assert.match(svg, /Kinetic energy on the axis of the file \/ eV/);
    assert.match(svg, /W = 5\.\d+\(\d\d\) eV/);
    // A title in the file goes before its name.
    const title = /^# title: (.*)$/m.exec(csv)![1];
    assert.equal((await twoedge(folder, "fit", "b.csv", "--out", "t")).code, 0);
    assert.ok(textsOf(Deno.readTextFileSync(`${folder}/t/fit.svg`)).includes(title), title);
    assert.ok(!svg.includes(title));
  });
});

/** A spectrum that cannot answer, as its text; each fit must say so and give no work function. */
const HOPELESS: readonly (readonly [string, () => Promise<string>])[] = [
  ["the window holds no cutoff", async () => csvText(await goldParts(NEAR_FERMI_EDGE))],
  ["nothing was counted", async () => {
    const { metadata, columns } = await goldParts();
    return csvText({ metadata, columns: { ...columns, counts: columns.counts.map(() => 0) } });
  }],
  ["the counts are the same everywhere", async () => {
    const { metadata, columns } = await goldParts();
    return csvText({ metadata, columns: { ...columns, counts: columns.counts.map(() => 100) } });
  }],
];
for (const [what, text] of HOPELESS) {
  Deno.test(`fit fails with exit code 1 and no work function when ${what}`, async () => {
    await inFolder({ "a.csv": await text() }, async (folder) => {
      const { code, stdout, stderr } = await twoedge(folder, "fit", "a.csv", "--json", "--out", "o");
      assert.deepEqual([code, stderr], [1, ""]);
      const answer = JSON.parse(stdout);
      assert.equal(answer.verdict, "failed");
      assert.ok(answer.reasons.length > 0);
      for (
        const key of ["workFunctionEv", "ionizationEnergyEv", "maxKineticEnergyEv", "valenceBandMaximumEv"]
      ) {
        assert.equal(answer[key], null, key);
      }
      assert.equal(Deno.readTextFileSync(`${folder}/o/fit.json`), stdout);
      assert.match(Deno.readTextFileSync(`${folder}/o/fit.svg`), /no work function/);
      const forPeople = await twoedge(folder, "fit", "a.csv");
      assert.equal(forPeople.code, 1);
      assert.match(forPeople.stdout, /^Verdict: failed\n {2}because /);
      assert.doesNotMatch(forPeople.stdout, /^ {2}work function/m);
    });
  });
}

Deno.test("fit does not call an answer good when the window ends far below the Fermi edge", async () => {
  await inFolder({ "a.csv": csvText(await goldParts(NEAR_CUTOFF)) }, async (folder) => {
    const { stdout, stderr } = await twoedge(folder, "fit", "a.csv", "--json", "--out", "o");
    assert.equal(stderr, "");
    const { verdict, reasons, fermiEdgeEv, workFunctionEv } = JSON.parse(stdout);
    assert.notEqual(verdict, "good");
    assert.match(reasons.join("\n"), /Fermi edge/);
    assert.equal(fermiEdgeEv, null);
    assert.ok(workFunctionEv === null || agrees(workFunctionEv, WORK_FUNCTION_EV));
    assert.match(Deno.readTextFileSync(`${folder}/o/fit.svg`), new RegExp(`verdict: ${verdict}`));
  });
});

Deno.test("fit refuses with exit code 2 when a spectrum lacks its photon energy or its kind of axis", async () => {
  const parts = await goldParts();
  const noPhoton = await fit([csvText(without(parts, "photon_energy_ev"))]);
  assert.deepEqual([noPhoton.code, noPhoton.stdout], [2, ""]);
  assert.match(noPhoton.stderr, /given with --photon-energy: current value is "unknown" \(at a\.csv\)\n$/);
  const { metadata, columns } = parts;
  const noAxis = await fit(
    [csvText({ metadata, columns: { E: columns.kinetic_energy_ev, N: columns.counts } })],
    ...["--columns", "E,N"],
  );
  assert.deepEqual([noAxis.code, noAxis.stdout], [2, ""]);
  assert.match(noAxis.stderr, /given with --axis: current value is "unknown" \(at a\.csv\)\n$/);
});

Deno.test("fit ends with exit code 3 when it cannot write", async () => {
  await inFolder({ "a.csv": (await goldRun()).csv }, async (folder) => {
    const { code, stderr } = await twoedge(folder, "fit", "a.csv", "--out", "a.csv");
    assert.deepEqual([code, stderr], [3, "Cannot write a.csv: a file is where a folder must be\n"]);
    assert.deepEqual(namesIn(folder), ["a.csv"]);
  });
});

/** The simulated spectrum as an instrument's file: a survey with X-rays, then both edges. */
async function isoGold(): Promise<string> {
  const block = async (label: string, keep: (energyEv: number) => boolean): Promise<IsoSpectrum> => {
    const { metadata, columns } = await goldParts(keep);
    return {
      label,
      photonEnergyEv: Number(metadata.photon_energy_ev),
      biasV: -9,
      analyzerWorkFunctionEv: 4.4,
      startEv: columns.kinetic_energy_ev[0],
      stepEv: 0.02,
      counts: columns.counts,
    };
  };
  const low = await block("low edge", NEAR_CUTOFF);
  return isoSpectraText([
    {
      ...low,
      label: "survey",
      photonEnergyEv: 1486.6,
      startEv: 100,
      stepEv: 1,
      counts: low.counts.toReversed(),
    },
    low,
    await block("high edge", NEAR_FERMI_EDGE),
  ]);
}

Deno.test("fit finds both edges by itself in an ISO 14976 file", async () => {
  await inFolder({ "gold.vms": await isoGold() }, async (folder) => {
    const options = ["--bias", "-9", "--acceptance", "4", "--json"];
    const answer = await goodAnswer(twoedge(folder, "fit", "gold.vms", ...options));
    assertClose(answer.workFunctionEv.value, (await whole()).workFunctionEv.value, { absolute: 1e-3 });
    assert.ok(finds(answer.workFunctionEv, WORK_FUNCTION_EV));
    assert.deepEqual(
      answer.inputs.regions.map(({ region, use }: { region: string; use: string }) => [region, use]),
      [["low edge", "secondary cutoff"], ["high edge", "Fermi edge"]],
    );
    assert.equal(answer.inputs.photonEnergyEv.from, "file (He I alpha)");
    assert.equal(answer.inputs.analyzerWorkFunctionEv.value, 4.4);
  });
});

Deno.test("fit gives a clear error and no number when an ISO 14976 file is cut at every twentieth", async () => {
  const text = await isoGold();
  await inFolder({}, async (folder) => {
    for (let part = 0; part < 20; part++) {
      Deno.writeTextFileSync(`${folder}/cut.vms`, text.slice(0, Math.floor((part / 20) * text.length)));
      const { code, stdout, stderr } = await twoedge(folder, "fit", "cut.vms", "--json", "--out", "o");
      assert.deepEqual([code, stdout], [2, ""], `${5 * part} %`);
      assert.match(stderr, /^Cannot read .* as .* must .*: current value is .* \(at cut\.vms(:\d+)?\)\n$/);
    }
    assert.deepEqual(namesIn(folder), ["cut.vms"]);
  });
});
