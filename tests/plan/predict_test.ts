import assert from "node:assert/strict";
import { predictRun } from "../../src/plan/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { boundTimesTime, density, folded } from "../support/information.ts";
import {
  CUTOFF_EV,
  cutoffRate,
  DARK,
  energiesEv,
  FACTS,
  fermi,
  FERMI_EV,
  fermiRate,
  occupation,
  RATES,
  SIGMA_EV,
  STATES,
  step,
  STEP_EV,
  TOP,
} from "../support/plan_edges.ts";

const WINDOWS = [
  { name: "secondary cutoff", fromEv: 9.2, toEv: 10.6, timeS: 1400 },
  { name: "Fermi edge", fromEv: 15.6, toEv: 16.8, timeS: 1200 },
];
const within = (fromEv: number, toEv: number): Float64Array =>
  energiesEv.filter((energy) => energy >= fromEv - 1e-9 && energy <= toEv + 1e-9);

/** Half the change of a function when its width changes by 2 h, over h. */
function bySigma(shape: (x: number) => number): (x: number) => number {
  const h = 1e-3 * SIGMA_EV;
  const [wide, narrow] = [folded(shape, SIGMA_EV + h), folded(shape, SIGMA_EV - h)];
  return (x) => (wide(x) - narrow(x)) / (2 * h);
}

/** The parts of a cutoff that a fit has to find: position and width, a top that may fall, a background that may slope. */
const CUTOFF_PARTS = [
  (energy: number) => -(TOP * density((energy - CUTOFF_EV) / SIGMA_EV)) / SIGMA_EV,
  (energy: number) => {
    const t = (energy - CUTOFF_EV) / SIGMA_EV;
    return (-TOP * t * density(t)) / SIGMA_EV;
  },
  (energy: number) => step(energy - CUTOFF_EV),
  ...[0.3, 1.5].map((decay) => {
    const part = folded((x) => (x > 0 ? Math.exp(-x / decay) : 0), SIGMA_EV);
    return (energy: number) => part(energy - CUTOFF_EV);
  }),
  () => 1,
  (() => {
    const hinge = folded((x) => Math.max(0, -x), SIGMA_EV);
    return (energy: number) => hinge(energy - CUTOFF_EV);
  })(),
];

/** Those of a Fermi edge: position and width, states with a slope, a background with a slope. */
const FERMI_PARTS = [
  (() => {
    const h = 1e-4;
    return (energy: number) =>
      STATES * (fermi(energy - h - FERMI_EV) - fermi(energy + h - FERMI_EV)) / (2 * h);
  })(),
  (() => {
    const width = bySigma(occupation);
    return (energy: number) => STATES * width(energy - FERMI_EV);
  })(),
  (energy: number) => fermi(energy - FERMI_EV),
  (() => {
    const sloped = folded((x) => x * occupation(x), SIGMA_EV);
    return (energy: number) => sloped(energy - FERMI_EV);
  })(),
  () => 1,
  (energy: number) => energy - FERMI_EV,
];

const predicted = predictRun(RATES, FACTS, WINDOWS);
const numbers = predicted.numbers!;

Deno.test("the referee of these tests gives the closed form of a faint erf edge on a background", () => {
  // h << b, all else known: information h^2/(b step) x integral of density^2 = h^2 / (2 sqrt(pi) sigma b step).
  const faint = 1e-3;
  const channels = within(9.2, 10.2);
  const bound = boundTimesTime(channels, (energy) => faint * step(energy - CUTOFF_EV) + DARK, [
    (energy) => (-faint * density((energy - CUTOFF_EV) / SIGMA_EV)) / SIGMA_EV,
  ]);
  const closed = 2 * Math.sqrt(Math.PI) * SIGMA_EV * DARK * STEP_EV * channels.length / faint ** 2;
  assertClose(bound, closed, { relative: 1e-4 });
});

Deno.test("predictRun() gives the Cramer-Rao bound of an erf edge under Poisson counts", () => {
  const [cutoff] = numbers.edges;
  const channels = within(...cutoff.fitWindowEv);
  const bound = boundTimesTime(channels, cutoffRate, CUTOFF_PARTS);
  // Time outside of the channels that the fit uses is lost.
  const timeShare = channels.length / within(9.2, 10.6).length;
  assertClose(cutoff.varianceTimeEv2S * timeShare, bound, { relative: 0.01 });
  // Twins that must be refused: width and top known, and a background twice as high.
  const known = boundTimesTime(channels, cutoffRate, CUTOFF_PARTS.slice(0, 1));
  const dark = boundTimesTime(channels, (energy) => cutoffRate(energy) + DARK, CUTOFF_PARTS);
  for (const wrong of [known, dark]) {
    assert.throws(() => assertClose(cutoff.varianceTimeEv2S * timeShare, wrong, { relative: 0.01 }));
  }
});

Deno.test("predictRun() gives the Cramer-Rao bound of a Fermi edge under Poisson counts", () => {
  const [, edge] = numbers.edges;
  assert.equal(edge.name, "Fermi edge");
  const channels = within(...edge.fitWindowEv);
  const bound = boundTimesTime(channels, fermiRate, FERMI_PARTS);
  const timeShare = channels.length / within(15.6, 16.8).length;
  assertClose(edge.varianceTimeEv2S * timeShare, bound, { relative: 0.01 });
  const known = boundTimesTime(channels, fermiRate, FERMI_PARTS.slice(0, 1));
  assert.throws(() => assertClose(edge.varianceTimeEv2S * timeShare, known, { relative: 0.01 }));
});

Deno.test("predictRun() finds the work function put in and a variance that falls as one over time", () => {
  assert.equal(numbers.quantity, "workFunctionEv");
  assertClose(numbers.offsetEv!.value, 0, { absolute: 1e-6 });
  const longer = predictRun(RATES, FACTS, WINDOWS.map((window) => ({ ...window, timeS: 9 * window.timeS })))
    .numbers!;
  assertClose(longer.statisticalEv, numbers.statisticalEv / 3, { relative: 1e-3 });
  const [first, second] = numbers.edges.map(({ varianceTimeEv2S }, i) => varianceTimeEv2S / WINDOWS[i].timeS);
  assertClose(numbers.statisticalEv, Math.sqrt(first + second), { relative: 1e-12 });
});

Deno.test("predictRun() does not count on time against the parts that do not shrink with it", () => {
  // A cone of 0.5 degrees: a ramp of 0.7 meV, whose position the budget does not take for exact.
  const facts = { ...FACTS, acceptanceHalfAngleDeg: 0.5, workFunctionEv: null };
  const { systematicEv, systematicTerms, floorEv } = predictRun(RATES, facts, WINDOWS).numbers!;
  assertClose(systematicEv, Math.hypot(...systematicTerms.map((term) => term.standardUncertaintyEv)), {
    relative: 1e-12,
  });
  assert.ok(systematicTerms.every(({ name }) => !name.includes("counting")));
  assert.ok(systematicTerms.some(({ name }) => name.includes("acceptance")));
  assertClose(floorEv, systematicEv, { relative: 1e-12 });
});

Deno.test("predictRun() has a floor as high as the fit is off where its budget does not cover that", () => {
  // As if the simulation had put in a work function 30 meV higher.
  const { floorEv, systematicTerms } = predictRun(RATES, {
    ...FACTS,
    workFunctionEv: FACTS.workFunctionEv! + 0.03,
  }, WINDOWS).numbers!;
  assertClose(floorEv, 0.03, { absolute: 1e-5 });
  assert.equal(systematicTerms[0].name, "the fit's model against the simulation");
});

Deno.test("predictRun() takes noise of the simulation neither for counting nor for structure", () => {
  // Smooth rates with standard errors as large as counting makes in a tenth of the time.
  const standardErrors = RATES.countsPerS.map((rate) => Math.sqrt(rate / 1));
  const noisy = predictRun({ ...RATES, standardErrors }, FACTS, WINDOWS).numbers!;
  assertClose(noisy.statisticalEv, numbers.statisticalEv, { relative: 0.01 });
  // Variance of the simulation over that of counting is 10 s in a channel x 1 / s: sqrt(10) times the counting.
  noisy.edges.forEach((edge, i) => {
    const counting = Math.sqrt(edge.varianceTimeEv2S / WINDOWS[i].timeS);
    assertClose(
      edge.monteCarloEv,
      counting * Math.sqrt(WINDOWS[i].timeS / within(WINDOWS[i].fromEv, WINDOWS[i].toEv).length),
      {
        relative: 0.01,
      },
    );
  });
});

Deno.test("predictRun() says why when there is no edge in the windows", () => {
  const flat = predictRun({ ...RATES, countsPerS: energiesEv.map(() => DARK) }, FACTS, WINDOWS);
  assert.equal(flat.numbers, null);
  assert.equal(flat.verdict, "failed");
  assert.match(flat.reasons.join(), /no secondary cutoff was found/);
});
