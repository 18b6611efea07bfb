import type { PlannedWindow, Replicates } from "../plan/mod.ts";
import { noticeText } from "./fit.ts";
import type { PlanAnswer, RankedSetting } from "./plan_run.ts";

/** Rows of the table on a terminal. */
const MOST_ROWS = 20;

/** An energy in meV with three digits. */
export function meV(energyEv: number): string {
  return `${(1000 * energyEv).toPrecision(3)} meV`;
}

/** A time as people say it. */
export function duration(timeS: number): string {
  if (!Number.isFinite(timeS)) return "never";
  if (timeS < 100) return `${timeS.toPrecision(2)} s`;
  if (timeS < 6000) return `${(timeS / 60).toPrecision(2)} min`;
  return timeS < 360_000 ? `${(timeS / 3600).toPrecision(3)} h` : `${(timeS / 86_400).toPrecision(3)} d`;
}

/** A number of counts, or of counts per second, with three digits. */
export function counts(value: number): string {
  return String(Number(value.toPrecision(3)));
}

/** Settings as a person writes them. */
export function settingsText(settings: RankedSetting["settings"]): string {
  const texts = Object.entries(settings).map(([path, value]) =>
    `${path}=${typeof value === "string" ? value : JSON.stringify(value)}`
  );
  return texts.length === 0 ? "as in the scenario" : texts.join(" ");
}

/**
 * The answer for a terminal.
 *
 * @param answer The answer.
 * @returns Lines.
 */
export function planText(answer: PlanAnswer): string {
  const { best, ranking, request, replicates } = answer;
  const { plan, facts, lightShare } = best;
  const lines = [
    `${facts.title}: plan for ${meV(request.targetEv)}`,
    ...(ranking.length > 1 ? ["", ...table(ranking)] : []),
    "",
    `Best: ${settingsText(best.settings)}`,
    `  ${plan.reason}`,
  ];
  if (plan.numbers !== null) {
    const { edges, statisticalEv, systematicTerms, quantity, offsetEv } = plan.numbers;
    lines.push(
      `  least time for the target  ${duration(plan.leastTimeS)}, ideally split`,
      `  this plan                  ${duration(plan.timeS)}: standard uncertainty of the ${
        quantity === "workFunctionEv" ? "work function" : "ionization energy"
      } ${meV(plan.uncertaintyEv)}`,
      `  of that counting           ${meV(statisticalEv)} (${
        edges.map((edge, i) =>
          `${edge.name} ${meV(Math.sqrt(edge.varianceTimeEv2S / plan.windows[i].timeS))}`
        ).join(
          ", ",
        )
      })`,
      `  does not shrink with time  ${meV(plan.numbers.floorEv)}${
        systematicTerms.length === 0
          ? ""
          : ` (${
            systematicTerms.slice(0, 3).map((term) => `${term.name} ${meV(term.standardUncertaintyEv)}`).join(
              ", ",
            )
          })`
      }`,
      `  one minute more            ${meV(plan.nextMinuteEv)}`,
    );
    if (offsetEv !== null) {
      lines.push(
        `  fit less work function put in ${meV(offsetEv.value)}, simulation good to ${
          meV(offsetEv.standardUncertainty)
        }`,
      );
    }
    if (lightShare < 1) {
      lines.push(`  light                      ${(100 * lightShare).toPrecision(2)} % of the scenario's`);
    }
    if (best.dosePerCm2 !== null) {
      lines.push(`  dose                       ${best.dosePerCm2.toExponential(2)} photons/cm²`);
    }
    lines.push("", ...plan.windows.map(windowText));
  }
  if (plan.findings.length > 0) {
    lines.push("", "What will go wrong, found in the simulated spectrum:");
    lines.push(...plan.findings.map((notice) => `  - ${noticeText(notice)}`));
  }
  if (replicates !== null) lines.push("", ...replicatesText(replicates, plan.numbers!.statisticalEv));
  return lines.join("\n");
}

/** A window in one line. */
export function windowText(window: PlannedWindow): string {
  const { name, fromEv, toEv, stepEv, channels, dwellS, sweeps, timeS, peakCounts } = window;
  return `  ${name}: ${fromEv.toFixed(3)} to ${
    toEv.toFixed(3)
  } eV in steps of ${stepEv} eV (${channels} channels), ${sweeps === 1 ? "1 sweep" : `${sweeps} sweeps`} of ${
    Number(dwellS.toPrecision(3))
  } s a channel: ${duration(timeS)}, ${counts(peakCounts)} counts at the top`;
}

function table(ranking: readonly RankedSetting[]): string[] {
  const rows = ranking.slice(0, MOST_ROWS).map(({ settings, plan, failure, lightShare }) =>
    plan === null || plan.numbers === null
      ? [settingsText(settings), "failed", "", "", "", (plan?.reason ?? failure).split("\n")[0].slice(0, 80)]
      : [
        settingsText(settings),
        plan.status,
        duration(plan.leastTimeS),
        duration(plan.timeS),
        meV(plan.uncertaintyEv),
        `${meV(plan.numbers.floorEv)}${
          lightShare < 1 ? `, light ${(100 * lightShare).toPrecision(2)} %` : ""
        }${
          plan.findings.length > 0 ? `, ${[...new Set(plan.findings.map(({ code }) => code))].join(" ")}` : ""
        }`,
      ]
  );
  const all = [["settings", "status", "least time", "planned", "uncertainty", "floor and findings"], ...rows];
  const widths = all[0].map((_, column) => Math.max(...all.map((row) => row[column].length)));
  return [
    ...all.map((row) => row.map((cell, column) => cell.padEnd(widths[column])).join("  ").trimEnd()),
    ...(ranking.length > MOST_ROWS ? [`and ${ranking.length - MOST_ROWS} more, all in plan.json`] : []),
  ];
}

function replicatesText(replicates: Replicates, statisticalEv: number): string[] {
  const { valuesEv, failures, scatterEv, ratio, ratioStandardError, meanEv, reportedEv } = replicates;
  return [
    `${valuesEv.length} simulated runs, each fitted: scatter ${meV(scatterEv)} where ${
      meV(statisticalEv)
    } were predicted, ratio ${ratio.toFixed(3)} +- ${ratioStandardError.toFixed(3)}`,
    `  mean ${meanEv.toFixed(4)} eV, uncertainty that the fits report ${meV(reportedEv)} (median)${
      failures > 0 ? `, ${failures} fits failed` : ""
    }`,
  ];
}

/**
 * The answer as one JSON object; infinite and undefined numbers are null there.
 *
 * @param answer The answer.
 * @returns A plain object.
 */
export function planJson(
  { version, request, ranking, best, replicates }: PlanAnswer,
): Record<string, unknown> {
  const { rates: _, scenario: __, facts, ...rest } = best;
  return {
    version,
    title: facts.title,
    simulated: true,
    request,
    best: rest,
    ranking,
    replicates: replicates === null ? null : { ...replicates, valuesEv: Array.from(replicates.valuesEv) },
  };
}
