import { describe, expect, test } from "vitest";
import { ageS, type HeldFix, markedFrom } from "./position";

const NOW = 1_780_000_000_000;
const MONO = 50_000;

function fix(age_s: number, over: Partial<HeldFix> = {}): HeldFix {
  return {
    position: { lat: 54.1, lon: 7.9 }, error_m: 8, sog_kn: 6, cog_deg: 283, heading_deg: null, reckoned: false,
    taken_ms: NOW - age_s * 1000, taken_mono_ms: MONO - age_s * 1000, ...over,
  };
}

describe("markedFrom", () => {
  test("the vessel's fix comes first, with its age", () => {
    const b = markedFrom(fix(1.25), fix(0.1, { position: { lat: 1, lon: 2 } }), NOW, MONO);
    expect(b).toEqual({ source: "vessel", position: { lat: 54.1, lon: 7.9 }, error_m: 8, fix_age_s: 1.25, sog_kn: 6, cog_deg: 283 });
  });

  test("an old fix of the vessel gives way to a fresh one of the phone", () => {
    expect(markedFrom(fix(20), fix(2), NOW, MONO)).toMatchObject({ source: "phone", fix_age_s: 2 });
  });

  test("of two old ones the younger is kept, with its age (scenario 8)", () => {
    expect(markedFrom(fix(95), fix(300), NOW, MONO)).toMatchObject({ source: "vessel", fix_age_s: 95, sog_kn: 6 });
  });

  test("a position carried on by course and speed says so", () => {
    expect(markedFrom(fix(8, { reckoned: true }), null, NOW, MONO)).toMatchObject({ source: "dr", fix_age_s: 8 });
  });

  test("no fix at all is marked all the same (scenario 9)", () => {
    expect(markedFrom(null, null, NOW, MONO)).toEqual({ source: "nothing" });
  });

  test("what is absent is left out, never zero", () => {
    const b = markedFrom(null, fix(1, { error_m: null, sog_kn: null, cog_deg: null }), NOW, MONO);
    expect(Object.keys(b).sort()).toEqual(["fix_age_s", "position", "source"]);
  });
});

describe("ageS", () => {
  test("where the clocks disagree the older age counts", () => {
    expect(ageS(fix(1), NOW + 60_000, MONO)).toBe(61);
    expect(ageS(fix(1), NOW - 60_000, MONO + 4000)).toBe(5);
  });
});
