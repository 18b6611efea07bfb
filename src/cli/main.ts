/**
 * The program. Unguarded, so that it also runs where `import.meta.main` is not known.
 *
 * @module
 */
import process from "node:process";
import { runCli } from "./app.ts";

process.exit(await runCli(process.argv.slice(2), process));
