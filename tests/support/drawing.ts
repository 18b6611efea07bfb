/** All texts of a drawing, unescaped. */
export function textsOf(svg: string): string[] {
  const entities: Readonly<Record<string, string>> = { amp: "&", lt: "<", gt: ">", quot: '"', apos: "'" };
  return [...svg.matchAll(/<(?:text|tspan)[^>]*>([^<]+)</g)].map(([, text]) =>
    text.replaceAll(/&(\w+);/g, (_, name) => entities[name])
  );
}

/** All rows of inline data, anywhere in a chart, that have a field. */
export function rowsWith(part: unknown, field: string): Record<string, unknown>[] {
  if (typeof part !== "object" || part === null) return [];
  const own = Object.hasOwn(part, field) && !("type" in part) ? [part as Record<string, unknown>] : [];
  return [...own, ...Object.values(part).flatMap((inner) => rowsWith(inner, field))];
}
