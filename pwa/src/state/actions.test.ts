import { describe, expect, test } from "vitest";
import { pastTime } from "./actions";

describe("pastTime", () => {
  const now = Date.parse("2026-06-01T02:14:30Z");
  test.each([
    ["02:14", "2026-06-01T02:14:00.000Z"],
    ["2:14:07", "2026-06-01T02:14:07.000Z"],
    ["02.10", "2026-06-01T02:10:00.000Z"],
    // Later than now can only have been yesterday.
    ["23:55", "2026-05-31T23:55:00.000Z"],
  ])("%s", (text, at) => expect(new Date(pastTime(text, now) as number).toISOString()).toBe(at));
  test.each(["", "2414", "24:00", "12:60", "12:00:61", "noon", "12:0"])("%s is refused", (text) =>
    expect(pastTime(text, now)).toBeNull());
});
