import { expect, test } from "vitest";
import { feedLine } from "./feeds";

const feed = { url: "tcp://192.168.1.20:10110", good: 120, bad_checksum: 2, malformed: 1, unknown: 7 } as const;

test("a feed says how it is, and counts what it said", () => {
  const line = feedLine({ ...feed, state: "live", last_at: "2026-06-01T02:00:00Z" }, Date.parse("2026-06-01T02:00:04Z"));
  expect(line.title).toContain("tcp://192.168.1.20:10110");
  expect(line.counts).toContain("120");
  expect(line.counts).toContain("3");
  expect(line.counts).toContain("4 s");
});

test("a feed that failed says why, and one that never spoke has no age", () => {
  const line = feedLine({ ...feed, state: "failed", reason: "connect: refused", good: 0 }, 0);
  expect(line.title).toContain("connect: refused");
  expect(line.counts).not.toContain("NaN");
});
