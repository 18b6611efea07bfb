import type { RunSheet, SheetPicture } from "../report/mod.ts";
import type { Scenario } from "../scenario/mod.ts";
import { noticeText } from "./fit.ts";
import type { PlanAnswer } from "./plan_run.ts";
import { counts, duration, meV, settingsText } from "./plan_text.ts";

/** Alkali metals, which burn in air and with water. */
const ALKALI = ["Na", "K", "Cs"];

/**
 * The run sheet of a plan.
 *
 * @param answer The plan.
 * @param name Name of the scenario.
 * @param pictures Expected pictures of the windows.
 * @returns Contents.
 */
export function runSheet(answer: PlanAnswer, name: string, pictures: readonly SheetPicture[]): RunSheet {
  const { best, request, replicates } = answer;
  const { plan, facts, scenario, lightShare, settings, dosePerCm2 } = best;
  const [cutoff, upper] = plan.windows;
  const light = lightShare < 1 ? `, reduced to ${(100 * lightShare).toPrecision(2)} %` : "";
  return {
    title: `Run sheet: ${facts.title}`,
    lines: [
      `Planned from a simulation of ${name} (scenario ${best.scenarioHash}, Twoedge ${answer.version}); settings: ${
        settingsText(settings)
      }.`,
      `Wanted ${meV(request.targetEv)}, predicted ${meV(plan.uncertaintyEv)} after ${
        duration(plan.timeS)
      }: ${plan.reason}.`,
    ],
    sections: [
      {
        heading: "Set",
        rows: [
          ["Light", `${lightName(scenario)}, ${facts.photonEnergyEv.toFixed(3)} eV${light}`],
          [
            "Angles from the normal",
            `light ${scenario.geometry.incidenceAngleDeg}\u00b0, analyzer ${scenario.geometry.emissionAngleDeg}\u00b0`,
          ],
          ["Sample", `${materialsOf(scenario.sample).join(" on ")}, ${facts.temperatureK} K`],
          ["Bias", `${facts.biasV} V`],
          ["Resolution", resolutionText(scenario, facts.resolutionFwhmEv)],
          ...plan.windows.map((window) =>
            [
              `Window, ${window.name}`,
              `${window.fromEv.toFixed(3)} to ${window.toEv.toFixed(3)} eV, step ${window.stepEv} eV, ${
                Number(window.dwellS.toPrecision(3))
              } s a channel, ${window.sweeps} sweeps, ${duration(window.timeS)}`,
            ] as const
          ),
          ...(dosePerCm2 === null
            ? []
            : [["Dose", `${dosePerCm2.toExponential(2)} photons/cm\u00b2`] as const]),
        ],
      },
      {
        heading: "Do",
        items: {
          numbered: true,
          texts: [
            "Record one fast survey of both edges. If an edge is not where the picture shows it, shift its window by as much; " +
            "if a shape differs, stop and find out why.",
            `Measure in turn one sweep of the ${cutoff.name} and ${
              Math.max(1, Math.round(upper.sweeps / cutoff.sweeps))
            } of the ${upper.name}, so that a drift shows as a shift between sweeps.`,
            `Stop when the highest channel of the ${cutoff.name} holds ${counts(cutoff.peakCounts)} counts (${
              counts(cutoff.peakCountsPerS)
            } counts/s) and that of the ${upper.name} ${counts(upper.peakCounts)} counts (${
              counts(upper.peakCountsPerS)
            } counts/s); one minute more changes the uncertainty by ${meV(plan.nextMinuteEv)}.`,
            "Repeat the cutoff at one other bias: the work function must not change.",
            "Write down bias, pass energy, slits, pressure, temperature and the time of each sweep.",
          ],
        },
        pictures,
      },
      ...(plan.findings.length === 0 && replicates === null ? [] : [{
        heading: "Know",
        items: {
          numbered: false,
          texts: [
            ...plan.findings.map(noticeText),
            ...(replicates === null ? [] : [
              `${replicates.valuesEv.length} simulated runs scattered by ${meV(replicates.scatterEv)}, ${
                meV(plan.numbers?.statisticalEv ?? NaN)
              } were predicted; ${replicates.failures} fits failed.`,
            ]),
          ],
        },
      }]),
      { heading: "Take care", items: { numbered: false, texts: cautions(scenario) } },
    ],
  };
}

/**
 * Cautions that fit source and sample: reminders, no instructions. Common practice, no source.
 *
 * @param scenario The scenario.
 * @returns One sentence or two each.
 */
export function cautions(scenario: Scenario): string[] {
  const { kind } = scenario.light;
  const materials = materialsOf(scenario.sample);
  const alkali = materials.filter((material) => ALKALI.includes(material));
  const photonEv = kind === "band" ? scenario.light.centerEv : null;
  const isXray = kind === "anode" || kind === "monochromatedAluminum" ||
    (photonEv !== null && photonEv > 100);
  const lightCautions = isXray
    ? [
      "X-rays: the source may run only with its shielding and interlocks closed, by licensed persons where the law asks for it.",
    ]
    : kind === "laser"
    ? [
      "Laser: beam enclosed, eye protection for its wavelength, interlock; its pulses can also charge and space-charge the sample.",
    ]
    : kind === "thermal"
    ? ["Filament: hot surfaces and bright ultraviolet light; look only through filtered windows."]
    : [
      "Vacuum ultraviolet light: invisible, harms eyes and skin; no open line of sight through windows that pass it, no look " +
      "into the lamp.",
    ];
  return [
    "Local rules, the manuals of the instruments and licensed practice come first; this list only reminds.",
    ...lightCautions,
    ...(kind === "lamp" || isXray
      ? [
        "High voltage of the source: supply off, discharged and secured against being switched on before a cable is touched.",
      ]
      : []),
    `Bias of ${scenario.biasV} V and the voltages of the analyzer: supplies off before a connector is opened; the sample and its ` +
    "holder are live.",
    ...(alkali.length > 0
      ? [
        `${
          alkali.join(", ")
        }: reacts violently with water and burns in air. Keep it under vacuum or inert gas, dry powder for ` +
        "metal fires at hand, never water; dispose of it as the local rules say.",
      ]
      : []),
    ...(materials.includes("Be")
      ? [
        "Be: its dust and vapor cause incurable lung disease and cancer. No sputtering, grinding or venting without the measures that " +
        "the local rules ask for; do not touch.",
      ]
      : []),
    "Vacuum: windows can implode; vent only with cold filaments and all high voltages off.",
    "Bake-out: surfaces burn; remove what does not stand the temperature, and let it cool down before touching.",
  ];
}

/** Materials of a sample, uppermost first, wherever its description names one. */
function materialsOf(sample: Scenario["sample"]): string[] {
  return [...new Set([...sample.layers.map(({ material }) => material), sample.material])];
}

function lightName({ light }: Scenario): string {
  return light.kind === "lamp"
    ? `${light.lamp} lamp`
    : light.kind === "anode"
    ? `${light.anode} anode`
    : light.kind;
}

function resolutionText({ analyzer: { resolution } }: Scenario, fwhmEv: number): string {
  const width = `${fwhmEv.toFixed(3)} eV (full width at half maximum)`;
  return resolution.kind === "hemisphere"
    ? `pass energy ${resolution.passEnergyEv} eV, slit ${resolution.slitWidthMm} mm: ${width}`
    : width;
}
