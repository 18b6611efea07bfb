import assert from "node:assert/strict";
import { parseScenario, resolveScenario } from "../../src/scenario/mod.ts";

const ROOT = new URL("../../", import.meta.url);

async function blocks(language: string): Promise<string[]> {
  const readme = await Deno.readTextFile(new URL("README.md", ROOT));
  return [...readme.matchAll(new RegExp("```" + language + "\\n([\\s\\S]*?)```", "g"))].map((match) =>
    match[1]
  );
}

Deno.test("README's scenario is valid and warns of nothing", async () => {
  const scenarios = await blocks("json");
  assert.ok(scenarios.length > 0);
  for (const text of scenarios) {
    assert.deepEqual(resolveScenario(parseScenario(text, "README.md")).warnings, []);
  }
});

Deno.test("README's commands run and exit with 0", async () => {
  const lines = (await blocks("sh")).join("\n").split("\n").map((line) => line.replace(/\s+#.*$/, "").trim());
  // `task test` would run this test again; the other lines need the network or write outside the checkout.
  const commands = lines.filter((line) => line.startsWith("deno task") && line !== "deno task test");
  assert.ok(commands.includes("deno task demo") && commands.length >= 12);
  const folder = await Deno.makeTempDir();
  try {
    for (const line of commands) {
      // The tasks of deno.json, written out, with the output folder moved out of the checkout.
      const words = line.replaceAll(" out/", ` ${folder}/`).split(/\s+/).slice(2);
      const task = words[0] === "demo" ? ["demo", "--out", `${folder}/demo`] : words.slice(1);
      const { code, stderr } = await new Deno.Command("deno", {
        args: ["run", "--allow-read", "--allow-write", "src/cli/main.ts", ...task],
        cwd: ROOT,
        stdout: "null",
        stderr: "piped",
      }).output();
      assert.equal(code, 0, `${line}: ${new TextDecoder().decode(stderr)}`);
    }
  } finally {
    await Deno.remove(folder, { recursive: true });
  }
});
