import assert from "node:assert/strict";
import {
  type DetectionInput,
  detectionTable,
  directYield,
  emptyBatchTally,
  historyRunner,
  layerStack,
  pairTables,
  photonSource,
  type Tally,
  TallyAccumulator,
} from "../../src/transport/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { assertMean } from "../support/assert_mean.ts";
import { integrate } from "../support/integrate.ts";
import { tallyMean } from "../support/tally_mean.ts";

const STEP_EV = 0.01;
/** The one bin that is above the vacuum level: any inelastic event removes the electron. */
const BIN = 500;
const ENERGY_EV = (BIN + 0.5) * STEP_EV;

/**
 * Electrons of one energy that die at their first inelastic event (inelastic mean free path 1 nm), born isotropic below
 * a surface without refraction: the half-space of radiative transfer.
 */
function halfSpace(medium: {
  readonly absorptionDepthNm: number;
  readonly transportMeanFreePathNm?: number;
  readonly surface?: Partial<DetectionInput>;
  /** Nothing gets out, but everything is scored as if it could. Default: false. */
  readonly closed?: boolean;
}): { direct: number; run: (seed: number, batches: number) => Tally } {
  const grid = { stepEv: STEP_EV, count: BIN + 1, vacuumBin: BIN, thermalBins: 0 };
  const tables = pairTables({
    grid,
    states: () => 1,
    bandBottomBelowFermiEv: 8,
    thermalEnergyEv: 0,
    inelasticMeanFreePath: { kind: "function", lengthNm: () => 1 },
    transportMeanFreePathNm: medium.transportMeanFreePathNm ?? null,
  });
  const detection = detectionTable({
    grid,
    workFunctionEv: 0,
    bandBottomBelowFermiEv: 0,
    barrier: "classical",
    accelerationEv: 0,
    acceptanceHalfAngleRad: Math.PI / 2,
    emissionAngleRad: 0,
    cellsPerPath: 32,
    deepestPaths: 16,
    ...medium.surface,
  });
  const excitation = new Float64Array(grid.count);
  excitation[BIN] = 1;
  const source = photonSource([{ weight: 1, absorptionDepthNm: medium.absorptionDepthNm, excitation }]);
  assert.ok(source);
  const closed = { ...detection, input: { ...detection.input, workFunctionEv: 2 * ENERGY_EV } };
  const stack = layerStack([{ tables, thicknessNm: Infinity }]);
  const histories = historyRunner(source, stack, [{
    share: 1,
    detection: medium.closed ? closed : detection,
  }]);
  return {
    direct: directYield(source, stack, [{ share: 1, detection }])[BIN],
    run: (seed, batches) => {
      const sums = new TallyAccumulator(grid.count);
      for (let batch = 0; batch < batches; batch++) {
        const tally = emptyBatchTally(grid.count);
        histories(seed, batch, tally);
        sums.add(batch, tally);
      }
      return sums.result();
    },
  };
}

// Unscattered yield per absorbed photon, 1/2 [(1 - mu_c) - (1/aL) ln((1 + aL)/(1 + aL mu_c))], computed outside:
// C. Berglund, W. Spicer, Phys. Rev. 136, A1030 (1964), for an escape cone of cosine mu_c.
Deno.test.each([
  { absorptionTimesPath: 0.1, coneCosine: 0, exact: 0.0234491009784 },
  { absorptionTimesPath: 1, coneCosine: 0, exact: 0.15342640972 },
  { absorptionTimesPath: 0.05, coneCosine: 0.7, exact: 0.006112625479 },
])(
  "historyRunner() and directYield() give the unscattered yield for aL = $absorptionTimesPath, mu_c = $coneCosine",
  ({ absorptionTimesPath, coneCosine, exact }) => {
    // A barrier of mu_c^2 E at E: classical refraction then closes directions below mu_c.
    const { direct, run } = halfSpace({
      absorptionDepthNm: 1 / absorptionTimesPath,
      surface: { workFunctionEv: ENERGY_EV * coneCosine ** 2 },
    });
    // Cells of 1/32 mean free path, in which absorption is taken as uniform.
    assertClose(direct, exact, { relative: 2.5e-4 }, "directYield");
    const tally = run(4, 256);
    const { mean, standardError } = tallyMean(tally, (group) => group.analogue[BIN]);
    // One false alarm in 30 000 (Student's t of 63 degrees of freedom).
    assertMean(mean, standardError, exact, "analogue");
    assert.throws(() => assertMean(mean, standardError, 1.08 * exact, "8 % more"));
    assert.ok(
      tally.groups.every((group) => group.forced[BIN] === 0),
      "nothing is left to score after the first event",
    );
  },
);

/** Chandrasekhar's H by its closed integral: D. Stibbs, R. Weir, Mon. Not. R. Astron. Soc. 119, 512 (1959). */
function chandrasekharH(mu: number, albedo: number): number {
  const logarithm = integrate(
    (t) => {
      const cosine = t === 0 ? 1 : t / Math.tan(t);
      return Math.log(1 - albedo * cosine) / (Math.cos(t) ** 2 + mu * mu * Math.sin(t) ** 2);
    },
    [0, 1e-5, 1e-4, 1e-3, 0.01, 0.1, Math.PI / 2],
    300,
  ); // for large mu the integrand is narrow
  return Math.exp((-mu / Math.PI) * logarithm);
}

// S. Chandrasekhar, Radiative Transfer (1950), ch. V: H(1), H(0.5) and H(0.2), computed outside from the closed integral
// and from the non-linear integral equation.
const H_TABLE = [
  { albedo: 0.1, h1: 1.03681562, h05: 1.02892234, h02: 1.01864408 },
  { albedo: 0.3, h1: 1.12684438, h05: 1.09755911, h02: 1.06114653 },
  { albedo: 0.5, h1: 1.25125956, h05: 1.18773513, h02: 1.11346143 },
  { albedo: 0.7, h1: 1.44474613, h05: 1.31794506, h02: 1.18251579 },
  { albedo: 0.9, h1: 1.85009852, h05: 1.55603380, h02: 1.29143373 },
  { albedo: 0.99, h1: 2.47279283, h05: 1.84860102, h02: 1.39976722 },
];

Deno.test("chandrasekharH() of these tests gives the published table", () => {
  for (const { albedo, h1, h05, h02 } of H_TABLE) {
    [[1, h1], [0.5, h05], [0.2, h02]].forEach(([mu, h]) =>
      assertClose(chandrasekharH(mu, albedo), h, { relative: 1e-7 }, `H(${mu}, ${albedo})`)
    );
  }
});

/** Transport mean free path that gives an albedo, and the total one, for an inelastic mean free path of 1 nm. */
const transportNm = (albedo: number): number => (1 - albedo) / albedo;
const totalNm = (albedo: number): number => 1 - albedo;

// Isotropic source exp(-tau/mu0) in a scattering half-space: emergent intensity proportional to
// H(mu) H(mu0) mu0/(mu + mu0) (Chandrasekhar, ch. V, law of diffuse reflection). Over all directions, with the
// non-linear equation of H, the yield per absorbed photon is [1 - H(mu0) sqrt(1 - w)]/w; here mu0 = 1.
Deno.test.each(H_TABLE)(
  "historyRunner() lets out as many electrons as Chandrasekhar's H says for albedo $albedo",
  ({ albedo, h1 }) => {
    const exact = (1 - h1 * Math.sqrt(1 - albedo)) / albedo;
    const { direct, run } = halfSpace({
      absorptionDepthNm: totalNm(albedo),
      transportMeanFreePathNm: transportNm(albedo),
    });
    const tally = run(5, 128);
    // One false alarm in 30 000 for each (Student's t of 63 degrees of freedom). The table of scores is good to 2e-4.
    const scattered = tallyMean(tally, (group) => group.forced[BIN]);
    const forced = {
      mean: direct + scattered.mean,
      error: Math.hypot(scattered.standardError, 2e-4 * exact),
    };
    assertMean(forced.mean, forced.error, exact, "forced");
    const analogue = tallyMean(tally, (group) => group.analogue[BIN]);
    assertMean(analogue.mean, analogue.standardError, exact, "analogue");
    const wrong = albedo < 0.9 ? albedo + 0.02 : albedo - 0.005;
    const other = (1 - chandrasekharH(1, wrong) * Math.sqrt(1 - wrong)) / wrong;
    assert.throws(() => assertMean(forced.mean, forced.error, other), `albedo ${wrong}`);
  },
);

Deno.test("historyRunner() sends them out in the directions that Chandrasekhar's H says", () => {
  // As above, through a cone of 5 degrees; the share of it in each direction by a sum over polar and azimuthal angle.
  for (const albedo of [0.5, 0.9]) {
    for (const axisDeg of [0, 60, 75]) {
      const half = (5 * Math.PI) / 180;
      const axis = (axisDeg * Math.PI) / 180;
      const emitted = (withH: number): number => {
        let sum = 0; // mean of mu H(mu)/(mu + mu0) over the cone
        for (let i = 0; i < 8; i++) {
          const cosPolar = 1 - (1 - Math.cos(half)) * (i + 0.5) / 8;
          const sinPolar = Math.sqrt(1 - cosPolar * cosPolar);
          for (let j = 0; j < 16; j++) {
            const cosAzimuth = Math.cos(((j + 0.5) / 16) * Math.PI);
            const mu = Math.cos(axis) * cosPolar - Math.sin(axis) * sinPolar * cosAzimuth;
            sum += mu * chandrasekharH(mu, withH) / (mu + 1) / 128;
          }
        }
        return 0.5 * (1 - Math.cos(half)) * chandrasekharH(1, withH) * sum;
      };
      const { direct, run } = halfSpace({
        absorptionDepthNm: totalNm(albedo),
        transportMeanFreePathNm: transportNm(albedo),
        surface: { acceptanceHalfAngleRad: half, emissionAngleRad: axis },
      });
      const { mean, standardError } = tallyMean(run(6, 64), (group) => group.forced[BIN]);
      // One false alarm in 30 000 for each (Student's t of 63 degrees of freedom); errors of 0.1 to 0.2 %.
      assertMean(direct + mean, standardError, emitted(albedo), `albedo ${albedo} at ${axisDeg} degrees`);
      assert.throws(() => assertMean(direct + mean, standardError, emitted(albedo - 0.05)));
    }
  }
});

Deno.test("[1 - H(mu0) sqrt(1 - w)]/w tends to the published current of a uniform source", () => {
  // J = s lambda_in sqrt(1 - w)/2 x integral of mu H, computed outside; a deep source is uniform, s = 1/depth.
  const published = [0.244575591, 0.231387142, 0.213363905, 0.185860837, 0.130493878, 0.0513590868];
  H_TABLE.forEach(({ albedo }, i) => {
    const depth = 1000;
    const yieldPerPhoton = (1 - chandrasekharH(depth / totalNm(albedo), albedo) * Math.sqrt(1 - albedo)) /
      albedo;
    assertClose(yieldPerPhoton * depth, published[i], { relative: 2e-3 }, `albedo ${albedo}`);
  });
});

Deno.test("historyRunner() keeps or lets out every electron, exactly", () => {
  // Conservation: each of them leaves or ends in one inelastic event, however often the barrier reflects it.
  const { run } = halfSpace({
    absorptionDepthNm: 0.5,
    transportMeanFreePathNm: 0.2,
    surface: { workFunctionEv: 0.3 * ENERGY_EV, barrier: "quantum" },
  });
  for (const { analogue, events, histories } of run(7, 16).groups) {
    assert.ok(analogue[BIN] > 0.05 * histories && events[BIN] > 0.05 * histories);
    assert.equal(analogue[BIN] + events[BIN], histories);
  }
});

Deno.test("historyRunner() reflects as a mirror: elastic events behind a closed barrier are those of the image source", () => {
  // Method of images: below a mirror the collisions of exp(-z/D) are those of exp(-|z|/D) in an infinite medium, where
  // isotropic scattering multiplies the Fourier transform by A/(1 - wA), A = arctan(k)/k (k in inverse mean free paths;
  // K. Case, P. Zweifel, Linear Transport Theory (1967), ch. 4). The score E2(z)/2 has the transform ln(1 + k^2)/(2 k^2).
  const exact = (albedo: number, depth: number): number =>
    integrate((angle) => {
      const k = Math.tan(angle);
      const a = k === 0 ? 1 : Math.atan(k) / k;
      const score = k === 0 ? 0.5 : Math.log1p(k * k) / (2 * k * k);
      const measure = (1 + k * k) / Math.PI;
      return (measure / (1 + (k * depth) ** 2)) * ((albedo * a) / (1 - albedo * a)) * score;
    }, [0, 1e-3, 0.01, 0.1, Math.PI / 2 - 1e-6]);
  // Uniform source: density s w/(1 - w) everywhere, of which a quarter of a mean free path comes out.
  assertClose(exact(0.8, 1000) * 1000, 0.8 / 0.2 / 4, { relative: 5e-3 }, "uniform source");
  for (const albedo of [0.5, 0.8]) {
    for (const depth of [0.3, 3]) {
      const { run } = halfSpace({
        absorptionDepthNm: depth * totalNm(albedo),
        transportMeanFreePathNm: transportNm(albedo),
        closed: true,
      });
      const tally = run(8, 64);
      const { mean, standardError } = tallyMean(tally, (group) => group.forced[BIN]);
      const error = Math.hypot(standardError, 2e-4 * mean);
      // One false alarm in 30 000 for each (Student's t of 63 degrees of freedom).
      assertMean(mean, error, exact(albedo, depth), `albedo ${albedo}, depth ${depth}`);
      assert.throws(() => assertMean(mean, error, exact(albedo, 1.1 * depth)), "a source 10 % deeper");
      assert.ok(tally.groups.every((group) => group.analogue[BIN] === 0), "nothing gets out");
    }
  }
});

Deno.test("photonSource() shares histories by weight and keeps electrons that cannot leave", () => {
  const source = photonSource([
    { weight: 3, absorptionDepthNm: 5, excitation: Float64Array.of(1, 0, 3) },
    { weight: 1, absorptionDepthNm: 9, excitation: Float64Array.of(0, 2, 0) },
    { weight: 0, absorptionDepthNm: 7, excitation: Float64Array.of(1, 1, 1) },
    { weight: 2, absorptionDepthNm: 7, excitation: new Float64Array(3) },
  ]);
  assert.ok(source);
  assert.deepEqual([...source.bins], [0, 2, 1]);
  assert.deepEqual([...source.depthsNm], [5, 5, 9]);
  assert.deepEqual([...source.probabilities], [3 / 16, 9 / 16, 1 / 4]);
  assert.equal(photonSource([{ weight: 1, absorptionDepthNm: 5, excitation: new Float64Array(3) }]), null);
});
