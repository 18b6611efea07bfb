import { type Histories, historyRunner, type PhotonSource, type SurfacePart } from "./kernel.ts";
import { type DirectLine, lossHistoryRunner, type LossMedium } from "./loss_kernel.ts";
import type { LayerStack } from "./stack.ts";

/** Everything the histories need, as plain data that can be sent to a worker. */
export type EngineData = PairEngineData | FastEngineData;

/** Slow electrons: pair kernel. */
export interface PairEngineData {
  /** Which kernel. */
  readonly kind: "pair";
  /** Entries of the tally. */
  readonly tallySize: number;
  /** First event; null when no photon can lift an electron above the Fermi level. */
  readonly source: PhotonSource | null;
  /** Scattering, layer by layer. */
  readonly stack: LayerStack;
  /** Barriers and acceptances of the parts of the surface. */
  readonly surface: readonly SurfacePart[];
  /** Expected electrons per absorbed photon that reach the analyzer without an event, shape (bins). */
  readonly direct: Float64Array;
}

/** Fast electrons: loss kernel. */
export interface FastEngineData {
  /** Which kernel. */
  readonly kind: "loss";
  /** Entries of the tally. */
  readonly tallySize: number;
  /** Layers, lines and detection. */
  readonly medium: LossMedium;
  /** What of each line needs no histories. */
  readonly direct: readonly DirectLine[];
}

/**
 * Makes engine data runnable, here or in a worker that received it.
 *
 * @param data Tables of a scenario.
 * @returns Runs one batch; null when there is nothing to run.
 */
export function engineFrom(data: EngineData): Histories | null {
  if (data.kind === "loss") return lossHistoryRunner(data.medium);
  return data.source === null ? null : historyRunner(data.source, data.stack, data.surface);
}
