import assert from "node:assert/strict";
import { textsOf } from "../support/drawing.ts";
import { goldRun, inFolder, namesIn, twoedge } from "../support/twoedge.ts";

type Files = Record<string, string>;

/** What `simulate` leaves in a folder. */
async function simulated(): Promise<Files> {
  const { csv, json, svg } = await goldRun();
  return { "spectrum.csv": csv, "result.json": json, "spectrum.svg": svg };
}

let fittedFiles: Promise<Files> | undefined;

/** What `simulate` and `fit` leave in a folder. */
function fitted(): Promise<Files> {
  return fittedFiles ??= simulated().then((files) =>
    inFolder(files, async (folder) => {
      const { code, stderr } = await twoedge(folder, "fit", "spectrum.csv", "--out", ".");
      assert.deepEqual([code, stderr], [0, ""]);
      const read = (name: string) => Deno.readTextFile(`${folder}/${name}`);
      return { ...files, "fit.json": await read("fit.json"), "fit.svg": await read("fit.svg") };
    })
  );
}

/** The text of a page as a person reads it. */
function textOf(html: string): string {
  const entities: Readonly<Record<string, string>> = { lt: "<", gt: ">", amp: "&", quot: '"', "#39": "'" };
  return html.replace(/<head>[\s\S]*<\/head>/, "").replaceAll(
    /<script[\s\S]*?<\/script>|<svg[\s\S]*?<\/svg>/g,
    "",
  )
    .replaceAll(/<[^>]*>/g, " ").replaceAll(/&(#?\w+);/g, (_, name) => entities[name]).replaceAll(
      /\s+/g,
      " ",
    );
}

Deno.test("report writes one page with the answer first, figures, tables, scenario and provenance", async () => {
  const files = await fitted();
  await inFolder(files, async (folder) => {
    const { code, stdout, stderr } = await twoedge(folder, "report", ".");
    assert.deepEqual([code, stderr], [0, ""]);
    assert.match(stdout, /^The work function is 5\.\d+\(\d\d\) eV: /);
    const written = ["budget.svg", "cutoff.svg", "levels.svg", "report.html", "scenario.json"];
    assert.deepEqual(namesIn(folder), [...Object.keys(files), ...written].sort());
    const html = await Deno.readTextFile(`${folder}/report.html`);
    const text = textOf(html);
    const fit = JSON.parse(files["fit.json"]);
    const result = JSON.parse(files["result.json"]);
    const places = [
      result.title,
      "The work function is",
      "These are simulated data: the work function put in is 5.100 eV",
      "Warnings",
      ...fit.warnings,
      "Figures",
      "Results",
      "Uncertainty budget",
      ...fit.budget.map((term: { name: string }) => term.name),
      "Secondary cutoff by convention",
      "Scenario",
      `"photonFluxPerS": 2000000000`,
      "Scenario hash",
      result.scenarioHash,
      "Seed 3",
      "H. Michaelson",
      "twoedge simulate scenario.json --out ._again && twoedge fit ._again/spectrum.csv --out ._again",
    ];
    let from = 0;
    for (const words of places) {
      const at = text.indexOf(words, from);
      assert.ok(at >= 0, `${JSON.stringify(words)} is not in its place`);
      from = at;
    }
    // Two drawings of other commands as images, three of its own.
    assert.equal(html.match(/<figure>/g)?.length, 5);
    assert.equal(html.match(/<img /g)?.length, 2);
    // Below 1 MB plus data: the drawings of other commands, in base64, and the channels.
    const data = (4 / 3) * (files["fit.svg"].length + files["spectrum.svg"].length) +
      files["spectrum.csv"].length;
    assert.ok(html.length - data < 2e5, `${html.length - data}`);
    // The scenario in the folder is the one that was run.
    const again = await twoedge(folder, "validate", "scenario.json", "--json");
    assert.equal(JSON.parse(again.stdout).scenarioHash, result.scenarioHash);
  });
});

Deno.test("report gives the same bytes again", async () => {
  await inFolder(await fitted(), async (folder) => {
    const page = async () => {
      await twoedge(folder, "report", ".");
      return await Deno.readTextFile(`${folder}/report.html`);
    };
    assert.equal(await page(), await page());
  });
});

Deno.test("report --png --spec also writes pictures and charts with their data", async () => {
  await inFolder(await fitted(), async (folder) => {
    const { code } = await twoedge(folder, "report", ".", "--png", "--spec");
    assert.equal(code, 0);
    const names = namesIn(folder);
    for (const name of ["budget", "cutoff", "levels"]) {
      assert.ok(names.includes(`${name}.png`) && names.includes(`${name}.vl.json`), name);
      const spec = JSON.parse(await Deno.readTextFile(`${folder}/${name}.vl.json`));
      assert.match(spec.$schema, /vega-lite\/v6/);
      assert.ok(JSON.stringify(spec).includes(`"values":[{`), name);
    }
    for (const name of ["spectrum.png", "fit.png"]) {
      const bytes = await Deno.readFile(`${folder}/${name}`);
      assert.deepEqual([...bytes.slice(1, 4)], [...new TextEncoder().encode("PNG")]);
    }
  });
});

Deno.test("report of a simulation alone says that there is no fit", async () => {
  await inFolder(await simulated(), async (folder) => {
    const { code, stdout } = await twoedge(folder, "report", ".");
    assert.equal(code, 0);
    assert.match(stdout, /^These are simulated data: .*5\.100 eV\.\nNo fit is in this folder\.\n/);
  });
});

Deno.test("report of a fit alone repeats what the user stated in the command that makes it again", async () => {
  const { "fit.json": json } = await fitted();
  const fit = JSON.parse(json);
  fit.inputs.biasV = { value: -9, from: "given by the user" };
  fit.inputs.regions[0].file = "it's mine/a b.csv";
  await inFolder({ "fit.json": JSON.stringify(fit) }, async (folder) => {
    const { code } = await twoedge(folder, "report", ".");
    assert.equal(code, 0);
    const text = textOf(await Deno.readTextFile(`${folder}/report.html`));
    assert.ok(text.includes(`twoedge fit 'it'\\''s mine/a b.csv' --bias -9 --out ._again`), text.slice(-300));
    assert.doesNotMatch(text, /simulated|Scenario/);
  });
});

Deno.test("report of a failed fit gives no number and says why", async () => {
  const { "fit.json": json } = await fitted();
  const fit = {
    ...JSON.parse(json),
    workFunctionEv: null,
    verdict: "failed",
    reasons: ["no cutoff was found"],
  };
  await inFolder({ "fit.json": JSON.stringify(fit) }, async (folder) => {
    const { code, stdout } = await twoedge(folder, "report", ".");
    assert.equal(code, 0);
    assert.match(
      stdout,
      /^No work function could be found\.\nThe fit failed: .*\nBecause no cutoff was found\.\n/,
    );
  });
});

Deno.test("report warns and ends with exit code 1 when the files do not belong together", async () => {
  const files = await fitted();
  const other = { ...JSON.parse(files["result.json"]), scenarioHash: "0123456789abcdef" };
  await inFolder({ ...files, "result.json": JSON.stringify(other) }, async (folder) => {
    const { code, stdout } = await twoedge(folder, "report", ".");
    assert.equal(code, 1);
    assert.match(
      stdout,
      /^Warning: spectrum\.csv is of scenario [0-9a-f]{16}, result\.json of 0123456789abcdef$/m,
    );
    assert.match(
      textOf(await Deno.readTextFile(`${folder}/report.html`)),
      /Warning: spectrum\.csv is of scenario/,
    );
  });
  const cut = files["spectrum.csv"].trimEnd().split("\n").slice(0, -5).join("\n");
  await inFolder({ ...files, "spectrum.csv": cut }, async (folder) => {
    const { code, stdout } = await twoedge(folder, "report", ".");
    assert.equal(code, 1);
    assert.match(
      stdout,
      /^Warning: spectrum\.csv covers 8\.8 to 28\.9 eV, the fitted one 8\.8 to 29 eV: fit again$/m,
    );
  });
  await inFolder(files, async (folder) => {
    const early = new Date("2020-01-01");
    await Deno.utime(`${folder}/fit.json`, early, early);
    const { code, stdout } = await twoedge(folder, "report", ".");
    assert.equal(code, 1);
    assert.match(stdout, /^Warning: spectrum\.csv was written after fit\.json/m);
  });
});

Deno.test("report shows what a person wrote, and does not obey it", async () => {
  const files = await fitted();
  const hostile = `</title><script>alert("1")</script><img src=x onerror=alert(1)>`;
  const result = { ...JSON.parse(files["result.json"]), title: hostile };
  result.scenario.note = hostile;
  const svg = `<svg xmlns="http://www.w3.org/2000/svg" onload="alert(1)"><script>alert(1)</script></svg>`;
  await inFolder({ ...files, "result.json": JSON.stringify(result), "own.svg": svg }, async (folder) => {
    const { code } = await twoedge(folder, "report", ".");
    assert.equal(code, 0);
    const html = await Deno.readTextFile(`${folder}/report.html`);
    assert.equal(html.match(/<script/g)?.length, 2);
    // Quoted values are texts; no attribute acts.
    assert.doesNotMatch(html.replaceAll(/="[^"]*"/g, ""), /<img src|<[a-z][^>]* on[a-z]+/);
    assert.ok(textOf(html).includes(hostile));
  });
});

/** Folders that are no results, the exit code and the message. */
const REFUSED: readonly (readonly [string, Files, number, RegExp])[] = [
  [
    "an empty folder",
    {},
    2,
    /^Cannot report as the folder must hold result\.json or fit\.json .*: current value is "nothing" \(at \.\)\n$/,
  ],
  [
    "a file that is no JSON",
    { "fit.json": "{" },
    2,
    /^Cannot report as the file must be JSON: .* \(at fit\.json\)\n$/,
  ],
  [
    "a file of something else",
    { "fit.json": `{"workFunctionEv": "high"}` },
    2,
    /^Cannot report as the file must be as version \S+ writes it: \/workFunctionEv: .* \(at fit\.json\)$/m,
  ],
];
for (const [what, files, exitCode, message] of REFUSED) {
  Deno.test(`report refuses ${what}`, async () => {
    await inFolder(files, async (folder) => {
      const { code, stdout, stderr } = await twoedge(folder, "report", ".");
      assert.deepEqual([code, stdout], [exitCode, ""]);
      assert.match(stderr, message);
      assert.deepEqual(namesIn(folder), Object.keys(files));
    });
  });
}

Deno.test("report ends with exit code 3 when there is no folder", async () => {
  await inFolder({}, async (folder) => {
    const { code, stderr } = await twoedge(folder, "report", "nowhere");
    assert.equal(code, 3);
    assert.match(stderr, /^Cannot read nowhere: it does not exist\n$/);
  });
});

Deno.test("fit --plot and simulate --plot draw text of 80 columns without control characters", async () => {
  const { "spectrum.csv": csv } = await simulated();
  await inFolder({ "a.csv": csv }, async (folder) => {
    const { code, stdout } = await twoedge(folder, "fit", "a.csv", "--plot");
    assert.equal(code, 0);
    const lines = stdout.slice(stdout.indexOf("Counts (square-root scale)")).trimEnd().split("\n");
    assert.equal(lines.length, 1 + 10 + 2 + 2);
    assert.match(lines.at(-1)!, /^ +Fermi edge 25\.8\d\d eV ↑$/);
    assert.ok(lines.every((line) => [...line].length <= 80));
    // deno-lint-ignore no-control-regex
    assert.doesNotMatch(stdout, /\u001b/);
    const each = await twoedge(folder, "fit", "a.csv", "--plot", "--each");
    assert.equal(each.code, 2);
    assert.match(each.stderr, /--plot must not be given with --each/);
  });
});

Deno.test("simulate and report call the work function of a patchy surface a mean, and compare no fit with it", async () => {
  const files = await fitted();
  const patches = [4.7, 5.2].map((workFunctionEv) => ({ share: 0.5, workFunctionEv, facetTiltDeg: 0 }));
  const result = JSON.stringify({ ...JSON.parse(files["result.json"]), patches });
  await inFolder({ ...files, "result.json": result }, async (folder) => {
    const { stdout } = await twoedge(folder, "report", ".");
    assert.match(stdout, /the work function put in is 5\.100 eV, area mean of 4\.700 to 5\.200 eV\.\n/);
    assert.doesNotMatch(stdout, /differs by/);
    const scenario = new URL("../../scenarios/patchy_gold_he1.json", import.meta.url).pathname;
    const simulated = await twoedge(folder, "simulate", scenario, "--histories", "8192", "--out", "p");
    // A quarter at 4.7 eV, the rest at 5.2 eV.
    assert.match(simulated.stdout, /work function put in +5\.075 eV, area mean of 4\.700 to 5\.200 eV\n/);
    assert.match(simulated.stdout, /eV as recorded, cutoff of that mean\n/);
  });
  await inFolder(files, async (folder) => {
    const { stdout } = await twoedge(folder, "report", ".");
    assert.match(stdout, /the work function put in is 5\.100 eV; the one found differs by/);
  });
});

Deno.test("simulate also draws where electrons come from when there are core levels, and report shows it", async () => {
  const scenario = new URL("../../scenarios/gold_under_aluminum_al_kalpha.json", import.meta.url).pathname;
  await inFolder({}, async (folder) => {
    const { code, stderr } = await twoedge(
      folder,
      "simulate",
      scenario,
      "--histories",
      "8192",
      "--out",
      "au",
    );
    assert.equal(code, 0, stderr);
    const texts = textsOf(await Deno.readTextFile(`${folder}/au/depths.svg`));
    const depth = JSON.parse(await Deno.readTextFile(`${folder}/au/result.json`)).levels
      .find(({ name }: { name: string }) => name === "Au 4f7/2").informationDepth95Nm;
    assert.ok(
      texts.includes(`information depth (95 %) of Au 4f7/2: ${depth.toFixed(2)} nm`),
      texts.join(" | "),
    );
    assert.equal((await twoedge(folder, "report", "au")).code, 0);
    assert.match(await Deno.readTextFile(`${folder}/au/report.html`), /Depths that electrons come from/);
  });
});
