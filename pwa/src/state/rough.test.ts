import { describe, expect, test } from "vitest";
import type { Kind, LogEvent } from "../wire/event";
import { roughStates } from "./rough";
import { live } from "./select";

let n = 0;
function event(kind: Kind, at: string, body: Record<string, unknown> = {}, over: Partial<LogEvent> = {}): LogEvent {
  n++;
  return {
    id: `e${n}`, incident: "i", device: "d", device_seq: n, prev_hash: "", kind, at: `2026-06-01T02:${at}.000Z`,
    device_at: `2026-06-01T02:${at}.000Z`, body, hash: "h", ...over,
  };
}

describe("roughStates", () => {
  test("a mark opens, every press is kept and numbered, the first is steered by (scenario 5)", () => {
    const [b, a] = [event("marked", "14:47", { source: "nothing" }), event("marked", "14:07", { source: "nothing" })];
    const s = roughStates([b, a])[0];
    expect(s?.marks.map((m) => [m.number, m.event])).toEqual([[1, a.id], [2, b.id]]);
    expect(s?.persons[0]?.working_mark).toBe(a.id);
  });

  test("the order of arrival does not matter", () => {
    const all = [event("marked", "14:07", { source: "nothing" }), event("aboard", "20:00", { condition: "well" }), event("stood_down", "21:00", { reason: "x" })];
    expect(roughStates([...all].reverse())).toEqual(roughStates(all));
    expect(live(roughStates(all))).toEqual([]);
  });

  test("an incident of which every mark was a mistake is over (scenario 6)", () => {
    const a = event("marked", "14:07", { source: "nothing" });
    expect(live(roughStates([a, event("mark_dismissed", "14:20", { mark: a.id })]))).toEqual([]);
  });

  test("a mark after a stand-down opens it again", () => {
    const all = [event("marked", "14:07", { source: "nothing" }), event("stood_down", "21:00", { reason: "x" }), event("marked", "22:00", { source: "nothing" })];
    expect(live(roughStates(all))).toHaveLength(1);
  });

  test("a test mark is no incident; a drill is one, and stays a drill", () => {
    expect(live(roughStates([event("marked", "14:07", { source: "nothing" }, { test: true })]))).toEqual([]);
    expect(roughStates([event("marked", "14:07", { source: "nothing" }, { drill: true })])[0]?.drill).toBe(true);
  });
});
