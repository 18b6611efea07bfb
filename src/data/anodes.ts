import { z } from "zod";
import { cannot, InputError, suggest } from "../base/mod.ts";
import { type Confidence, confidence } from "./cited.ts";
import table from "./anodes.json" with { type: "json" };

/** One Lorentzian component of the K-alpha emission of an X-ray anode. */
export interface AnodeLine {
  /** Name, such as `K alpha 1`. */
  readonly name: string;
  /** Photon energy, eV. */
  readonly energyEv: number;
  /** Full width at half maximum, eV. */
  readonly fwhmEv: number;
  /** Area relative to that of K alpha 1. */
  readonly relativeArea: number;
}

/** The K-alpha emission of an X-ray anode. */
export interface Anode {
  /** Element of the anode. */
  readonly name: string;
  /** Source of all its numbers. */
  readonly source: string;
  /** How sure they are. */
  readonly confidence: Confidence;
  /** Components: K alpha 1, K alpha 2 and their common tail first, then the satellites by energy. */
  readonly lines: readonly AnodeLine[];
}

const anodes: readonly Anode[] = z.array(z.strictObject({
  name: z.string().min(1),
  source: z.string().min(5),
  confidence,
  columns: z.tuple([
    z.literal("name"),
    z.literal("energyEv"),
    z.literal("fwhmEv"),
    z.literal("relativeArea"),
  ]),
  rows: z.array(z.tuple([
    z.string().min(1),
    z.number().min(1000).max(2000),
    z.number().min(0.1).max(5),
    z.number().min(0.01).max(100),
  ])).min(1),
})).parse(table).map(({ name, source, confidence, rows }) => ({
  name,
  source,
  confidence,
  lines: rows.map(([line, energyEv, fwhmEv, area]) => ({
    name: line,
    energyEv,
    fwhmEv,
    relativeArea: area / rows[0][3],
  })),
}));

/** Names of the built-in X-ray anodes. */
export const ANODE_NAMES: readonly string[] = anodes.map((anode) => anode.name);

/**
 * A built-in X-ray anode.
 *
 * @param name One of {@link ANODE_NAMES}.
 * @returns Its emission with the source.
 * @throws {InputError} If there is no such anode.
 * @example The strongest line of aluminum
 * ```ts
 * import { anode } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * assert.equal(anode("Al").lines[0].energyEv, 1486.709);
 * ```
 */
export function anode(name: string): Anode {
  const found = anodes.find((entry) => entry.name === name);
  if (found !== undefined) return found;
  const near = suggest(name, ANODE_NAMES);
  const rule = `anode must be one of ${ANODE_NAMES.join(", ")}${near ? ` (did you mean ${near}?)` : ""}`;
  throw new InputError([{ place: "", message: cannot("look up anode", rule, name) }]);
}
