import { streamState, Xoshiro128pp } from "../rng/mod.ts";
import type { ResolvedScenario } from "../scenario/mod.ts";
import type { Tally } from "../transport/mod.ts";
import type { PairEngineData } from "../transport/mod.ts";

/** A cell in which the sample lights a collector that is wired to it through a voltage source. */
export interface CellSettings {
  /** Work function of the collector, eV, > 0. */
  readonly collectorWorkFunctionEv: number;
  /** Retarding voltages, V: positive holds electrons back. */
  readonly voltagesV: readonly number[];
  /** Current of the electrons that scattered light releases from the collector, as a share of the saturated one, 0..1. */
  readonly backShare: number;
  /** Current without light, A. */
  readonly darkCurrentA: number;
}

/** What the cell is expected to measure, shape (voltages) each. */
export interface CellCurve {
  /** Current, A. */
  readonly currentsA: readonly number[];
  /** Standard error of the simulation, A. */
  readonly standardErrorsA: readonly number[];
  /** Current of all emitted electrons, A. */
  readonly saturatedA: number;
  /** Electrons per absorbed photon out of the sample, all directions: the yield. */
  readonly yieldPerPhoton: number;
  /** Retarding voltage at which the last electrons stop at T = 0, V: `h nu - collector work function`. */
  readonly stoppingV: number;
}

const ELEMENTARY_CHARGE_C = 1.602176634e-19; // exact (SI 2019)

/**
 * A scenario whose engine collects every emitted electron, for {@link cellCurve}: full half-space, strong extraction.
 *
 * @param resolved The scenario.
 * @returns The scenario with an analyzer that takes all.
 */
export function collectingAll(resolved: ResolvedScenario): ResolvedScenario {
  return { ...resolved, acceptanceHalfAngleDeg: 90, emissionAngleDeg: 0, biasV: -COLLECTING_V };
}

/** More than any electron of an ultraviolet lamp has, V. */
const COLLECTING_V = 200;

/**
 * Current against retarding voltage between the sample and a collector around it.
 *
 * Both are wired together, so their Fermi levels differ by eV only: an electron of energy E above the sample's Fermi level
 * reaches the collector when `E > W_collector + e V` (spherical cell: the total kinetic energy counts). The last one stops
 * at `e V = h nu - W_collector`, whatever the sample's work function is; that one sets threshold and saturation. Electrons
 * from the collector, of the same distribution, flow back where `E > max(W_collector, W_sample - e V)`.
 *
 * Source: L. DuBridge, Phys. Rev. 43, 727 (1933); contact potential: R. Millikan, Phys. Rev. 7, 355 (1916).
 *
 * @param resolved From {@link collectingAll}.
 * @param engine Its engine.
 * @param tally Its histories.
 * @param cell The cell.
 * @returns The curve.
 */
export function cellCurve(
  resolved: ResolvedScenario,
  engine: PairEngineData,
  tally: Tally,
  cell: CellSettings,
): CellCurve {
  const { stepEv, count } = engine.stack.grid;
  const perA = ELEMENTARY_CHARGE_C * resolved.absorbedPhotonsPerS;
  /** Share of each bin above an energy. */
  const above = (energyEv: number) => (bin: number): number =>
    Math.min(1, Math.max(0, bin + 1 - energyEv / stepEv));
  const sum = (contents: Float64Array, share: (bin: number) => number): number => {
    let total = 0;
    for (let bin = 0; bin < count; bin++) total += contents[bin] * share(bin);
    return total;
  };
  const expected = (share: (bin: number) => number): { value: number; error: number } => {
    const groups = tally.groups.map((group) => sum(group.forced, share) / group.histories);
    const mean = groups.reduce((a, b) => a + b, 0) / Math.max(1, groups.length);
    const squares = groups.reduce((a, b) => a + (b - mean) ** 2, 0);
    return {
      value: sum(engine.direct, share) + mean,
      error: groups.length > 1 ? Math.sqrt(squares / (groups.length - 1) / groups.length) : 0,
    };
  };
  const all = expected(() => 1);
  const fromCollector = expected(above(cell.collectorWorkFunctionEv)).value;
  const points = cell.voltagesV.map((voltageV) => {
    const forward = expected(above(cell.collectorWorkFunctionEv + voltageV));
    const back = fromCollector === 0
      ? 0
      : expected(above(Math.max(cell.collectorWorkFunctionEv, resolved.workFunctionEv - voltageV))).value /
        fromCollector;
    return {
      currentA: perA * (forward.value - cell.backShare * all.value * back) + cell.darkCurrentA,
      errorA: perA * forward.error,
    };
  });
  return {
    currentsA: points.map((point) => point.currentA),
    standardErrorsA: points.map((point) => point.errorA),
    saturatedA: perA * all.value,
    yieldPerPhoton: all.value,
    stoppingV: resolved.photonEnergyEv - cell.collectorWorkFunctionEv,
  };
}

/**
 * Adds Gaussian noise to currents (G. Box, M. Muller, Ann. Math. Stat. 29, 610 (1958)).
 *
 * @param currentsA Currents, A.
 * @param noiseA Standard deviation, A, >= 0.
 * @param seed Seed.
 * @param curve Number of the curve, so that each has noise of its own.
 * @returns Currents as measured, A.
 */
export function noisyCurrents(
  currentsA: readonly number[],
  noiseA: number,
  seed: number,
  curve: number,
): number[] {
  const generator = new Xoshiro128pp(streamState(seed, "counting", curve));
  return currentsA.map((current) =>
    current +
    noiseA * Math.sqrt(-2 * Math.log(generator.nextUniform())) *
      Math.cos(2 * Math.PI * generator.nextUniform())
  );
}
