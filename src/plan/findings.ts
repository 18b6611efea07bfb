import type { Notice } from "../base/mod.ts";
import type { PlanFacts } from "./facts.ts";
import type { Prediction } from "./predict.ts";
import type { PlannedWindow } from "./run_plan.ts";

/** Warnings of a scenario about its own window, which a plan replaces. */
const OF_THE_WINDOW = ["cutoff-outside", "fermi-edge-outside"];
/** What a fit says of every lamp and every axis, and what a plan settles itself. */
const SAID_ELSEWHERE = ["lamp-satellites", "scale-not-included", "photon-energy-uncertainty", "dead-time"];
/** Share lost to dead time that is worth a word (chosen). */
const DEAD_SHARE = 0.02;
/** Full width at half maximum of the derivative of the Fermi function, `4 ln(1 + sqrt 2) kT`. */
const THERMAL_FWHM_KT = 4 * Math.log(1 + Math.SQRT2);
/** A resolution this much finer than the thermal width loses counts and gains nothing (chosen). */
const FINER_THAN_THERMAL = 1 / 3;

/**
 * What will go wrong, found by fitting the simulated spectrum.
 *
 * @param facts Settings.
 * @param prediction The fit of the expected spectrum.
 * @param windows Windows of the plan, or null where there are none.
 * @returns One notice each.
 */
export function findings(
  facts: PlanFacts,
  prediction: Prediction,
  windows: readonly PlannedWindow[] | null,
): Notice[] {
  const found: Notice[] = facts.warnings.filter(({ code }) => !OF_THE_WINDOW.includes(code)).slice();
  const say = (code: string, message: string, place = ""): void => void found.push({ code, message, place });
  prediction.reasons.forEach((reason) => say("fit-doubts", `fit of the simulated spectrum: ${reason}`));
  const { numbers } = prediction;
  if (numbers !== null) {
    found.push(...prediction.warnings.filter(({ code }) => !SAID_ELSEWHERE.includes(code)));
  }
  if (numbers?.offsetEv && numbers.floorEv > numbers.systematicEv) {
    say(
      "fit-off",
      `the fit of the simulated spectrum gives ${(1000 * Math.abs(numbers.offsetEv.value)).toFixed(1)} meV ${
        numbers.offsetEv.value > 0 ? "more" : "less"
      } than the work function put in, beyond its own budget of ${
        (1000 * numbers.systematicEv).toFixed(1)
      } meV`,
    );
  }
  const peak = Math.max(0, ...(windows ?? []).map(({ peakCountsPerS }) => peakCountsPerS));
  const deadShare = peak * facts.deadTimeS;
  if (deadShare > DEAD_SHARE) {
    say(
      "dead-time",
      `at ${peak.toPrecision(3)} counts/s ${
        (100 * deadShare).toFixed(1)
      } % of the electrons are lost to dead time: ` +
        "use less light, or correct for it",
      "/acquisition/deadTimeS",
    );
  }
  const thermalEv = THERMAL_FWHM_KT * facts.thermalEnergyEv;
  if (numbers?.quantity === "workFunctionEv" && facts.resolutionFwhmEv < FINER_THAN_THERMAL * thermalEv) {
    say(
      "resolution-finer-than-temperature",
      `the resolution of ${facts.resolutionFwhmEv.toFixed(3)} eV is much finer than the thermal width of ${
        thermalEv.toFixed(3)
      } eV at ${facts.temperatureK} K: cool the sample, or take a larger pass energy and more counts`,
      "/analyzer/resolution",
    );
  }
  return found;
}
