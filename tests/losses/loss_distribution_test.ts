import assert from "node:assert/strict";
import fc from "fast-check";
import {
  lossAlias,
  lossDistribution,
  type LossModel,
  lossQuantileEv,
  oscillatorInverseMeanFreePath,
  tougaardCrossSection,
} from "../../src/losses/mod.ts";
import { sampleAlias, streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { FALSE_ALARM, histogramProbability } from "../support/chi_square.ts";
import { crossing, integrate } from "../support/integrate.ts";

type Tougaard = Extract<LossModel, { kind: "tougaard" }>;

function tougaard(bEv2: number, cEv2: number, dEv2: number | null, onsetEv = 0): Tougaard {
  return { kind: "tougaard", bEv2, cEv2, dEv2, onsetEv };
}

// S. Tougaard, Surf. Interface Anal. 11, 453 (1988) and 25, 137 (1997): parameters from memory, so the checks below are of the
// forms. Position and height of the maximum, full width at half maximum, integral: closed forms and numbers by an
// independent program.
const CLASSES = [
  ["universal", tougaard(2866, 1643, null), 23.4023, 0.0139760, 49.2157, 0.872185],
  ["polymers", tougaard(434, 551, 436), 21.1643, 0.0446061, 19.4477, 1.097261],
  ["SiO2", tougaard(325, 542, 275), 21.8076, 0.0524241, 15.9195, 1.087058],
  ["SiO2, normalized", tougaard(299, 542, 275), 21.8076, 0.0482302, 15.9195, 1.000093],
  ["Si", tougaard(132, 325, 96), 17.3626, 0.0777053, 9.58887, 1.006056],
  ["Ge", tougaard(73, 260, 62), 15.6441, 0.0741249, 7.74183, 0.785094],
  ["Al", tougaard(16.5, 230, 4.5), 15.1287, 0.242069, 2.11870, 0.771617],
] as const;

Deno.test.each(CLASSES)(
  "tougaardCrossSection() of %s has its maximum, width and integral",
  (_, { bEv2, cEv2, dEv2 }, peakEv, peak, fwhmEv, integral) => {
    const k = (loss: number): number => tougaardCrossSection(bEv2, cEv2, dEv2, loss);
    assertClose(k(peakEv), peak, { relative: 3e-6 });
    assert.ok(k(peakEv) > k(peakEv - 1e-3) && k(peakEv) > k(peakEv + 1e-3));
    const width = crossing(k, peak / 2, peakEv, 200) - crossing(k, peak / 2, 0, peakEv);
    assertClose(width, fwhmEv, { relative: 1e-5 });
    // The tail beyond 1e4 eV is B/(2 T^2) to first order.
    const whole = integrate(k, [0, 10, 14, 15, 15.2, 16, 20, 40, 100, 1000, 1e4]) + bEv2 / (2 * 1e8);
    assertClose(whole, integral, { absolute: 2e-6 });
  },
);

Deno.test.each(CLASSES)(
  "lossDistribution() of %s is normalized and says what it was before",
  (_, model, _peakEv, _peak, _fwhmEv, integral) => {
    const losses = lossDistribution(model, { primaryEnergyEv: 1e5, maxLossEv: 5000, stepEv: 0.5 });
    assertClose(losses.probabilities.reduce((sum, p) => sum + p, 0), 1, { absolute: 1e-12 });
    // The closed integral less the tail B/(2 T^2) above 5000 eV.
    assertClose(losses.integralBefore, integral - model.bEv2 / (2 * 5000 ** 2), { absolute: 2e-6 });
  },
);

Deno.test("lossDistribution() of the two-parameter form has its median at sqrt(C)", () => {
  // Closed form: the integral below T is B T^2/(2 C (C + T^2)); cut off at the largest loss M, the median follows.
  const largest = 3000;
  const losses = lossDistribution(tougaard(2866, 1643, null), {
    primaryEnergyEv: 3000,
    maxLossEv: largest,
    stepEv: 0.1,
  });
  const whole = largest ** 2 / (1643 + largest ** 2);
  for (const share of [0.05, 0.25, 0.5, 0.75, 0.9]) {
    const below = share * whole;
    assertClose(lossQuantileEv(losses, share), Math.sqrt((1643 * below) / (1 - below)), { relative: 1e-5 });
  }
  assertClose(lossQuantileEv(losses, 0.5), 40.534, { relative: 2e-4 });
});

Deno.test("lossDistribution() has no loss below the onset, and integrals as published with a gap", () => {
  // Onsets of about 9 eV for SiO2 and 4 eV for polymers: integrals above them by an independent program, 1.03684, 1.08562.
  for (
    const [model, integral] of [[tougaard(325, 542, 275, 9), 1.03684], [
      tougaard(434, 551, 436, 4),
      1.08562,
    ]] as const
  ) {
    const losses = lossDistribution(model, { primaryEnergyEv: 1e5, maxLossEv: 5000, stepEv: 0.3 });
    assertClose(losses.integralBefore, integral - model.bEv2 / (2 * 5000 ** 2), { absolute: 1e-5 });
    for (let bin = 0; (bin + 1) * 0.3 <= model.onsetEv; bin++) assert.equal(losses.probabilities[bin], 0);
    assert.ok(lossQuantileEv(losses, 1e-9) >= model.onsetEv - 0.3);
  }
});

Deno.test("lossDistribution() ends at the largest loss", () => {
  const losses = lossDistribution(tougaard(2866, 1643, null), {
    primaryEnergyEv: 100,
    maxLossEv: 20.05,
    stepEv: 0.1,
  });
  assert.equal(losses.probabilities.length, 201);
  // Closed form as above with the end at 20.05 eV.
  assertClose(losses.integralBefore, (2866 * 20.05 ** 2) / (2 * 1643 * (1643 + 20.05 ** 2)), {
    relative: 1e-12,
  });
});

Deno.test("lossDistribution() of a table is exact for straight lines, kinks inside bins included", () => {
  // A triangle from 1 to 5 eV with its top at 2 eV: mean (1 + 2 + 5)/3, median 5 - sqrt(6), by elementary geometry.
  const losses = lossDistribution({ kind: "table", lossesEv: [1, 2, 5], densities: [0, 7, 0] }, {
    primaryEnergyEv: 1000,
    maxLossEv: 50,
    stepEv: 0.03,
  });
  assertClose(losses.meanLossEv, 8 / 3, { relative: 1e-12 });
  assertClose(losses.integralBefore, 14, { relative: 1e-12 });
  assertClose(lossQuantileEv(losses, 0.5), 5 - Math.sqrt(6), { absolute: 1e-4 });
});

Deno.test("oscillatorInverseMeanFreePath() equals the integral over momentum transfer that defines it", () => {
  // R. Ritchie, A. Howie, Philos. Mag. 36, 463 (1977): Simpson's rule in ln q against the closed form.
  const check = (w: number, g: number, dispersion: number, energyEv: number, share: number): void => {
    const loss = share * energyEv;
    const least = (Math.sqrt(energyEv) - Math.sqrt(energyEv - loss)) ** 2;
    const most = (Math.sqrt(energyEv) + Math.sqrt(energyEv - loss)) ** 2;
    const energyLossFunction = (lnQ: number): number => {
      const shifted = w + dispersion * Math.exp(2 * lnQ);
      return (0.7 * w * w * g * loss) / ((shifted ** 2 - loss ** 2) ** 2 + (g * loss) ** 2);
    };
    const direct = integrate(energyLossFunction, [0.5 * Math.log(least), 0.5 * Math.log(most)], 4000) /
      (Math.PI * 0.0529177210544 * energyEv);
    assertClose(
      oscillatorInverseMeanFreePath([{ energyEv: w, fwhmEv: g, strength: 0.7 }], dispersion, energyEv, loss),
      direct,
      { relative: 1e-6, absolute: 1e-12 },
      `w ${w}, g ${g}, dispersion ${dispersion}, E ${energyEv}, T ${loss}`,
    );
  };
  fc.assert(
    fc.property(
      fc.double({ min: 3, max: 60, noNaN: true }),
      fc.double({ min: 2, max: 40, noNaN: true }),
      fc.double({ min: 0, max: 1, noNaN: true }),
      fc.double({ min: 50, max: 2000, noNaN: true }),
      fc.double({ min: 0.01, max: 0.95, noNaN: true }),
      check,
    ),
    { seed: 1, numRuns: 60 },
  );
});

Deno.test("oscillatorInverseMeanFreePath() without dispersion obeys the sum rule of the optical energy-loss function", () => {
  // Integral of Im(-1/eps)/T over T is pi/2 for a metal (Kramers-Kronig); without dispersion K is Im(-1/eps) times
  // ln(q+/q-)/(pi a0 E), so that dividing by that factor must give the sum rule whatever the oscillators.
  const terms = [{ energyEv: 10, fwhmEv: 4, strength: 0.3 }, { energyEv: 25, fwhmEv: 12, strength: 0.7 }];
  const energyEv = 1e6;
  const overLoss = (loss: number): number => {
    const [root, rest] = [Math.sqrt(energyEv), Math.sqrt(energyEv - loss)];
    const factor = 2 * Math.log((root + rest) / Math.sqrt(loss)) / (Math.PI * 0.0529177210544 * energyEv);
    return oscillatorInverseMeanFreePath(terms, 0, energyEv, loss) / (factor * loss);
  };
  assertClose(integrate(overLoss, [1e-6, 5, 10, 20, 50, 200, 2000, 2e4]), Math.PI / 2, { relative: 1e-4 });
});

Deno.test("oscillatorInverseMeanFreePath() of the aluminum plasmon explains most of its tabulated mean free path", () => {
  // 2.12 nm at 992.3 eV above the Fermi level, 11.2 eV above the band bottom: S. Tanuma, C. Powell, D. Penn, Surf. Interface Anal.
  // 43, 689 (2011). The plasmon (15.0 eV, from memory) leaves out core electrons, so the path must come out longer, by less
  // than a third.
  const plasmon = [{ energyEv: 15, fwhmEv: 1, strength: 1 }];
  const path = 1 / lossDistribution(
    { kind: "oscillators", terms: plasmon, dispersion: 1, onsetEv: 0 },
    { primaryEnergyEv: 1003.5, maxLossEv: 990, stepEv: 0.5 },
  ).integralBefore;
  assert.ok(path > 2.12 && path < 1.33 * 2.12, String(path));
});

Deno.test("oscillatorInverseMeanFreePath() is zero for losses that are impossible", () => {
  const plasmon = [{ energyEv: 15, fwhmEv: 1, strength: 1 }];
  for (const loss of [0, -1, 100, 101, NaN]) {
    assert.equal(oscillatorInverseMeanFreePath(plasmon, 1, 100, loss), 0);
  }
});

Deno.test("lossAlias() draws losses with their probabilities", () => {
  const losses = lossDistribution(tougaard(132, 325, 96), {
    primaryEnergyEv: 1000,
    maxLossEv: 200,
    stepEv: 0.5,
  });
  const row = lossAlias(losses);
  const generator = new Xoshiro128pp(streamState(7, "transport", 0));
  const draws = 200_000;
  const observed = new Float64Array(row.length);
  for (let i = 0; i < draws; i++) observed[sampleAlias(row, 0, row.length, generator)]++;
  const chance = (model: Tougaard): number =>
    histogramProbability(
      observed,
      lossDistribution(model, { primaryEnergyEv: 1000, maxLossEv: 200, stepEv: 0.5 }).probabilities.map((p) =>
        p * draws
      ),
    );
  // False alarms: one in a million.
  assert.ok(chance(tougaard(132, 325, 96)) > FALSE_ALARM);
  // The twin: another width is rejected.
  assert.ok(chance(tougaard(132, 325, 120)) < FALSE_ALARM);
});

Deno.test("lossQuantileEv() runs from onset to end without falling", () => {
  const losses = lossDistribution(tougaard(325, 542, 275, 9), {
    primaryEnergyEv: 500,
    maxLossEv: 300,
    stepEv: 0.25,
  });
  fc.assert(
    fc.property(
      fc.double({ min: 0, max: 1, noNaN: true }),
      fc.double({ min: 0, max: 1, noNaN: true }),
      (a, b) => {
        const [low, high] = [Math.min(a, b), Math.max(a, b)].map((share) => lossQuantileEv(losses, share));
        assert.ok(low >= 9 - 0.25 && high <= 300 && low <= high);
      },
    ),
    { seed: 1, numRuns: 200 },
  );
});

Deno.test("lossDistribution() refuses impossible input with the rule and the value", () => {
  const options = { primaryEnergyEv: 1000, maxLossEv: 100, stepEv: 0.5 };
  const refuse = (model: LossModel, change: Partial<typeof options>, message: string): void =>
    assert.throws(() => lossDistribution(model, { ...options, ...change }), { name: "RangeError", message });
  refuse(
    tougaard(0, 1643, null),
    {},
    'Cannot use energy losses as bEv2 must be > 0 eV^2: current value is "0 eV^2"',
  );
  refuse(
    tougaard(16.5, 230, 4.5),
    { stepEv: 5 },
    'Cannot use energy losses as stepEv must be <= 4.24 eV for the narrowest peak: current value is "5 eV"',
  );
  refuse(
    tougaard(16.5, 230, 4.5),
    { maxLossEv: 1001 },
    'Cannot use energy losses as maxLossEv must be > 0 and <= 1000 eV: current value is "1001 eV"',
  );
  refuse(
    tougaard(16.5, 230, 4.5, 150),
    {},
    'Cannot use energy losses as some loss must be possible in 150..100 eV: current value is "integral 0"',
  );
  refuse(
    tougaard(16.5, 230, 4.5),
    { stepEv: 1e-4 },
    'Cannot use energy losses as stepEv must be > 0 and make at most 65534 bins: current value is "0.0001 eV"',
  );
  refuse(
    { kind: "table", lossesEv: [1, 1], densities: [1, 1] },
    {},
    'Cannot use energy losses as losses must be >= 0 eV and ascend: current value is "1 eV in row 2"',
  );
  refuse(
    { kind: "table", lossesEv: [1, 2], densities: [1, -1] },
    {},
    'Cannot use energy losses as densities must be >= 0: current value is "-1 in row 2"',
  );
  refuse(
    { kind: "oscillators", terms: [], dispersion: 1, onsetEv: 0 },
    {},
    "Cannot use energy losses as there must be at least one oscillator: current value is 0",
  );
  refuse(
    { kind: "oscillators", terms: [{ energyEv: 15, fwhmEv: 0, strength: 1 }], dispersion: 1, onsetEv: 0 },
    {},
    "Cannot use energy losses as fwhmEv of an oscillator must be > 0: current value is 0",
  );
});
