import assert from "node:assert/strict";
import { engineData } from "../../src/model/mod.ts";
import {
  parseScenario,
  type ResolvedScenario,
  resolveScenario,
  scenarioHash,
} from "../../src/scenario/mod.ts";
import { engineKey, parseSweep, partRange, planPoint } from "../../src/sweep/mod.ts";
import { QUICK_GOLD, sweepText } from "../support/sweep_text.ts";

function resolve(set: readonly string[] = []): ResolvedScenario {
  return resolveScenario(parseScenario(QUICK_GOLD, "gold.json", set));
}

/** Overrides that only the instrument sees. */
const INSTRUMENT = [
  "title=other",
  "light.photonFluxPerS=3e9",
  "analyzer.resolution.fwhmEv=0.2",
  "analyzer.transmissionExponent=1",
  "analyzer.detectionFraction=0.3",
  "acquisition.stepEv=0.05",
  "acquisition.startEv=7",
  "acquisition.endEv=30",
  "acquisition.dwellS=9",
  "acquisition.sweeps=7",
  "acquisition.darkRateCountsPerS=3",
  "acquisition.deadTimeS=1e-7",
];

/** Overrides that the histories see. */
const TRANSPORT = [
  "sample.material=Ag",
  "sample.temperatureK=77",
  "sample.workFunctionEv=4.9",
  "sample.barrier=quantum",
  "sample.transportMeanFreePathNm=3",
  "light.satellites=false",
  "geometry.incidenceAngleDeg=60",
  "geometry.emissionAngleDeg=10",
  "analyzer.acceptanceHalfAngleDeg=5",
  "biasV=-5",
  "simulation.energyStepEv=0.05",
];

Deno.test("engineKey() is the same exactly for scenarios with the same tables", async () => {
  const plain = resolve();
  const key = await engineKey(plain);
  const tables = JSON.stringify(engineData(plain));
  const together = ["biasV=-8", "analyzer.workFunctionEv=3.4"]; // the same -e U + W - W_A
  for (const set of [...INSTRUMENT.map((one) => [one]), INSTRUMENT, together]) {
    const other = resolve(set);
    assert.notDeepEqual(other, plain, `${set}`);
    assert.equal(await engineKey(other), key, `${set}`);
    assert.equal(JSON.stringify(engineData(other)), tables, `${set}`);
  }
  for (const one of TRANSPORT) assert.notEqual(await engineKey(resolve([one])), key, one);
  for (const one of ["simulation.seed=2", "simulation.histories=20000"]) {
    assert.equal(await engineKey(resolve([one])), key, one);
  }
});

const SWEEP = parseSweep(sweepText(), "sweep.json");

function plan(settings: Record<string, string | number>, sweep = SWEEP, text = QUICK_GOLD) {
  return planPoint(sweep, 0, settings, (set) => resolveScenario(parseScenario(text, "gold.json", set)));
}

Deno.test("planPoint() identifies a point by what it means, not by how it is written", async () => {
  const { id } = await plan({ biasV: -8 });
  assert.match(id, /^[0-9a-f]{16}$/);
  const written = QUICK_GOLD.replace('"biasV": -9', '/* less */ "biasV": -8.0');
  assert.equal((await plan({}, SWEEP, written)).id, id);
  assert.notEqual((await plan({ biasV: -8.5 })).id, id);
});

Deno.test("planPoint() gives independent points seeds of their own, and those of one transport the same histories", async () => {
  const [a, b, flux, other] = await Promise.all([
    plan({ biasV: -8 }),
    plan({ biasV: -7 }),
    plan({ biasV: -8, "light.photonFluxPerS": 7e9 }),
    plan({ biasV: -8 }, parseSweep(sweepText({ seed: 2 }), "sweep.json")),
  ]);
  assert.notEqual(a.job?.resolved.seed, b.job?.resolved.seed);
  assert.equal(a.job?.resolved.seed, flux.job?.resolved.seed);
  assert.notEqual(a.job?.replicate, flux.job?.replicate);
  assert.notEqual(a.job?.resolved.seed, other.job?.resolved.seed);
  assert.notEqual(a.id, other.id);
  assert.ok(
    [a, b, flux, other].every(({ job }) =>
      Number.isSafeInteger(job?.resolved.seed) && Number.isSafeInteger(job?.replicate)
    ),
  );
});

Deno.test("planPoint() leaves the seed of the scenario when seeds are common", async () => {
  const common = parseSweep(sweepText({ seeds: "common" }), "sweep.json");
  const { job } = await plan({ biasV: -8, "simulation.seed": 12 }, common);
  assert.deepEqual([job?.resolved.seed, job?.replicate], [12, 0]);
});

Deno.test("planPoint() gives a point the scenario hash of a simulation with its seed", async () => {
  const { job } = await plan({ biasV: -8 });
  const { warnings: _, ...identity } = resolve(["biasV=-8", `simulation.seed=${job?.resolved.seed}`]);
  assert.equal(job?.scenarioHash, await scenarioHash(identity));
});

Deno.test("planPoint() runs a point again when it is to be fitted or its spectrum kept", async () => {
  const ids = await Promise.all([
    { values: ["peakCounts"] },
    { values: ["fit.cutoffEv"] },
    { values: ["peakCounts"], spectra: true },
  ].map(async (record) => (await plan({}, parseSweep(sweepText({ record }), "sweep.json"))).id));
  assert.equal(new Set(ids).size, 3);
  const other = parseSweep(sweepText({ record: { values: ["truth.cutoffEv"] } }), "sweep.json");
  assert.equal((await plan({}, other)).id, ids[0], "other values of the same record need no new run");
});

Deno.test("planPoint() keeps the reason when the settings break a rule", async () => {
  const { job, reason, id } = await plan({ biasV: -1000 });
  assert.equal(job, null);
  assert.equal(reason, "Cannot read scenario as biasV must be >= -100 V: current value is -1000 (at /biasV)");
  assert.notEqual(id, (await plan({ biasV: -1001 })).id);
});

Deno.test("partRange() gives every point to one part", () => {
  for (const [count, parts] of [[10, 1], [10, 3], [3, 7], [1000, 13]]) {
    const seen = Array.from({ length: parts }, (_, i) => partRange(i + 1, parts, count))
      .flatMap(({ from, to }) => Array.from({ length: to - from }, (_, i) => from + i));
    assert.deepEqual(seen, Array.from({ length: count }, (_, i) => i));
  }
});
