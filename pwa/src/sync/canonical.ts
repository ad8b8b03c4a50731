// Canonical JSON (RFC 8785): the bytes that are hashed are the same on every
// phone and on the server.

/** Writes a JSON value in the canonical form. */
export function canonical(value: unknown): string {
  if (Array.isArray(value)) return `[${value.map(canonical).join(",")}]`;
  if (typeof value === "object" && value !== null) {
    const members = value as Record<string, unknown>;
    const keys = Object.keys(members).filter((k) => members[k] !== undefined);
    // RFC 8785 3.2.3: by UTF-16 code units, which is how JavaScript compares.
    keys.sort();
    return `{${keys.map((k) => `${JSON.stringify(k)}:${canonical(members[k])}`).join(",")}}`;
  }
  if (typeof value === "number" && !Number.isFinite(value)) {
    throw new RangeError("a number in an event must be finite");
  }
  return JSON.stringify(value);
}

/** Replaces lone surrogates, which no UTF-8 can carry, by U+FFFD. */
export function wellFormed(text: string): string {
  return text.replace(/[\uD800-\uDBFF](?![\uDC00-\uDFFF])|(?<![\uD800-\uDBFF])[\uDC00-\uDFFF]/g, "\uFFFD");
}

/** A deep copy in which every string is well-formed and nothing is undefined. */
export function cleaned<T>(value: T): T {
  if (typeof value === "string") return wellFormed(value) as T;
  if (Array.isArray(value)) return value.map(cleaned) as T;
  if (typeof value === "object" && value !== null) {
    const pairs = Object.entries(value).filter(([, v]) => v !== undefined);
    return Object.fromEntries(pairs.map(([k, v]) => [wellFormed(k), cleaned(v)])) as T;
  }
  return value;
}
