import { type BatchTally, emptyBatchTally, HISTORIES_PER_BATCH } from "./kernel.ts";

/** Batches are dealt into this many groups, from whose scatter the standard errors come. */
const GROUPS = 64;

/** Sums of many batches, in groups of equal standing. */
export interface Tally {
  /** Batches added. */
  readonly batches: number;
  /** Histories added. */
  readonly histories: number;
  /** One sum per group that received a batch: counts are sums over the group's histories. */
  readonly groups: readonly (BatchTally & { readonly histories: number })[];
}

/**
 * Adds batches in the order of their numbers, whatever order they arrive in, so that the sums are the same to the
 * last bit however the work was spread.
 */
export class TallyAccumulator {
  readonly #count: number;
  readonly #groups: (BatchTally & { histories: number })[] = [];
  readonly #waiting = new Map<number, BatchTally>();
  #next = 0;

  /**
   * Starts with nothing, or goes on from earlier sums as if they had been added here.
   *
   * @param count Energy bins.
   * @param start Sums of batches 0..start.batches - 1; not changed. Default: none.
   */
  constructor(count: number, start?: Tally) {
    this.#count = count;
    if (start === undefined) return;
    this.#next = start.batches;
    this.#groups.push(...start.groups.map((group) => structuredClone(group)));
  }

  /** Batches added so far, without a gap from number 0 on. */
  get batches(): number {
    return this.#next;
  }

  /**
   * Takes one batch; those that arrive early wait for the ones before them.
   *
   * @param batch Number of the batch.
   * @param tally Its sums; kept until added, so the caller must not change them.
   */
  add(batch: number, tally: BatchTally): void {
    this.#waiting.set(batch, tally);
    for (let ready = this.#waiting.get(this.#next); ready; ready = this.#waiting.get(this.#next)) {
      this.#waiting.delete(this.#next);
      const group = (this.#groups[this.#next % GROUPS] ??= { ...emptyBatchTally(this.#count), histories: 0 });
      for (let k = 0; k < this.#count; k++) {
        group.forced[k] += ready.forced[k];
        group.analogue[k] += ready.analogue[k];
        group.events[k] += ready.events[k];
      }
      group.histories += HISTORIES_PER_BATCH;
      this.#next++;
    }
  }

  /** The sums so far. */
  result(): Tally {
    return {
      batches: this.#next,
      histories: this.#next * HISTORIES_PER_BATCH,
      groups: this.#groups,
    };
  }
}
