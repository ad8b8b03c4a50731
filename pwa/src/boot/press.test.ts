import { describe, expect, test } from "vitest";
import { PressFilter } from "./press";

describe("PressFilter", () => {
  test("an 80 ms press is a press (scenario 2)", () => {
    const f = new PressFilter();
    expect(f.begin(1, 0)).toBe(true);
    f.end(1, 80);
    expect(f.held).toBe(false);
  });

  test("a long press makes no second mark (scenario 2)", () => {
    const f = new PressFilter();
    expect(f.begin(1, 0)).toBe(true);
    expect(f.begin(1, 4000)).toBe(false);
    f.end(1, 5000);
    // The thumb skips on wet glass as it lifts.
    expect(f.begin(2, 5100)).toBe(false);
    expect(f.begin(3, 5500)).toBe(true);
  });

  test("a second finger on the target is not a second person (scenario 1)", () => {
    const f = new PressFilter();
    expect(f.begin(1, 0)).toBe(true);
    expect(f.begin(2, 500)).toBe(false);
    f.end(2, 600);
    f.end(1, 700);
    expect(f.begin(4, 1100)).toBe(true);
  });

  test("a contact that skips within 300 ms is one press", () => {
    const f = new PressFilter();
    expect(f.begin(1, 0)).toBe(true);
    f.end(1, 20);
    expect(f.begin(2, 250)).toBe(false);
    expect(f.begin(3, 321)).toBe(true);
  });

  test("two presses a second apart are two", () => {
    const f = new PressFilter();
    expect(f.begin(1, 0)).toBe(true);
    f.end(1, 90);
    expect(f.begin(2, 1000)).toBe(true);
  });

  test("a contact whose end was lost does not block for ever", () => {
    const f = new PressFilter();
    expect(f.begin(1, 0)).toBe(true);
    expect(f.begin(2, 10_001)).toBe(true);
  });
});
