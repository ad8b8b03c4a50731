import { beforeEach, describe, expect, test, vi } from "vitest";
import { clockOffset, common, forgetClock, measured, offsetOf } from "./clock";

beforeEach(() => {
  vi.stubGlobal("localStorage", { getItem: () => null, setItem: () => {}, removeItem: () => {} });
  forgetClock();
});

/** A phone so far ahead of the server, with so long a way there and back. */
function exchange(aheadMs: number, thereMs: number, backMs: number) {
  const t1 = 1_780_000_000_000;
  return { t1, t2: t1 - aheadMs + thereMs, t3: t1 - aheadMs + thereMs + 2, t4: t1 + thereMs + 2 + backMs };
}

describe("the common clock", () => {
  test("an even round trip gives the offset itself (scenario 10: 3 min 12 s fast)", () => {
    expect(offsetOf(exchange(192_000, 40, 40))).toEqual({ offset_ms: -192_000, error_ms: 41 });
  });

  test("an uneven one is off by no more than its error", () => {
    const o = offsetOf(exchange(192_000, 0, 300));
    expect(Math.abs(o.offset_ms + 192_000)).toBeLessThanOrEqual(o.error_ms);
  });

  test("a better exchange replaces a worse, a worse one does not", () => {
    measured(exchange(5000, 200, 10));
    measured(exchange(5000, 5, 5));
    expect(clockOffset()).toEqual({ offset_ms: -5000, error_ms: 6 });
    measured(exchange(5000, 400, 0));
    expect(common(10_000)).toBe(5_000);
  });

  test("a clock that was changed is believed at once, even from a poor exchange", () => {
    measured(exchange(5000, 5, 5));
    measured(exchange(-60_000, 50, 50));
    expect(clockOffset()?.offset_ms).toBe(60_000);
  });

  test("an answer without times changes nothing", () => {
    measured({ t1: 1, t2: Number.NaN, t3: Number.NaN, t4: 2 });
    expect(clockOffset()).toBeNull();
  });
});
