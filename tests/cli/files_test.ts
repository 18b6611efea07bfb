import assert from "node:assert/strict";
import { InputError } from "../../src/base/mod.ts";
import { beside, exitCodeOf, FileError, readBytes, stem, writeFiles } from "../../src/cli/files.ts";
import { inFolder, namesIn } from "../support/twoedge.ts";

Deno.test("writeFiles() makes the folder, writes all files over old ones, and gives their paths", async () => {
  await inFolder({}, async (folder) => {
    const target = `${folder}/a/b`;
    await writeFiles(target, [["x.txt", "old"]]);
    const written = await writeFiles(target, [["x.txt", "new"], ["y.txt", "µ"]]);
    assert.deepEqual(written, [`${target}/x.txt`, `${target}/y.txt`]);
    assert.deepEqual(namesIn(target), ["x.txt", "y.txt"]);
    assert.equal(new TextDecoder().decode(await readBytes(written[0])), "new");
    assert.equal(new TextDecoder().decode(await readBytes(written[1])), "µ");
  });
});

Deno.test("writeFiles() leaves no temporary file when one cannot be written", async () => {
  await inFolder({}, async (folder) => {
    Deno.mkdirSync(`${folder}/.y.txt.partial`); // in the way of the second file
    await assert.rejects(writeFiles(folder, [["x.txt", "1"], ["y.txt", "2"]]), {
      name: "FileError",
      message: `Cannot write ${folder}: it is a folder`,
    });
    assert.deepEqual(namesIn(folder), [".y.txt.partial"]);
  });
});

Deno.test("writeFiles() says so when a file is where a folder must be", async () => {
  await inFolder({ "taken": "x" }, async (folder) => {
    for (const target of [`${folder}/taken`, `${folder}/taken/below`]) {
      await assert.rejects(writeFiles(target, [["x.txt", "1"]]), {
        name: "FileError",
        message: `Cannot write ${target}: a file is where a folder must be`,
      });
    }
  });
});

Deno.test("readBytes() says why a file cannot be read", async () => {
  await inFolder({ "file": "x" }, async (folder) => {
    for (
      const [path, why] of [
        ["none", "it does not exist"],
        [".", "it is a folder"],
        ["file/below", "a file is where a folder must be"],
      ]
    ) {
      await assert.rejects(readBytes(`${folder}/${path}`), {
        name: "FileError",
        message: `Cannot read ${folder}/${path}: ${why}`,
      });
    }
  });
});

Deno.test("exitCodeOf() tells bad input, files and defects apart", () => {
  assert.equal(exitCodeOf(new InputError([{ place: "", message: "x" }])), 2);
  assert.equal(exitCodeOf(new FileError("read", "x", new Error("y"))), 3);
  assert.equal(exitCodeOf(new RangeError("x")), 1);
});

Deno.test("stem() and beside() take paths apart and put them together", () => {
  assert.deepEqual(["a/b.c.json", "b", "a/.b"].map(stem), ["b.c", "b", ""]);
  assert.equal(beside("a/b.json", "t.csv"), "a/t.csv");
  assert.equal(beside("b.json", "t.csv"), "t.csv");
});
