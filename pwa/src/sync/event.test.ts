import { createHash } from "node:crypto";
import { readFileSync } from "node:fs";
import { describe, expect, test } from "vitest";
import type { LogEvent } from "../wire/event";
import { canonical, cleaned, wellFormed } from "./canonical";
import { hashOf, seal, uuidv7 } from "./event";
import { sha256Hex } from "./sha256";

const vectors = JSON.parse(
  readFileSync(new URL("../../../search/incident/testdata/hash-vectors.json", import.meta.url), "utf8"),
) as LogEvent[];

describe("hashes", () => {
  test("are those of the server's own vectors", () => {
    expect(vectors.length).toBeGreaterThan(0);
    for (const { hash, ...event } of vectors) expect(hashOf(event), event.id).toBe(hash);
  });

  test("change when any hashed member changes", () => {
    const { hash, ...event } = vectors[0] as LogEvent;
    expect(hashOf({ ...event, at: "2026-06-01T02:14:07.001Z" })).not.toBe(hash);
    expect(hashOf({ ...event, body: { source: "phone" } })).not.toBe(hash);
  });

  test("leave out seq and received_at", () => {
    const { hash, ...event } = vectors[0] as LogEvent;
    expect(hashOf({ ...event, seq: 7, received_at: "2026-06-01T02:14:08Z" })).toBe(hash);
  });
});

describe("sha256Hex", () => {
  test("agrees with node's at every length around the block boundaries", () => {
    for (let n = 0; n < 200; n++) {
      const text = "aß€😀".repeat(n).slice(0, n).replace(/[\uD800-\uDFFF]/g, "x");
      expect(sha256Hex(text), `length ${n}`).toBe(createHash("sha256").update(text).digest("hex"));
    }
  });
});

describe("canonical", () => {
  // RFC 8785, section 3.2.3, the sorting example.
  test("sorts members by UTF-16 code units", () => {
    const value = JSON.parse(
      '{"\\u20ac":"Euro Sign","\\r":"Carriage Return","\\ufb33":"Hebrew Letter Dalet With Dagesh","1":"One","\\ud83d\\ude00":"Emoji: Grinning Face","\\u0080":"Control","\\u00f6":"Latin Small Letter O With Diaeresis"}',
    ) as Record<string, string>;
    const order = [...canonical(value).matchAll(/:"([^"]+)"/g)].map((m) => m[1]);
    expect(order).toEqual([
      "Carriage Return", "One", "Control", "Latin Small Letter O With Diaeresis", "Euro Sign",
      "Emoji: Grinning Face", "Hebrew Letter Dalet With Dagesh",
    ]);
  });

  // RFC 8785, section 3.2.2, the example's numbers and literals.
  test("prints numbers as ECMAScript does", () => {
    // biome-ignore lint/correctness/noPrecisionLoss: the example of the RFC is about just that
    expect(canonical({ numbers: [333333333.33333329, 1e30, 4.5, 2e-3, 1e-27], literals: [null, true, false] })).toBe(
      '{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27]}',
    );
  });

  test("refuses what JSON cannot say", () => {
    expect(() => canonical({ x: Number.NaN })).toThrow(RangeError);
  });

  test("cleaned makes strings well-formed and drops undefined", () => {
    expect(cleaned({ a: "x\ud800", b: undefined, c: ["\udc00y", { d: "😀" }] })).toEqual({
      a: "x\ufffd", c: ["\ufffdy", { d: "😀" }],
    });
    expect(wellFormed("\udc00\ud800")).toBe("\ufffd\ufffd");
  });
});

describe("uuidv7", () => {
  // RFC 9562, appendix A.6.
  test("is the example of the RFC", () => {
    const random = new Uint8Array([0, 0, 0, 0, 0, 0, 0x0c, 0xc3, 0x18, 0xc4, 0xdc, 0x0c, 0x0c, 0x07, 0x39, 0x8f]);
    expect(uuidv7(0x017f22e279b0, random)).toBe("017f22e2-79b0-7cc3-98c4-dc0c0c07398f");
  });
});

describe("seal", () => {
  const draft = {
    id: "018f3c2e-0000-7000-8000-000000000001",
    incident: "018f3c2e-7b1a-7c3d-9e4f-000000000001",
    kind: "note" as const,
    at: "2026-06-01T02:14:07.000Z",
    device_at: "2026-06-01T02:14:07.000Z",
    body: { text: "a \ud800 b" },
  };

  test("links each event to the one before", () => {
    const first = seal(draft, { device: "d", next_seq: 1, last_hash: "" });
    const second = seal({ ...draft, id: "018f3c2e-0000-7000-8000-000000000002" }, first.chain);
    expect(first.event.prev_hash).toBe("");
    expect(second.event.prev_hash).toBe(first.event.hash);
    expect(second.event.device_seq).toBe(2);
    expect(first.event.body.text).toBe("a \ufffd b");
  });
});
