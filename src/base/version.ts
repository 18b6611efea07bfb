/** The version of Twoedge that wrote a file; the same as in `deno.json` (a test compares them). */
export const VERSION = "0.1.0";
