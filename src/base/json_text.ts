import {
  getNodeValue,
  type Node,
  type ParseError,
  parseTree,
  printParseErrorCode,
  stripComments,
} from "jsonc-parser";
import { cannot, InputError, type Problem } from "./errors.ts";

/** What a JSON text holds. */
export interface JsonText {
  /** Its value. */
  readonly data: unknown;
  /** A problem for each key that an object has twice: the later value would win unseen. */
  readonly repeated: readonly Problem[];
}

/**
 * Reads JSON in which comments and trailing commas are allowed.
 *
 * @param text The text.
 * @param fileName Name for messages.
 * @param action What it is read for, such as `read scenario`.
 * @returns The value, and keys given twice with their JSON pointers (RFC 6901).
 * @throws {InputError} If the text is not JSON, with file and line.
 * @example Comments are allowed, a key given twice is told
 * ```ts
 * import { readJsonText } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const { data, repeated } = readJsonText('{ "a": 1, /* again *\/ "a": 2 }', "a.json", "read example");
 * assert.equal(JSON.stringify(data), `{"a":2}`);
 * assert.equal(repeated[0].place, "/a");
 * ```
 */
export function readJsonText(text: string, fileName: string, action: string): JsonText {
  const errors: ParseError[] = [];
  const tree = parseTree(text, errors, { allowTrailingComma: true, allowEmptyContent: false });
  if (errors.length > 0 || tree === undefined) {
    const { error, offset } = errors[0] ?? { error: 0, offset: 0 };
    const why = stripComments(text).trim() === "" ? "it is empty" : printParseErrorCode(error);
    throw new InputError([{
      place: `${fileName}:${text.slice(0, offset).split("\n").length}`,
      message: cannot(
        action,
        `the file must be JSON (${why})`,
        text.slice(offset, offset + 20).split("\n")[0],
      ),
    }]);
  }
  return { data: getNodeValue(tree), repeated: repeatedKeys(tree, "", action) };
}

function repeatedKeys(node: Node, pointer: string, action: string): Problem[] {
  if (node.type !== "object") {
    return (node.children ?? []).flatMap((child, i) => repeatedKeys(child, `${pointer}/${i}`, action));
  }
  const seen = new Set<string>();
  return (node.children ?? []).flatMap(({ children: [key, value] = [] }) => {
    const place = pointer + pointerStep(key.value);
    const again = seen.has(key.value)
      ? [{ place, message: cannot(action, "each key may be given once", String(key.value)) }]
      : [];
    seen.add(key.value);
    return [...again, ...(value ? repeatedKeys(value, place, action) : [])];
  });
}

/**
 * One step of a JSON pointer (RFC 6901, section 3).
 *
 * @param key A key or an index.
 * @returns The step, slash first, escaped.
 */
export function pointerStep(key: PropertyKey): string {
  return `/${String(key).replaceAll("~", "~0").replaceAll("/", "~1")}`;
}
