import { describe, expect, test } from "vitest";
import { closingHz, type Sound, tonesOf } from "./sound";

const SOUNDS: Sound[] = ["marked", "turn", "closing", "lost"];

describe("the four sounds", () => {
  test("no two are alike", () => {
    const shapes = SOUNDS.map((s) => JSON.stringify(tonesOf(s)));
    expect(new Set(shapes).size).toBe(4);
  });

  test("all lie between 500 Hz and 3 kHz, whatever the range", () => {
    for (const m of [0, 1, 250, 500, 1e6, -5]) {
      for (const s of SOUNDS) {
        for (const tone of tonesOf(s, m)) {
          for (const hz of [tone.hz, tone.to ?? tone.hz]) {
            expect(hz).toBeGreaterThanOrEqual(500);
            expect(hz).toBeLessThanOrEqual(3000);
          }
        }
      }
    }
  });

  test("closing rises as the range falls", () => {
    const pitches = [500, 300, 100, 0].map(closingHz);
    expect(pitches).toEqual([...pitches].sort((a, b) => a - b));
    expect(pitches[0]).toBeLessThan(pitches[3] as number);
  });
});
