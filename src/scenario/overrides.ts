import { cannot, InputError, type Problem } from "../base/mod.ts";

/**
 * Applies `PATH=VALUE` overrides to scenario data before it is checked.
 *
 * A path is the keys from the top joined by dots (`sample.temperatureK`, `sample.layers.0.thicknessNm`). The value is read as JSON where it is JSON
 * (numbers, true, null, quoted strings, objects) and as plain text otherwise. Missing objects on the way are made; the
 * check that follows refuses whatever the scenario does not know.
 *
 * @param data Parsed scenario, any JSON value; not changed.
 * @param overrides Texts of the form `PATH=VALUE`.
 * @param wantsText Whether the value at a path is text, so that `111` is not read as a number. Default: never.
 * @returns A changed copy.
 * @throws {InputError} If an override has no path or leads through something that is not an object.
 * @example Cool the sample
 * ```ts
 * import { applyOverrides } from "@twoedge/twoedge";
 * import assert from "node:assert/strict";
 * const cold = applyOverrides({ sample: { temperatureK: 300 } }, ["sample.temperatureK=77"]);
 * assert.deepEqual(cold, { sample: { temperatureK: 77 } });
 * ```
 */
export function applyOverrides(
  data: unknown,
  overrides: readonly string[],
  wantsText: (keys: readonly string[]) => boolean = () => false,
): unknown {
  const copy = structuredClone(data);
  const problems: Problem[] = [];
  for (const override of overrides) {
    const split = override.indexOf("=");
    const keys = override.slice(0, split).split(".");
    if (split < 1 || keys.includes("")) {
      problems.push({
        place: "--set",
        message: cannot("apply override", "it must be PATH=VALUE such as sample.temperatureK=77", override),
      });
      continue;
    }
    let target: unknown = copy;
    for (const key of keys.slice(0, -1)) {
      if (Array.isArray(target)) target = /^\d+$/.test(key) ? target[Number(key)] : undefined;
      else if (isObject(target)) target = Object.hasOwn(target, key) ? target[key] : define(target, key, {});
    }
    const last = keys[keys.length - 1];
    if (Array.isArray(target) && /^\d+$/.test(last) && Number(last) < target.length) {
      target[Number(last)] = readValue(override.slice(split + 1));
      continue;
    }
    if (!isObject(target)) {
      problems.push({
        place: `--set ${keys.join(".")}`,
        message: cannot(
          "apply override",
          "every key but the last must be an object, or an element of an array that is there",
          JSON.stringify(target) ?? "nothing",
        ),
      });
      continue;
    }
    const value = override.slice(split + 1);
    define(target, last, wantsText(keys) ? readText(value) : readValue(value));
  }
  if (problems.length > 0) throw new InputError(problems);
  return copy;
}

function isObject(value: unknown): value is Record<string, unknown> {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}

/** Sets an own property whatever its name, `__proto__` included. */
function define(target: Record<string, unknown>, key: string, value: unknown): unknown {
  Object.defineProperty(target, key, { value, writable: true, enumerable: true, configurable: true });
  return value;
}

function readText(text: string): unknown {
  const value = readValue(text);
  return typeof value === "string" || value === null ? value : text;
}

function readValue(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return text;
  }
}
