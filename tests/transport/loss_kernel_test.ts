import assert from "node:assert/strict";
import { chandrasekharH } from "../../src/losses/mod.ts";
import {
  detectionTable,
  directLines,
  emptyBatchTally,
  lossHistoryRunner,
  lossLayout,
  type LossMedium,
  type LossSource,
  type Tally,
  TallyAccumulator,
} from "../../src/transport/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { assertMean } from "../support/assert_mean.ts";
import { tallyMean } from "../support/tally_mean.ts";

const ROW_EV = 4;
const ROWS = 400;
const ENERGY_EV = 1402;

/** No barrier to speak of, every loss 20..20.5 eV, mean free path 1.6 nm at every energy. */
function medium(changes: {
  layers?: readonly { thicknessNm: number; lengthNm: number; transportNm: number | null }[];
  sources?: readonly Partial<LossSource>[];
  emissionAngleDeg?: number;
  halfAngleDeg?: number;
  maxLossEv?: number;
} = {}): LossMedium {
  const losses = new Float64Array(41);
  losses[40] = 1;
  const layers = changes.layers ?? [{ thicknessNm: Infinity, lengthNm: 1.6, transportNm: null }];
  return {
    layers: layers.map(({ thicknessNm, lengthNm, transportNm }) => ({
      thicknessNm,
      inelasticMeanFreePathNm: new Float64Array(ROWS).fill(lengthNm),
      transportMeanFreePathNm: transportNm,
      losses,
    })),
    sources: (changes.sources ?? [{}]).map((source) => ({
      layer: 0,
      energyEv: ENERGY_EV,
      perNm: 1e-3,
      directWeight: 1,
      ...source,
    })),
    detection: detectionTable({
      grid: { stepEv: ROW_EV, count: ROWS, vacuumBin: 1, thermalBins: 0 },
      workFunctionEv: 0.001,
      bandBottomBelowFermiEv: 0,
      barrier: "classical",
      accelerationEv: 0,
      acceptanceHalfAngleRad: ((changes.halfAngleDeg ?? 4) * Math.PI) / 180,
      emissionAngleRad: ((changes.emissionAngleDeg ?? 0) * Math.PI) / 180,
      cellsPerPath: 32,
      deepestPaths: 16,
    }),
    stepEv: 0.5,
    maxLossEv: changes.maxLossEv ?? 130,
  };
}

function run(of: LossMedium, seed: number, batches: number): Tally {
  const size = lossLayout(of).stride * of.sources.length;
  const histories = lossHistoryRunner(of);
  const sums = new TallyAccumulator(size);
  for (let batch = 0; batch < batches; batch++) {
    const tally = emptyBatchTally(size);
    histories(seed, batch, tally);
    sums.add(batch, tally);
  }
  return sums.result();
}

const radians = (degrees: number): number => (degrees * Math.PI) / 180;
const coneShare = (degrees: number): number => (1 - Math.cos(radians(degrees))) / 2;

// Straight line: I = I0 exp(-d/(lambda cos theta)), exact for a narrow acceptance (ISO 18115-1, attenuation length).
for (const [emissionAngleDeg, thicknessNm] of [[0, 1], [0, 3], [45, 1], [60, 2]] as const) {
  Deno.test(`directLines() attenuates by an overlayer of ${thicknessNm} nm at ${emissionAngleDeg} degrees`, () => {
    const substrate = { thicknessNm: Infinity, lengthNm: 1.6, transportNm: null };
    const [bare] = directLines(medium({ layers: [substrate], emissionAngleDeg, halfAngleDeg: 1 }));
    const [covered] = directLines(medium({
      layers: [{ thicknessNm, lengthNm: 2.5, transportNm: null }, substrate],
      sources: [{ layer: 1 }],
      emissionAngleDeg,
      halfAngleDeg: 1,
    }));
    const exact = Math.exp(-thicknessNm / (2.5 * Math.cos(radians(emissionAngleDeg))));
    // The table averages over cells of a 32nd of a mean free path.
    assertClose(covered.electrons / bare.electrons, exact, { relative: 2e-3 }, "attenuation");
    const twin = Math.exp(-thicknessNm / (2.6 * Math.cos(radians(emissionAngleDeg))));
    assert.throws(() => assertClose(covered.electrons / bare.electrons, twin, { relative: 2e-3 }));
  });
}

Deno.test("directLines() come from the mean escape depth lambda cos theta, 95 % from above that times ln 20", () => {
  for (const emissionAngleDeg of [0, 60]) {
    const [{ byDepth, electrons, depthCellNm }] = directLines(medium({ emissionAngleDeg, halfAngleDeg: 1 }));
    const escapeNm = 1.6 * Math.cos(radians(emissionAngleDeg));
    let mean = 0;
    let above = 0;
    byDepth.forEach((share, d) => {
      mean += (share * (d + 0.5) * depthCellNm) / electrons;
      if ((d + 1) * depthCellNm <= escapeNm * Math.log(20)) above += share / electrons;
    });
    assertClose(mean, escapeNm, { relative: 5e-3 }, "mean escape depth");
    assertClose(above, 0.95, { absolute: 0.01 }, "information depth");
    // Emission per solid angle of a half-space without elastic events: lambda cos(theta)/(4 pi).
    assertClose(electrons, 1e-3 * escapeNm * coneShare(1), { relative: 3e-3 }, "intensity");
  }
});

Deno.test("lossHistoryRunner() gives reduced partial intensities of 1 along straight lines", () => {
  // A uniform source and no deflection: as many electrons arrive after n losses as after none (W. Werner, Surf. Interface
  // Anal. 31, 141 (2001): C_n = C_0 for all n).
  const straight = medium();
  const tally = run(straight, 5, 256);
  const [{ electrons }] = directLines(straight);
  for (const n of [1, 2, 3, 4, 5]) {
    const { mean, standardError } = tallyMean(tally, (group) => group.events[n]);
    // One false alarm in 30 000 each (Student's t of 63 degrees of freedom).
    assertMean(mean, standardError, electrons, `${n} losses`);
    assert.throws(() => assertMean(mean, standardError, 1.1 * electrons), `${n} losses, 10 % more`);
  }
  // Losses of 20..20.5 eV each: the first plateau holds one loss, and nothing lies between 0 and 20 eV.
  const { lossBins } = lossLayout(straight);
  const between = tally.groups.reduce(
    (sum, group) => sum + group.forced.slice(1, 40).reduce((a, b) => a + b),
    0,
  );
  assert.equal(between, 0);
  const first = tallyMean(tally, (group) => group.forced.slice(41, 43).reduce((a, b) => a + b));
  assertMean(first.mean, first.standardError, electrons, "first loss");
  assert.ok(lossBins > 200);
});

// Isotropic scattering in a half-space with a uniform source: I(mu) = s lambda/(4 pi) sqrt(1 - w) H(mu, w).
// S. Chandrasekhar, Radiative Transfer (1950), ch. V.
for (const albedo of [0.1, 0.3, 0.5, 0.9]) {
  for (const emissionAngleDeg of [0, 60]) {
    Deno.test(`lossHistoryRunner() gives Chandrasekhar's H for albedo ${albedo} at ${emissionAngleDeg} degrees`, () => {
      const scattering = medium({
        layers: [{ thicknessNm: Infinity, lengthNm: 1.6, transportNm: (1.6 * (1 - albedo)) / albedo }],
        emissionAngleDeg,
        halfAngleDeg: 2,
        maxLossEv: 10, // only electrons without a loss
      });
      const [{ electrons }] = directLines(scattering);
      const tally = run(scattering, 6, 384);
      const { mean, standardError } = tallyMean(tally, (group) => group.forced[0]);
      const mu = Math.cos(radians(emissionAngleDeg));
      const exact = 1e-3 * 1.6 * mu * coneShare(2) * Math.sqrt(1 - albedo) * chandrasekharH(mu, albedo);
      // One false alarm in 30 000; the table's cells add 0.1 %.
      assertMean(electrons + mean, Math.hypot(standardError, 1e-3 * exact), exact, "no-loss intensity");
      assert.ok(standardError < 3e-3 * exact, "0.3 %");
      const wrong = exact * chandrasekharH(mu, 0.5 * albedo) / chandrasekharH(mu, albedo) *
        Math.sqrt((1 - 0.5 * albedo) / (1 - albedo));
      assert.throws(
        () => assertMean(electrons + mean, Math.hypot(standardError, 1e-3 * exact), wrong),
        "albedo",
      );
    });
  }
}

Deno.test("lossHistoryRunner() counts one by one what it forecasts, film and substrate, with and without losses", () => {
  const stack = medium({
    layers: [
      { thicknessNm: 1, lengthNm: 2.5, transportNm: 5 },
      { thicknessNm: Infinity, lengthNm: 1.6, transportNm: 4 },
    ],
    sources: [{ layer: 0, directWeight: 1.3 }, { layer: 1, directWeight: 0.8 }],
    halfAngleDeg: 40,
  });
  const { stride, lossBins } = lossLayout(stack);
  const direct = directLines(stack);
  const tally = run(stack, 7, 256);
  for (const source of [0, 1]) {
    for (const [name, from, to] of [["no loss", 0, 1], ["losses", 1, lossBins]] as const) {
      const sum = (values: Float64Array): number =>
        values.slice(source * stride + from, source * stride + to).reduce((a, b) => a + b, 0);
      const { mean, standardError } = tallyMean(tally, (group) => sum(group.forced) - sum(group.analogue));
      const expected = from === 0 ? -direct[source].electrons : 0;
      assertMean(mean, standardError, expected, `source ${source}, ${name}`);
      assert.throws(() => assertMean(mean, standardError, expected + 0.5 * direct[source].electrons), name);
    }
  }
});

// A. Jablonski, C. Powell, J. Vac. Sci. Technol. A 27, 253 (2009): mean escape depth lambda cos(alpha) (1 - 0.736 w).
// Isotropic scattering differs from the rule by 1.3 % at w = 0.3 and 4 % at w = 0.5 (independent simulation in hand).
for (const [albedo, tolerance] of [[0.1, 0.01], [0.3, 0.02], [0.5, 0.05]] as const) {
  Deno.test(`lossHistoryRunner() shortens the mean escape depth by elastic events of albedo ${albedo}`, () => {
    const scattering = medium({
      layers: [{ thicknessNm: Infinity, lengthNm: 1.6, transportNm: (1.6 * (1 - albedo)) / albedo }],
      halfAngleDeg: 2,
      maxLossEv: 10,
    });
    const { depthFrom, depthCells } = lossLayout(scattering);
    const [{ byDepth, depthCellNm }] = directLines(scattering);
    const tally = run(scattering, 8, 128);
    let total = 0;
    let moment = 0;
    for (let d = 0; d < depthCells; d++) {
      const scattered = tally.groups.reduce((sum, group) => sum + group.forced[depthFrom + d], 0);
      const share = byDepth[d] + scattered / tally.histories;
      total += share;
      moment += share * (d + 0.5) * depthCellNm;
    }
    // The rule counts in the mean free path of inelastic events.
    assertClose(moment / total / 1.6, 1 - 0.736 * albedo, { relative: tolerance }, "mean escape depth");
    assert.throws(() => assertClose(moment / total / 1.6, 1, { relative: tolerance }), "no elastic events");
  });
}
