import { cannot, InputError, type Problem, readJsonText } from "../base/mod.ts";
import { type Material, MATERIAL_IDS, parseMaterial } from "./materials.ts";

/**
 * Reads a material of the user: one JSON file of the form of the built-in ones, in which comments and trailing commas are
 * allowed. Every number needs its unit, a source and a confidence, as there.
 *
 * Every problem is reported at once, each at `file#pointer` (JSON pointer, RFC 6901).
 *
 * @param text Contents of the file.
 * @param fileName Name for messages.
 * @returns The material.
 * @throws {InputError} If the text is not JSON, gives a key or a core level twice, lacks a number, a unit or a source,
 * has a number out of range, or takes the name of a built-in material.
 * @example A file that only starts with gold
 * ```ts
 * import { InputError, material, materialFrom } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const text = JSON.stringify({ ...material("Au"), id: "Au_foil", name: "our foil" });
 * assert.equal(materialFrom(`// measured in May\n${text}`, "foil.json").name, "our foil");
 * assert.throws(() => materialFrom('{ "id": "Au_foil" }', "foil.json"), InputError);
 * ```
 */
export function materialFrom(text: string, fileName: string): Material {
  const { data, repeated } = readJsonText(text, fileName, "read material");
  const problems: Problem[] = [...repeated];
  let found: Material | undefined;
  try {
    found = parseMaterial(data);
    problems.push(...clashes(found));
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    problems.push(...error.problems);
  }
  if (problems.length > 0 || found === undefined) {
    throw new InputError(problems.map((p) => ({ ...p, place: `${fileName}#${p.place}` })));
  }
  return found;
}

function problem(place: string, rule: string, value: string): Problem {
  return { place, message: cannot("read material", rule, value) };
}

/** Names that mean two things. */
function clashes({ id, coreLevels }: Material): Problem[] {
  const names = coreLevels.map(({ name }) => name);
  return [
    ...(MATERIAL_IDS.includes(id)
      ? [problem("/id", "it must not be the name of a built-in material", id)]
      : []),
    ...names.flatMap((name, i) =>
      names.indexOf(name) < i
        ? [problem(`/coreLevels/${i}/name`, "each core level may be given once", name)]
        : []
    ),
  ];
}
