/**
 * Identity of a scenario: the first 16 hexadecimal digits of the SHA-256 (FIPS 180-4) of its JSON with sorted keys.
 * Two files that differ only in comments, order or spelled-out defaults have the same hash.
 *
 * @param resolved Anything that JSON can hold; a resolved scenario includes the user's tables.
 * @returns 16 hexadecimal digits.
 */
export async function scenarioHash(resolved: unknown): Promise<string> {
  const bytes = new TextEncoder().encode(JSON.stringify(sorted(resolved)));
  const digest = new Uint8Array(await crypto.subtle.digest("SHA-256", bytes));
  return Array.from(digest.subarray(0, 8), (byte) => byte.toString(16).padStart(2, "0")).join("");
}

function sorted(value: unknown): unknown {
  if (Array.isArray(value)) return value.map(sorted);
  if (typeof value !== "object" || value === null) return value;
  const entries = Object.entries(value).sort(([a], [b]) => (a < b ? -1 : 1));
  return Object.fromEntries(entries.map(([key, inner]) => [key, sorted(inner)]));
}
