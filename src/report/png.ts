import { readFile } from "node:fs/promises";
import { createRequire } from "node:module";

/** Pixels per unit of the drawing: print at column width. */
const SCALE = 3;
const FONTS = ["DejaVuSans.ttf", "DejaVuSans-Bold.ttf"];

let ready: Promise<(svg: string) => Uint8Array> | undefined;

/**
 * Draws an SVG text as a PNG, three pixels to a unit, in the DejaVu fonts that come with the program.
 *
 * Nothing is fetched: images and fonts that the drawing names elsewhere are left out.
 *
 * @param svg Text of an SVG file.
 * @returns Bytes of a PNG file.
 * @throws {Error} If the text is no SVG.
 * @example The signature of PNG (ISO/IEC 15948, 5.2)
 * ```ts
 * import { svgToPng } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const png = await svgToPng('<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9"><text y="9">W</text></svg>');
 * assert.deepEqual([...png.slice(0, 4)], [0x89, 0x50, 0x4e, 0x47]);
 * ```
 */
export async function svgToPng(svg: string): Promise<Uint8Array> {
  return (await (ready ??= loadRenderer()))(svg);
}

async function loadRenderer(): Promise<(svg: string) => Uint8Array> {
  const [{ initWasm, Resvg }] = await Promise.all([
    import("@resvg/resvg-wasm"),
    // Makes the files beside it known to the resolver.
    import("dejavu-fonts-ttf/package.json", { with: { type: "json" } }),
  ]);
  const require = createRequire(import.meta.url);
  const [wasm, ...fontBuffers] = await Promise.all([
    readFile(require.resolve("@resvg/resvg-wasm/index_bg.wasm")),
    ...FONTS.map((font) => readFile(require.resolve(`dejavu-fonts-ttf/ttf/${font}`))),
  ]);
  await initWasm(wasm);
  const font = { fontBuffers, loadSystemFonts: false, defaultFontFamily: "DejaVu Sans" };
  return (svg) => {
    const renderer = new Resvg(svg, { font, fitTo: { mode: "zoom", value: SCALE } });
    const image = renderer.render();
    try {
      return image.asPng();
    } finally {
      image.free();
      renderer.free();
    }
  };
}
