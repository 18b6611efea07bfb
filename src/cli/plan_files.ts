import { type PlannedWindow, type Rates, uncertaintyAfter } from "../plan/mod.ts";
import {
  planFigure,
  renderSvg,
  runSheetHtml,
  runSheetMarkdown,
  seriesFigure,
  type SheetPicture,
} from "../report/mod.ts";
import type { PlanAnswer, RankedSetting } from "./plan_run.ts";
import { runSheet } from "./plan_sheet.ts";
import { meV, settingsText } from "./plan_text.ts";

/** Curves of the trade-off figure. */
const MOST_CURVES = 5;
/** Points of a curve, and how far it reaches on both sides of the planned time. */
const CURVE_POINTS = 41;
const CURVE_REACH = 30;

/**
 * Files of a plan beside `plan.json`: the trade-off figure, pictures of the windows, and the run sheet.
 *
 * @param answer The plan.
 * @param name Name of the scenario.
 * @returns Names and contents; none where no plan could be made.
 */
export async function planFiles(answer: PlanAnswer, name: string): Promise<(readonly [string, string])[]> {
  const { plan, facts, rates } = answer.best;
  if (plan.numbers === null) return [];
  const pictures: SheetPicture[] = [];
  for (const [i, window] of plan.windows.entries()) {
    pictures.push({
      description: `Expected counts of the ${window.name}`,
      svg: await windowSvg(window, rates),
      fileName: i === 0 ? "window_cutoff.svg" : "window_upper.svg",
    });
  }
  const sheet = runSheet(answer, name, pictures);
  return [
    ["plan.svg", await tradeOffSvg(answer, facts.title)],
    ...pictures.map(({ fileName, svg }) => [fileName, svg] as const),
    ["run_sheet.html", await runSheetHtml(sheet)],
    ["run_sheet.md", runSheetMarkdown(sheet)],
  ];
}

function tradeOffSvg({ ranking, best, request }: PlanAnswer, title: string): Promise<string> {
  // The best plan as worked out, not as ranked from fewer photons.
  const planned = [{ ...ranking[0], plan: best.plan }, ...ranking.slice(1)].flatMap(({ settings, plan }) =>
    plan?.numbers ? [{ settings, timeS: plan.timeS, numbers: plan.numbers }] : []
  ).slice(0, MOST_CURVES);
  const times = planned.map(({ timeS }) => timeS);
  const from = Math.min(...times) / CURVE_REACH;
  const to = Math.max(...times) * CURVE_REACH;
  const timesS = Array.from(
    { length: CURVE_POINTS },
    (_, i) => from * (to / from) ** (i / (CURVE_POINTS - 1)),
  );
  return renderSvg(planFigure({
    title,
    subtitle: [
      `predicted from a simulation; target ${
        meV(request.targetEv)
      } dotted; time split ideally between both windows`,
      ...(planned.length > 1 ? ["the first as worked out, with windows drawn in; the others as ranked"] : []),
    ],
    targetEv: request.targetEv,
    curves: planned.map(({ settings, numbers }) => {
      const varianceTimes = numbers.edges.map(({ varianceTimeEv2S }) => varianceTimeEv2S);
      return {
        label: settingsText(settings as RankedSetting["settings"]),
        timesS,
        uncertaintiesEv: timesS.map((timeS) => uncertaintyAfter(varianceTimes, numbers.floorEv, timeS)),
      };
    }),
  }));
}

function windowSvg(window: PlannedWindow, { energiesEv, countsPerS }: Rates): Promise<string> {
  const inside = Array.from(energiesEv).flatMap((energy, i) =>
    energy >= window.fromEv && energy <= window.toEv ? [i] : []
  );
  return renderSvg(seriesFigure({
    title: `Expected: ${window.name}`,
    subtitle: [`simulated, after ${window.sweeps} sweeps`],
    xTitle: "Kinetic energy as recorded / eV",
    yTitle: "Counts",
    isReversed: false,
    series: [{
      label: "expected counts",
      x: inside.map((i) => energiesEv[i]),
      y: inside.map((i) => countsPerS[i] * window.dwellS * window.sweeps),
      yUncertainties: null,
      mark: "line",
    }],
  }));
}
