import { buildCommand } from "@stricli/core";
import { listMaterialValues, material, MATERIAL_IDS } from "../data/mod.ts";
import { noticeText } from "./fit.ts";
import { type Context, jsonFlag, scenarioArgument, setFlag, text } from "./flags.ts";
import { loadScenario } from "./simulate.ts";

/** `validate` */
export const validateCommand = buildCommand({
  docs: { brief: "Check a scenario and say what will hide or disturb the edges" },
  parameters: {
    positional: { kind: "tuple", parameters: [scenarioArgument] },
    flags: { set: setFlag, json: jsonFlag },
  },
  async func(this: Context, flags: { set?: readonly string[]; json: boolean }, path: string) {
    const { resolved, hash } = await loadScenario(path, flags.set ?? []);
    const warnings = resolved.warnings.map(noticeText);
    this.process.stdout.write(
      flags.json
        ? `${JSON.stringify({ valid: true, scenarioHash: hash, warnings }, null, 2)}\n`
        : [`${path} is valid, scenario ${hash}`, ...warnings.map((warning) => `Warning: ${warning}`), ""]
          .join("\n"),
    );
  },
});

/** `materials` */
export const materialsCommand = buildCommand({
  docs: { brief: "List the built-in materials, or every number of one with its source" },
  parameters: {
    positional: {
      kind: "tuple",
      parameters: [{ parse: text, brief: "Material, such as Au", placeholder: "NAME", optional: true }],
    },
    flags: { json: jsonFlag },
  },
  func(this: Context, flags: { json: boolean }, name?: string) {
    const values = (name === undefined ? MATERIAL_IDS : [name]).map((id) => {
      const chosen = material(id);
      return { id: chosen.id, name: chosen.name, values: listMaterialValues(chosen) };
    });
    const lines = name === undefined
      ? values.map((entry) => `${entry.id.padEnd(17)}${entry.name}`)
      : values[0].values.map((row) =>
        `${row.quantity}: ${row.value}${
          row.unit === "1" ? "" : ` ${row.unit}`
        } [${row.confidence}] ${row.source}`
      );
    this.process.stdout.write(flags.json ? `${JSON.stringify(values, null, 2)}\n` : `${lines.join("\n")}\n`);
  },
});
