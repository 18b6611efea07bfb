import assert from "node:assert/strict";
import fc from "fast-check";
import { InputError } from "../../src/base/mod.ts";
import { nearestLine } from "../../src/data/mod.ts";
import { measureWorkFunction, type WorkFunctionResult } from "../../src/edges/mod.ts";
import {
  countTwoEdges,
  expectedTwoEdges,
  measureTwoEdges,
  METAL,
  PHOTON_EV,
  type TwoEdges,
  twoEdgesRegion,
} from "../support/two_edges.ts";

/** The cutoff and the Fermi edge of {@link METAL} as recorded: W - W_A - e U, h nu - W_A - e U. */
const CUTOFF_EV = 9.7;
const FERMI_EDGE_EV = PHOTON_EV + 4.6;

type Change = NonNullable<Parameters<typeof measureTwoEdges>[2]>;
type Case = readonly [what: string, verdict: "doubtful" | "failed", reason: RegExp, shape: TwoEdges, Change];

const channelAt = (energiesEv: Float64Array, energyEv: number): number =>
  energiesEv.findIndex((energy) => energy >= energyEv);
const withOne =
  (energyEv: number, count: (old: number) => number): Required<Change>["counts"] => (drawn, energiesEv) => {
    const channel = channelAt(energiesEv, energyEv);
    return drawn.with(channel, count(drawn[channel]));
  };

const CASES: readonly Case[] = [
  ["the axis is read in the wrong direction", "failed", /wrong direction; try --axis binding/, METAL, {
    counts: (drawn) => drawn.toReversed(),
  }],
  ["the counts are constant", "failed", /no secondary cutoff/, METAL, { counts: (drawn) => drawn.fill(100) }],
  ["there is no edge", "failed", /no secondary cutoff/, { ...METAL, top: 0, states: 0, dark: 50 }, {}],
  ["there is only the cutoff", "failed", /neither a Fermi edge nor|valence-band edge did not/, {
    ...METAL,
    states: 0,
  }, {}],
  [
    "the window starts on the cutoff",
    "failed",
    /starts on the cutoff/,
    { ...METAL, marginsEv: [0.1, 1] },
    {},
  ],
  ["the window ends on the Fermi edge", "failed", /./, { ...METAL, marginsEv: [0.8, 0.05] }, {}],
  ["the top is cut off", "doubtful", /saturated; measure with less light|saturated/, METAL, {
    counts: (drawn) => drawn.map((count) => Math.min(count, 12000)),
  }],
  ["a channel on the cutoff was lost", "doubtful", /dropouts.*secondary cutoff; the mean of their/, METAL, {
    counts: withOne(CUTOFF_EV + 0.3, () => 0),
  }],
  ["a spike lies at the Fermi edge", "doubtful", /spikes.*Fermi edge; the mean of their/, METAL, {
    counts: withOne(FERMI_EDGE_EV + 0.2, () => 4000),
  }],
  ["half of the electrons are lost to dead time", "doubtful", /lost to dead time/, METAL, {
    region: { deadTimeS: 2e-5, countingTimeS: 1 },
  }],
  ["the channels are too wide", "doubtful", /channels lie on the secondary cutoff/, {
    ...METAL,
    stepEv: 0.06,
    fwhmEv: 0.05,
  }, {}],
  ["the Fermi edge is not where the bias puts it", "doubtful", /charging/, METAL, {
    region: { biasV: -8.75 },
  }],
  [
    "the bias is stated 0.6 V too large",
    "failed",
    /like a Fermi edge lies 0\.(59|6\d) eV below where/,
    METAL,
    {
      region: { biasV: -9.6 },
    },
  ],
  [
    "the bias is stated 0.8 V too small",
    "failed",
    /like a Fermi edge lies 0\.(79|8\d) eV above where/,
    METAL,
    {
      region: { biasV: -8.2 },
    },
  ],
  ["the analyzer work function is wrong", "failed", /like a Fermi edge lies 0\.(59|6\d) eV below/, METAL, {
    region: { analyzerWorkFunctionEv: 3.8 },
  }],
  ["few counts lie at a Fermi edge of wrong bias", "failed", /like a Fermi edge/, { ...METAL, states: 20 }, {
    region: { biasV: -10 },
  }],
  [
    "a valence band begins above the Fermi level",
    "failed",
    /maximum would lie 0\.\d+ eV above the Fermi level/,
    {
      ...METAL,
      gapEv: 0.3,
      states: 3000,
    },
    { region: { biasV: -8 } },
  ],
  [
    "the stated resolution is wider than the edges",
    "doubtful",
    /200 meV FWHM is wider than the Fermi edge/,
    METAL,
    {
      region: { resolutionFwhmEv: 0.2 },
    },
  ],
  ["the Fermi edge is wider than the resolution", "doubtful", /as wide as temperature/, METAL, {
    region: { resolutionFwhmEv: 0.03 },
  }],
  ["the cutoff lies at the analyzer's own limit", "doubtful", /analyzer's own limit; apply a larger/, {
    ...METAL,
    patches: [[4.8, 1]],
    biasV: -0.02,
    marginsEv: [0.4, 1],
  }, {}],
  ["the bias is not known and the cutoff lies at zero", "doubtful", /whose bias is not known/, {
    ...METAL,
    patches: [[4.8, 1]],
    biasV: 0,
    marginsEv: [0.35, 1],
  }, { region: { biasV: null, asRecorded: false } }],
  ["a satellite lies over the Fermi edge", "doubtful", /satellite line of the lamp may lie over/, {
    ...METAL,
    satellites: [[1.869, 0.015], [2.524, 0.005]],
    bandEv: 2,
    fwhmEv: 0.2,
    top: 2e5,
    states: 3e4,
    marginsEv: [0.8, 0.7],
  }, {}],
  ["the surface has two patches", "doubtful", /two, at 9\.(40\d|399) and 9\.(70\d|699) eV.*patches/, {
    ...METAL,
    patches: [[4.8, 0.5], [5.1, 0.5]],
  }, {}],
];

for (const [what, verdict, reason, shape, change] of CASES) {
  Deno.test(`measureWorkFunction() gives a reason and no confident number when ${what}`, () => {
    const result = measureTwoEdges(shape, 1, change);
    assert.equal(result.verdict, verdict, result.reasons.join("\n"));
    assert.match(result.reasons.join("\n"), reason);
    assert.equal(result.workFunctionEv === null, verdict === "failed");
  });
}

Deno.test("measureWorkFunction() takes the work function of the lower patch, and only where there are two", () => {
  const two = measureTwoEdges({ ...METAL, patches: [[4.8, 0.3], [5.1, 0.7]] }, 1);
  const { value, standardUncertainty } = two.workFunctionEv!;
  assert.ok(Math.abs(value - 4.8) < 4 * standardUncertainty && standardUncertainty < 0.02, `${value}`);
  assert.ok(Math.abs(two.patches!.upperEv.value - CUTOFF_EV) < 4 * two.patches!.upperEv.standardUncertainty);
  assert.ok(
    Math.abs(two.patches!.upperShare.value - 7 / 3) < 4 * two.patches!.upperShare.standardUncertainty,
  );
  assert.ok(two.patches!.bicGain > 10);
  assert.equal(measureTwoEdges(METAL, 1).patches, null);
});

Deno.test("measureWorkFunction() finds a weak patch below the main cutoff", () => {
  const { patches, verdict } = measureTwoEdges({ ...METAL, patches: [[4.3, 0.1], [5.1, 0.9]] }, 1);
  assert.equal(verdict, "doubtful");
  assert.ok(Math.abs(patches!.lowerEv.value - 8.9) < 4 * patches!.lowerEv.standardUncertainty);
});

/** {@link METAL} with Gaussian bands 1.5 eV (of this width and height) and 3 eV below the Fermi level, and no states there. */
function measureBand(sigmaEv: number, peak: number): WorkFunctionResult {
  return measureTwoEdges({ ...METAL, states: 0 }, 1, {
    counts: (drawn, energiesEv) => {
      const bands = energiesEv.map((energy) => {
        const x = energy - FERMI_EDGE_EV;
        return peak *
          (Math.exp(-0.5 * ((x + 1.5) / sigmaEv) ** 2) + 2 * Math.exp(-0.5 * ((x + 3) / 0.4) ** 2));
      });
      return countTwoEdges(bands, 2).map((count, i) => count + drawn[i]);
    },
  });
}

Deno.test("measureWorkFunction() doubts a valence-band maximum whose two scales disagree", () => {
  // Line at the steepest point of a Gaussian, 1 sigma out, meets zero 2 sigma out; its logarithm steepens on to the background.
  const wide = measureBand(0.3, 1000);
  assert.equal(wide.verdict, "doubtful");
  assert.match(
    wide.reasons.join(),
    /on a logarithmic scale lie 0\.\d\d eV apart, \d+ standard uncertainties/,
  );
  const { value, standardUncertainty } = wide.valenceBandMaximumEv!;
  assert.ok(Math.abs(value - 0.9) < 4 * standardUncertainty, `${value}`);
  // A straight edge: both agree.
  const straight = measureTwoEdges({ ...METAL, gapEv: 1.5, states: 3000 }, 1);
  assert.deepEqual([straight.verdict, straight.reasons], ["good", []]);
});

Deno.test("measureWorkFunction() doubts, but does not refuse, a band nearly as narrow as a Fermi edge", () => {
  const narrow = measureBand(0.1, 3000);
  assert.equal(narrow.verdict, "doubtful");
  assert.match(narrow.reasons.join(), /like a Fermi edge .*; if it is not, it is a narrow band/);
  assert.ok(Math.abs(narrow.workFunctionEv!.value - 5.1) < 4 * narrow.workFunctionEv!.standardUncertainty);
});

Deno.test("measureWorkFunction() refuses steps too coarse for an edge, as of meV read as eV", () => {
  const { energiesEv, counts } = expectedTwoEdges(METAL);
  const region = twoEdgesRegion(METAL, energiesEv.map((energy) => 1000 * energy), counts);
  assert.throws(
    () => measureWorkFunction([region], { knownLine: nearestLine }),
    (error) =>
      error instanceof InputError &&
      error.message ===
        "Cannot fit spectrum as the energy step must be <= 1 eV (too coarse for any edge; are the " +
          'energies in eV?): current value is "20 eV" (at invented)',
  );
  // Beside a region that can be fitted a coarse one is left out.
  const fine = twoEdgesRegion(METAL, energiesEv, countTwoEdges(counts, 1));
  assert.equal(measureWorkFunction([region, fine], { knownLine: nearestLine }).verdict, "good");
});

Deno.test("measureWorkFunction() warns of each stated value that the file contradicts, and of no other", () => {
  const warnings = (options: Required<Change>["options"]): string[] =>
    measureTwoEdges(METAL, 1, { options }).warnings.filter(({ code }) => code === "overridden")
      .map(({ message }) => message);
  assert.deepEqual(warnings({ biasV: -9.1, temperatureK: 77, resolutionFwhmEv: 0.09 }), [
    "bias -9.1 V is used as stated, but the file says -9 V",
    "temperature 77 K is used as stated, but the file says 300 K",
    "resolution 0.09 eV is used as stated, but the file says 0.08 eV",
  ]);
  assert.match(warnings({ photonEnergyEv: 21.3 }).join(), /^photon energy 21\.3 eV .* the file says 21\.218/);
  assert.match(warnings({ axis: "binding" }).join(), /^a binding energy axis .* says kinetic energies$/);
  assert.deepEqual(
    warnings({ biasV: -9, photonEnergyEv: 21.218, axis: "kinetic", acceptanceHalfAngleDeg: 0 }),
    [],
  );
});

Deno.test("measureWorkFunction() says that two regions hold the same counts", () => {
  const { energiesEv, counts } = expectedTwoEdges(METAL);
  const region = twoEdgesRegion(METAL, energiesEv, countTwoEdges(counts, 1));
  const { verdict, reasons } = measureWorkFunction(
    [{ ...region, file: "a.csv" }, { ...region, file: "b.csv" }],
    { knownLine: nearestLine },
  );
  assert.equal(verdict, "doubtful");
  assert.match(reasons.join(), /b\.csv holds exactly the counts of a\.csv/);
});

Deno.test("measureWorkFunction() refuses regions of different bias or axis", () => {
  const { energiesEv, counts } = expectedTwoEdges(METAL);
  const region = twoEdgesRegion(METAL, energiesEv, counts);
  for (
    const [other, rule] of [
      [{ biasV: -8 }, /all must have the same bias/],
      [{ energyKind: "binding" }, /all must have one kind of energy axis/],
    ] as const
  ) {
    assert.throws(
      () => measureWorkFunction([region, { ...region, ...other }], { knownLine: nearestLine }),
      (error) => error instanceof InputError && rule.test(error.message),
    );
  }
});

Deno.test("measureWorkFunction() corrects counts for a known dead time", () => {
  // Non-paralyzable counter: m = n / (1 + n tau), so that up to a tenth of 20 000 counts in 1 s is lost.
  const deadTimeS = 6e-6;
  const lose = (drawn: Float64Array) => drawn.map((count) => count / (1 + count * deadTimeS));
  const result = measureTwoEdges(METAL, 1, { counts: lose, region: { deadTimeS, countingTimeS: 1 } });
  const whole = measureTwoEdges(METAL, 1);
  assert.equal(result.verdict, "good");
  assert.ok(Math.abs(result.workFunctionEv!.value - whole.workFunctionEv!.value) < 1e-6);
  assert.match(
    result.warnings.map((warning) => warning.message).join(),
    /lost to dead time at the top; corrected/,
  );
});

Deno.test("measureWorkFunction() uses the stated resolution where no Fermi edge gives it", () => {
  const gap: TwoEdges = { ...METAL, gapEv: 1.5, states: 3000 };
  const shapeOf = ({ budget }: WorkFunctionResult): number =>
    budget.find((term) => /width not explained/.test(term.name))!.standardUncertaintyEv;
  const known = measureTwoEdges(gap, 1);
  const unknown = measureTwoEdges(gap, 1, { region: { resolutionFwhmEv: null } });
  assert.ok(shapeOf(known) < 0.002);
  assert.ok(Math.abs(shapeOf(unknown) - METAL.fwhmEv / 2.3548 / 2) < 0.001);
});

Deno.test("measureWorkFunction() gives the valence-band maximum on both scales when there is a gap", () => {
  const result = measureTwoEdges({ ...METAL, gapEv: 1.5, states: 3000, fwhmEv: 0.1 }, 1);
  assert.equal(result.fermiEdgeEv, null);
  const linear = result.valenceBandMaximumEv!;
  const logarithmic = result.valenceBandMaximumLogarithmicEv!;
  assert.ok(Math.abs(linear.value - 1.5) < 3 * linear.standardUncertainty, `${linear.value}`);
  // The Gaussian rounds a straight edge by 0.4 sigma x slope at its foot: the logarithmic line ends above.
  assert.ok(logarithmic.value < linear.value);
  const difference = (linear.value - logarithmic.value).toFixed(3);
  assert.match(
    result.warnings.map((warning) => warning.message).join(),
    new RegExp(`logarithmic scale lies ${difference} eV above`),
  );
});

/** Four standard uncertainties: one false alarm in 16 000 where the uncertainty is right and the error normal. */
const CONFIDENT = 4;

Deno.test("measureWorkFunction() is never confidently wrong on generated spectra", () => {
  const shapes = fc.noBias(fc.record({
    workFunctionEv: fc.double({ min: 3.5, max: 6, noNaN: true }),
    biasV: fc.double({ min: -15, max: -2, noNaN: true }),
    fwhmEv: fc.double({ min: 0.02, max: 0.3, noNaN: true }),
    temperatureK: fc.double({ min: 20, max: 600, noNaN: true }),
    logTop: fc.double({ min: 2, max: 5, noNaN: true }),
    stateShare: fc.double({ min: 0.01, max: 0.5, noNaN: true }),
    replicate: fc.nat(1e6),
  }));
  let answers = 0;
  fc.assert(
    fc.property(shapes, ({ workFunctionEv, biasV, fwhmEv, temperatureK, logTop, stateShare, replicate }) => {
      const top = 10 ** logTop;
      const shape = { ...METAL, patches: [[workFunctionEv, 1]], top, states: stateShare * top } as const;
      const stepEv = Math.max(0.008, fwhmEv / 5);
      const result = measureTwoEdges({ ...shape, biasV, fwhmEv, temperatureK, stepEv }, replicate);
      const answer = result.workFunctionEv;
      assert.equal(answer === null, result.verdict === "failed");
      if (result.verdict !== "good") assert.ok(result.reasons.length > 0);
      if (answer === null || result.verdict === "doubtful") return;
      answers++;
      const pull = (answer.value - workFunctionEv) / answer.standardUncertainty;
      assert.ok(Math.abs(pull) < CONFIDENT, `${answer.value} +- ${answer.standardUncertainty}`);
    }),
    { numRuns: 40, seed: 4, endOnFailure: true },
  );
  assert.ok(answers > 20, `only ${answers} of 40 spectra gave a good answer`);
});

Deno.test("measureWorkFunction() does not throw and calls nothing good when counts are noise", () => {
  const noise = fc.array(fc.nat(1000), { minLength: 30, maxLength: 60 });
  fc.assert(
    fc.property(noise, (list) => {
      const counts = Float64Array.from(list);
      const energiesEv = counts.map((_, i) => 9 + 0.05 * i);
      const region = twoEdgesRegion(METAL, energiesEv, counts);
      const { verdict } = measureWorkFunction([region], { knownLine: nearestLine });
      assert.notEqual(verdict, "good");
    }),
    { numRuns: 5, seed: 5, endOnFailure: true },
  );
});
