import assert from "node:assert/strict";
import { sampleAlias, streamState, Xoshiro128pp } from "../../src/rng/mod.ts";
import {
  detectionTable,
  emptyBatchTally,
  energyGrid,
  historyRunner,
  layerStack,
  type PairTables,
  pairTables,
  type PairTablesInput,
  photonSource,
  TallyAccumulator,
} from "../../src/transport/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { assertMean } from "../support/assert_mean.ts";
import { FALSE_ALARM, histogramProbability } from "../support/chi_square.ts";
import { sumOf, tallyMean } from "../support/tally_mean.ts";

/** Constant density of states at T = 0, one mean free path of 1 nm. */
function flatTables(
  workFunctionEv: number,
  photonEnergyEv: number,
  changes: Partial<PairTablesInput> = {},
): PairTables {
  return pairTables({
    grid: energyGrid(0.01, { photonEnergyEv, workFunctionEv, thermalEnergyEv: 0 }),
    states: () => 1,
    bandBottomBelowFermiEv: 8,
    thermalEnergyEv: 0,
    inelasticMeanFreePath: { kind: "function", lengthNm: () => 1 },
    transportMeanFreePathNm: null,
    ...changes,
  });
}

/** Bin of the electron of energy E = BIN + 1/2 steps that is followed. */
const BIN = 1000;
const SAMPLES = 400_000;

/** One event after another of an electron in BIN: bins of the electron and of the struck one, and the hole's depth. */
function sampleEvents(): { kept: Float64Array; means: number[]; errors: number[] } {
  const tables = flatTables(0, 10.005);
  const generator = new Xoshiro128pp(streamState(2, "transport", 0));
  const kept = new Float64Array(BIN + 30);
  const sums = [0, 0, 0];
  const squares = [0, 0, 0];
  for (let i = 0; i < SAMPLES; i++) {
    const transfer = sampleAlias(tables.lossTable, tables.lossOffset[BIN], tables.lossCount[BIN], generator);
    const struck = sampleAlias(
      tables.struckTable,
      tables.struckOffset[transfer],
      tables.struckCount[transfer],
      generator,
    );
    kept[BIN - transfer]++;
    // Centers of bins, so that the three energies add up to BIN + 1/2.
    [BIN - transfer + 0.5, struck + 0.5, transfer - struck - 0.5].forEach((value, j) => {
      sums[j] += value;
      squares[j] += value * value;
    });
  }
  const means = sums.map((sum) => sum / SAMPLES);
  const errors = squares.map((square, j) => Math.sqrt((square / SAMPLES - means[j] ** 2) / SAMPLES));
  return { kept, means, errors };
}

Deno.test("pairTables() shares the energy of constant states at T = 0 equally: E/3 to each electron and to the hole", () => {
  // E. Kane, Phys. Rev. 159, 624 (1967): random-k approximation; means derived from the density 2(E - E')/E^2.
  const { means, errors } = sampleEvents();
  ["electron", "struck electron", "hole"].forEach((name, j) => {
    // One false alarm in 150 000 for each of the three.
    assertMean(means[j], errors[j], (BIN + 0.5) / 3, name);
    assert.throws(() => assertMean(means[j], errors[j], (1.01 * (BIN + 0.5)) / 3, `${name}, 1 % too high`));
  });
});

Deno.test("pairTables() leaves an electron of constant states at T = 0 with the density 2(E - E')/E^2", () => {
  const { kept } = sampleEvents();
  const expectation = (energy: number): Float64Array =>
    // integral of the density over each bin
    kept.map((_, k) =>
      SAMPLES * (Math.max(0, energy - k) ** 2 - Math.max(0, energy - k - 1) ** 2) / energy ** 2
    );
  // One false alarm in a million; the electron's own bin holds half a step of energy, never a final state.
  assert.ok(histogramProbability(kept, expectation(BIN + 0.5)) > FALSE_ALARM);
  assert.ok(histogramProbability(kept, expectation(1.02 * (BIN + 0.5))) < FALSE_ALARM, "2 % more energy");
});

Deno.test("pairTables() lets the mean free path of constant states fall as v/E^2", () => {
  // Rate = C E^2/2 for constant states at T = 0, so lambda is proportional to sqrt(E + bottom)/E^2: the law of
  // J. Quinn, R. Ferrell, Phys. Rev. 112, 812 (1958) times the speed.
  const tables = flatTables(0.01, 10, {
    inelasticMeanFreePath: { kind: "reference", energyEv: 5.005, lengthNm: 2 },
  });
  for (const bin of [50, 100, 400, 500, 900]) {
    const energyEv = (bin + 0.5) * 0.01;
    const expected = 2 * Math.sqrt((energyEv + 8) / 13.005) * (5.005 / energyEv) ** 2;
    // In whole steps the rate is k(k + 1)/2 = (E^2 - 1/4)/2, here and at the reference.
    const relative = 0.26 * (1 / bin ** 2 + 1 / 500 ** 2);
    assertClose(tables.inelasticMeanFreePathNm[bin], expected, { relative }, `${energyEv} eV`);
  }
  assert.equal(tables.inelasticMeanFreePathNm[0], Infinity, "nothing to scatter into");
});

Deno.test("pairTables() adds the rates of elastic and inelastic events", () => {
  // Matthiessen's rule: 1/1 + 1/3 = 4/3, of which 3/4 is inelastic.
  const tables = flatTables(4, 10, { transportMeanFreePathNm: 3 });
  assertClose(tables.totalMeanFreePathNm[500], 0.75, { relative: 1e-14 });
  assertClose(tables.inelasticShare[500], 0.75, { relative: 1e-14 });
});

Deno.test("pairTables() refuses mean free paths that are not positive", () => {
  assert.throws(() => flatTables(4, 10, { transportMeanFreePathNm: 0 }), {
    name: "RangeError",
    message: "Cannot build pair tables as transportMeanFreePathNm must be > 0 nm: current value is 0 nm",
  });
  const negative = { kind: "function", lengthNm: (energyEv: number) => 5 - energyEv } as const;
  assert.throws(() => flatTables(4, 10, { inelasticMeanFreePath: negative }), {
    name: "RangeError",
    message:
      /^Cannot build pair tables as the inelastic mean free path must be > 0 nm: current value is -?0\S* nm at /,
  });
});

/** Integral of F from 0 to E for E0 = 1, up to a constant. */
function collisionsBelow(energy: number): number {
  const root = Math.sqrt(17);
  const [falling, rising] = [(3 - root) / 2, (3 + root) / 2];
  return (4 / root) * (energy ** falling / falling - energy ** rising / rising);
}

Deno.test("historyRunner() gives the exact collision density of a cascade in an infinite medium", () => {
  // F'' = 4 F/E^2 with F(E0) = 0, F'(E0) = -4/E0^2 (constant states, T = 0; both electrons of every event followed):
  // F(E) = 4/(sqrt(17) E0) [(E/E0)^((1 - sqrt 17)/2) - (E/E0)^((1 + sqrt 17)/2)].
  // Values for E0 = 1 computed outside from that solution.
  const published = [[0.05, 104.342], [0.1, 35.3473], [0.3, 6.31385], [0.7, 1.30417]];
  const tables = flatTables(0.3, 10.005);
  const { grid } = tables;
  const excitation = new Float64Array(grid.count);
  excitation[BIN] = 1;
  const source = photonSource([{ weight: 1, absorptionDepthNm: 1e9, excitation }]);
  assert.ok(source);
  const run = historyRunner(
    source,
    layerStack([{ tables, thicknessNm: Infinity }]),
    [{
      share: 1,
      detection: detectionTable({
        grid,
        workFunctionEv: 0.3,
        bandBottomBelowFermiEv: 8,
        barrier: "classical",
        accelerationEv: 0,
        acceptanceHalfAngleRad: Math.PI / 2,
        emissionAngleRad: 0,
        cellsPerPath: 1,
        deepestPaths: 1,
      }),
    }],
  );
  const sums = new TallyAccumulator(grid.count);
  for (let batch = 0; batch < 128; batch++) {
    const tally = emptyBatchTally(grid.count);
    run(3, batch, tally);
    sums.add(batch, tally);
  }
  const tally = sums.result();
  assert.ok(
    tally.groups.every((group) => group.events[BIN] === group.histories),
    "every photoelectron scatters once",
  );
  for (const [at, density] of published) {
    const slope = (collisionsBelow(at * 1.001) - collisionsBelow(at * 0.999)) / (0.002 * at);
    assertClose(slope, density, { relative: 1e-5 }, `F(${at})`);
    const first = Math.round(0.95 * at * BIN);
    const end = Math.round(1.05 * at * BIN);
    const exact = collisionsBelow(end / (BIN + 0.5)) - collisionsBelow(first / (BIN + 0.5));
    const { mean, standardError } = tallyMean(tally, (group) => sumOf(group.events, first, end));
    // One false alarm in 30 000 for each window (Student's t of 63 degrees of freedom); errors below 0.6 %.
    assertMean(mean, standardError, exact, `collisions about ${at} E0`);
    assert.throws(() => assertMean(mean, standardError, 1.03 * exact), `3 % more at ${at}`);
  }
});
