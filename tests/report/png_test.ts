import assert from "node:assert/strict";
import { budgetFigure, renderSvg, svgToPng } from "../../src/report/mod.ts";

async function drawn(text: string): Promise<string> {
  const png = await svgToPng(
    `<svg xmlns="http://www.w3.org/2000/svg" width="20" height="20"><text x="2" y="16" font-family="DejaVu Sans, sans-serif">${text}</text></svg>`,
  );
  return png.toString();
}

Deno.test("svgToPng() draws every sign that figures use, in a font that has it", async () => {
  const nothing = await drawn("");
  // A place of private use has no sign: what is drawn then is the box for missing ones.
  const missing = await drawn("\ue123");
  const seen = new Map([[nothing, "nothing"], [missing, "a missing sign"]]);
  for (const sign of "WM9νφ√±−×⁻¹µ○■…") {
    const png = await drawn(sign);
    assert.ok(!seen.has(png), `${sign} is drawn as ${seen.get(png)}`);
    seen.set(png, sign);
  }
});

Deno.test("svgToPng() draws a bold title unlike a plain one", async () => {
  const draw = (weight: string) =>
    svgToPng(
      `<svg xmlns="http://www.w3.org/2000/svg" width="20" height="20"><text y="16" font-family="DejaVu Sans" font-weight="${weight}">W</text></svg>`,
    );
  assert.notDeepEqual(await draw("bold"), await draw("normal"));
});

Deno.test("svgToPng() gives three pixels to a unit (ISO/IEC 15948: width and height in the first chunk)", async () => {
  const svg = await renderSvg(budgetFigure({
    title: "Gold",
    subtitle: [],
    terms: [{ name: "counting", contributionEv: 0.001 }],
    combinedEv: 0.001,
  }));
  const [, width, height] = /width="(\d+)" height="(\d+)"/.exec(svg)!;
  const png = await svgToPng(svg);
  assert.deepEqual([...png.slice(0, 8)], [0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a]);
  const numbers = new DataView(png.buffer, png.byteOffset + 16, 8);
  assert.deepEqual([numbers.getUint32(0), numbers.getUint32(4)], [3 * Number(width), 3 * Number(height)]);
});

Deno.test("svgToPng() refuses what is no drawing", async () => {
  await assert.rejects(svgToPng("counts,energy"), /./);
});
