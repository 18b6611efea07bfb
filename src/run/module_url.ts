/** A module beside another, under the extension that one has (`.ts` here, `.js` once packed for npm). */
export function moduleBeside(base: string, name: string): URL {
  return new URL(`./${name}${base.endsWith(".ts") ? ".ts" : ".js"}`, base);
}
