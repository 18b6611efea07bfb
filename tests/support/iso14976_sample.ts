/** One line of an ISO 14976 text with the name of its item. */
export type IsoItem = readonly [item: string, line: string];

/** What an invented sample can be like. */
export interface IsoSampleOptions {
  readonly mode?: "NORM" | "SDP" | "MAP" | "MAPDP";
  readonly scan?: "REGULAR" | "IRREGULAR";
  readonly technique?: "XPS" | "UPS" | "AES diff";
}

interface Block {
  readonly id: string;
  readonly sourceEnergy: string;
  readonly passEnergy: string;
  readonly bias: string;
  readonly species: string;
  readonly transition: string;
  readonly abscissa: string;
  readonly start: number;
  readonly increment: number;
  readonly counts: readonly number[];
}

/** Invented numbers; nobody measured them. */
const BLOCKS: readonly Block[] = [
  {
    id: "survey",
    sourceEnergy: "1486.6",
    passEnergy: "80",
    bias: "1e+037",
    species: "wide",
    transition: "",
    abscissa: "Kinetic Energy",
    start: 100,
    increment: 0.5,
    counts: [40, 55, 71, 12, 9, 3],
  },
  {
    id: "cutoff",
    sourceEnergy: "21.2",
    passEnergy: "5",
    bias: "-9.5",
    species: "HeI",
    transition: "SECO",
    abscissa: "kinetic energy",
    start: 13,
    increment: 0.25,
    counts: [0, 0, 4, 900, 850],
  },
  {
    id: "valence",
    sourceEnergy: "0",
    passEnergy: "1E37",
    bias: "0",
    species: "VB",
    transition: "edge",
    abscissa: "Binding Energy",
    start: 2,
    increment: -0.5,
    counts: [30, 31, 29, 15, 1, 0],
  },
];

/**
 * An ISO 14976 text as named lines: three blocks with two corresponding variables, 1E37 in both spellings, experiment
 * and block comments, experimental variable, additional parameter, future upgrade entries. Item order: W. A. Dench,
 * L. B. Hazell, M. P. Seah, Surf. Interface Anal. 13, 63 (1988).
 */
export function isoItems(
  { mode = "NORM", scan = "REGULAR", technique = "XPS" }: IsoSampleOptions = {},
): IsoItem[] {
  const isMap = mode.startsWith("MAP");
  const isDepthProfile = mode.endsWith("DP");
  const when = (condition: boolean, ...items: IsoItem[]) => condition ? items : [];
  const block = (b: Block): IsoItem[] => {
    const transmissions = b.counts.map((_, i) => 2 + i / 8);
    const energies = b.counts.map((_, i) => b.start + i * b.increment);
    const variables: [string, string, number[]][] = [
      ...(scan === "IRREGULAR" ? [[b.abscissa, "eV", energies] as [string, string, number[]]] : []),
      ["Intensity", "d", [...b.counts]],
      ["Transmission", "d", transmissions],
    ];
    return [
      ["block identifier", b.id],
      ["sample", "gold foil 3"],
      ["year", "2031"],
      ["month", "4"],
      ["day", "5"],
      ["hour", "6"],
      ["minute", "7"],
      ["second", "8"],
      ["hours ahead of GMT", "2"],
      ["number of block comment lines", "2"],
      ["block comment line", "sputtered before"],
      ["block comment line", ""],
      ["technique", technique],
      ...when(isMap, ["x coordinate", "3"], ["y coordinate", "4"]),
      ["experimental variable tilt stage", "12.5"],
      ["source label", "lamp"],
      ...when(
        isDepthProfile,
        ["sputtering ion atomic number", "18"],
        ["sputtering ion number of atoms", "1"],
        ["sputtering ion charge", "1"],
      ),
      ["source energy", b.sourceEnergy],
      ["source strength", "1E37"],
      ["source beam width x", "1e+037"],
      ["source beam width y", "1e+037"],
      ...when(isMap, ["field of view x", "200"], ["field of view y", "100"]),
      ["source polar angle of incidence", "54.7"],
      ["source azimuth", "0"],
      ["analyzer mode", "FAT"],
      ["analyzer pass energy or retard ratio", b.passEnergy],
      ...when(technique === "AES diff", ["differential width", "2"]),
      ["magnification of analyzer transfer lens", "1E37"],
      ["analyzer work function", "-4.41"],
      ["target bias", b.bias],
      ["analysis width x", "1E37"],
      ["analysis width y", "1E37"],
      ["analyzer axis take-off polar angle", "0"],
      ["analyzer axis take-off azimuth", "0"],
      ["species label", b.species],
      ["transition or charge state label", b.transition],
      ["charge of detected particle", "-1"],
      ...when(
        scan === "REGULAR",
        ["abscissa label", b.abscissa],
        ["abscissa units", "eV"],
        ["abscissa start", String(b.start)],
        ["abscissa increment", String(b.increment)],
      ),
      ["number of corresponding variables", String(variables.length)],
      ...variables.flatMap(([label, units]): IsoItem[] => [
        ["corresponding variable label", label],
        ["corresponding variable units", units],
      ]),
      ["signal mode", "pulse counting"],
      ["signal collection time", "0.2"],
      ["number of scans", "3"],
      ["signal time correction", "0"],
      ...when(
        isDepthProfile,
        ["sputtering source energy", "3000"],
        ["sputtering source beam current", "200"],
        ["sputtering source width x", "50"],
        ["sputtering source width y", "50"],
        ["sputtering source polar angle of incidence", "45"],
        ["sputtering source azimuth", "0"],
        ["sputtering mode", "cyclic"],
      ),
      ["tilt polar angle", "10"],
      ["tilt azimuth", "1E37"],
      ["sample rotation angle", "1E37"],
      ["number of additional numerical parameters", "1"],
      ["additional numerical parameter label", "pressure"],
      ["additional numerical parameter units", "nPa"],
      ["parameter pressure", "30"],
      ["future upgrade block entry", "later"],
      ["number of ordinate values", String(variables.length * b.counts.length)],
      ...variables.flatMap(([label, , values]): IsoItem[] => [
        [`minimum of "${label}"`, String(Math.min(...values))],
        [`maximum of "${label}"`, String(Math.max(...values))],
      ]),
      ...b.counts.flatMap((_, i) =>
        variables.map(([label, , values]): IsoItem => [`ordinate of "${label}"`, String(values[i])])
      ),
    ];
  };
  return [
    ["format identifier", "VAMAS Surface Chemical Analysis Standard Data Transfer Format 1988 May 4"],
    ["institution", "Universität Nirgendwo"],
    ["instrument", "invented 1"],
    ["operator", ""],
    ["experiment", "bench"],
    ["number of experiment comment lines", "1"],
    ["experiment comment line", "all numbers invented"],
    ["experiment mode", mode],
    ["scan mode", scan],
    ["number of spectral regions", "3"],
    ...when(
      isMap,
      ["number of analysis positions", "1"],
      ["number of discrete x coordinates", "0"],
      ["number of discrete y coordinates", "0"],
    ),
    ["number of experimental variables", "1"],
    ["experimental variable label", "tilt stage"],
    ["experimental variable units", "degree"],
    ["number of entries in the inclusion or exclusion list", "0"],
    ["number of manually entered items", "1"],
    ["manually entered item", "16"],
    ["number of future upgrade experiment entries", "1"],
    ["number of future upgrade block entries", "1"],
    ["future upgrade experiment entry", "later still"],
    ["number of blocks", String(BLOCKS.length)],
    ...BLOCKS.flatMap(block),
    ["experiment terminator", "end of experiment"],
  ];
}

/** The lines as a text, ended by CR LF as instruments write it. */
export function isoText(items: readonly IsoItem[] = isoItems(), lineEnd = "\r\n"): string {
  return items.map(([, line]) => line + lineEnd).join("");
}
