import { type IsoItem, isoItems, isoText } from "./iso14976_sample.ts";

/** One block with a spectrum. */
export interface IsoSpectrum {
  readonly label: string;
  readonly photonEnergyEv: number;
  readonly biasV: number;
  readonly analyzerWorkFunctionEv: number;
  readonly startEv: number;
  readonly stepEv: number;
  readonly counts: readonly number[];
}

/** An ISO 14976 text with a block for each spectrum; all other items are those of {@link isoItems}. */
export function isoSpectraText(spectra: readonly IsoSpectrum[]): string {
  const items = isoItems();
  const starts = items.flatMap(([item], i) => (item === "block identifier" ? [i] : []));
  const block = items.slice(starts[0], starts[1]);
  const head = items.slice(0, starts[0] - 1);
  return isoText([
    ...head,
    ["number of blocks", String(spectra.length)],
    ...spectra.flatMap((spectrum) => blockOf(block, spectrum)),
    items[items.length - 1],
  ]);
}

function blockOf(block: readonly IsoItem[], spectrum: IsoSpectrum): IsoItem[] {
  const { counts } = spectrum;
  const lines: Readonly<Record<string, string | number>> = {
    "block identifier": spectrum.label,
    "source energy": spectrum.photonEnergyEv,
    "analyzer work function": spectrum.analyzerWorkFunctionEv,
    "target bias": spectrum.biasV,
    "abscissa label": "Kinetic Energy",
    "abscissa start": spectrum.startEv,
    "abscissa increment": spectrum.stepEv,
    "number of ordinate values": 2 * counts.length,
    'minimum of "Intensity"': Math.min(...counts),
    'maximum of "Intensity"': Math.max(...counts),
    'minimum of "Transmission"': 1,
    'maximum of "Transmission"': 1,
  };
  return [
    ...block.filter(([item]) => !item.startsWith("ordinate of")).map(([item, line]): IsoItem => [
      item,
      String(lines[item] ?? line),
    ]),
    ...counts.flatMap((count): IsoItem[] => [
      ['ordinate of "Intensity"', String(count)],
      ['ordinate of "Transmission"', "1"],
    ]),
  ];
}
