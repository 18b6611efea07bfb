import assert from "node:assert/strict";
import { assertClose } from "../support/assert_close.ts";
import { inFolder, namesIn, twoedge } from "../support/twoedge.ts";

/** Two Gaussians on a level of 50 counts, rounded to whole counts; written out here. */
function csv(axis: "kinetic" | "binding"): string {
  const gauss = (x: number, fwhm: number): number =>
    Math.exp(-4 * Math.LN2 * (x / fwhm) ** 2) * Math.sqrt(4 * Math.LN2 / Math.PI) / fwhm;
  const rows = Array.from({ length: 121 }, (_, i) => {
    const binding = Number((68 + 0.1 * i).toFixed(1));
    const counts = Math.round(50 + 4000 * gauss(binding - 72.9, 0.9) + 2000 * gauss(binding - 75.6, 1.4));
    return `${axis === "binding" ? binding : (1486.7 - binding).toFixed(1)},${counts}`;
  });
  return [`# region: Al 2p`, `${axis}_energy_ev,counts`, ...rows, ""].join("\n");
}

const LINES = ["--line", "metal,at~72.8,gauss~1", "--line", "oxide,at~75.4,gauss~1"];

Deno.test("lines fits two lines with their ratio and writes a figure", async () => {
  await inFolder({ "foil.csv": csv("binding") }, async (folder) => {
    const { code, stdout, stderr } = await twoedge(
      folder,
      ...["lines", "foil.csv", "--region", "Al 2p", ...LINES],
      ...["--background", "linear", "--ratio", "oxide/metal", "--out", "out", "--json"],
    );
    assert.deepEqual([code, stderr], [0, ""]);
    const [region] = JSON.parse(stdout).regions;
    assert.deepEqual([region.label, region.energyKind], ["Al 2p", "binding"]);
    const [metal, oxide] = region.lines;
    assertClose(metal.positionEv.value, 72.9, { absolute: 2e-3 });
    assertClose(oxide.fwhmEv.value, 1.4, { absolute: 5e-3 });
    assertClose(metal.areaCountsEv.value, 4000, { relative: 2e-3 });
    assertClose(region.ratio.estimate.value, 0.5, { absolute: 2e-3 });
    assert.deepEqual(namesIn(`${folder}/out`), ["lines.json", "lines.svg"]);
    assert.equal(await Deno.readTextFile(`${folder}/out/lines.json`), stdout);
    assert.match(await Deno.readTextFile(`${folder}/out/lines.svg`), /Binding energy \/ eV[^]*oxide/);
  });
});

Deno.test("lines keeps values given with an equals sign and takes a window", async () => {
  await inFolder({ "foil.csv": csv("kinetic") }, async (folder) => {
    const { code, stdout } = await twoedge(
      folder,
      ...["lines", "foil.csv", "--line", "metal,at=1413.8,gauss=0.9", "--window", "1413..1417", "--json"],
    );
    assert.equal(code, 0);
    const [region] = JSON.parse(stdout).regions;
    assert.deepEqual(region.windowEv, [1413, 1417]);
    assert.deepEqual(region.lines[0].positionEv, { value: 1413.8, standardUncertainty: 0 });
    const shown = await twoedge(
      folder,
      ...["lines", "foil.csv", "--line", "metal,at~1413.8,gauss~0.9", "--window", "1413..1417"],
    );
    assert.match(shown.stdout, /^Al 2p\nVerdict: [^]*metal, kinetic energy +1413\.8\d*\(\d\d\) eV\n/);
  });
});

Deno.test("lines refuses options and files that break a rule", async () => {
  const cases: [readonly string[], RegExp][] = [
    [["--line", "at~72"], /must begin with a name, as in metal,at~72\.8,gauss~0\.6/],
    [["--line", "metal,at~72"], /must give at and gauss/],
    [["--line", "metal,at~72,gaus~1"], /must hold at, gauss, lorentz, asymmetry, split, ratio/],
    [["--line", "metal,at~72,gauss~1,split=0.4"], /must give split and ratio together/],
    [["--line", "metal,at~72,gauss~x"], /must be a decimal number/],
    [
      ["--line", "metal,at~20,gauss~1"],
      /line metal must lie in 68\.\.80 eV: current value is "20 eV".*foil\.csv/,
    ],
    [[...LINES, "--region", "Al 2s"], /the label must be one of "Al 2p" \(did you mean Al 2p\?\)/],
    [[...LINES, "--ratio", "oxid/metal"], /the line must be one of metal, oxide: current value is "oxid"/],
    [[...LINES, "--window", "80..70"], /must rise from left to right/],
    [[...LINES, ...LINES], /every line must have its own name/],
    [[], /line/],
  ];
  await Promise.all(
    cases.map(([args, message]) =>
      inFolder({ "foil.csv": csv("binding") }, async (folder) => {
        const { code, stdout, stderr } = await twoedge(folder, "lines", "foil.csv", ...args, "--out", "out");
        assert.deepEqual([code, stdout], [2, ""], `${args}: ${stderr}`);
        assert.match(stderr, message);
        assert.deepEqual(namesIn(folder), ["foil.csv"]);
      })
    ),
  );
});

Deno.test("lines that the data cannot tell apart give no number and exit with 1", async () => {
  await inFolder({ "foil.csv": csv("binding") }, async (folder) => {
    const twins = ["--line", "a,at=72.9,gauss=0.9", "--line", "b,at=72.9,gauss=0.9", "--ratio", "a/b"];
    const { code, stdout } = await twoedge(folder, "lines", "foil.csv", ...twins, "--json");
    const [region] = JSON.parse(stdout).regions;
    assert.deepEqual([code, region.verdict, region.lines, region.ratio.estimate], [1, "failed", [], null]);
    assert.match(region.reasons[0], /the data do not determine [ab] area/);
  });
});

Deno.test("lines without counts are doubtful", async () => {
  const empty = csv("binding").replace(/^(\d+\.?\d*),\d+$/gm, "$1,0");
  await inFolder({ "empty.csv": empty }, async (folder) => {
    const { stdout } = await twoedge(folder, "lines", "empty.csv", ...LINES);
    assert.match(stdout, /Verdict: doubtful\n {2}because line metal does not stand out of the noise/);
  });
});
