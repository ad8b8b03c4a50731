import { describe, expect, test } from "vitest";
import type { ColdWater } from "../engine/search_calls";
import { bandText, coldView, currentView, lightView, windView } from "./assume_view";
import { conditions, knotsOf, probableSeaM, typed } from "./conditions";

const H = 3600e9;

describe("what is assumed", () => {
  test("a value says who said it and when; what a person typed is marked so", () => {
    const at = "2026-03-01T14:02:11Z";
    expect(windView({ at, source: "person", by: "Ann", from_deg: 240, speed_kn: 13 })).toEqual({ value: "from 240, 13.0 kn", by: "typed in, Ann, 14:02 UTC", typed: true });
    expect(windView({ at, source: "instrument", from_deg: 5, speed_kn: 13 })).toMatchObject({ by: "instrument, 14:02 UTC", typed: false });
    expect(currentView({ at, source: "tables", set_deg: 90, drift_kn: 1.4 })).toMatchObject({ value: "set 090, drift 1.4 kn", typed: true });
    expect(windView(undefined)).toEqual({ value: "not known", by: "", typed: false });
  });

  test("cold water keeps its spread, its open ends, its sources and its texts", () => {
    const w: ColdWater = {
      TempC: 12, State: "in the tables", Movement: { Low: 0.25 * H, High: 0.5 * H }, Consciousness: null, Survival: { Low: H, High: null },
      Figures: [{ What: "movement", Band: { Low: 0.25 * H, High: 0.5 * H }, Source: "a table" }], Texts: ["Keep searching."],
    };
    const v = coldView(w);
    expect(v.lines).toEqual([{ what: "Hands and legs of use", band: "15 min to 30 min" }, { what: "Survival, all tables", band: "60 min and longer" }]);
    expect(v.figures).toEqual(["Hands and legs of use: 15 min to 30 min (a table)"]);
    expect(v.texts[0]).toBe("Keep searching.");
    expect(bandText({ Low: null, High: 24 * H })).toBe("up to 24 h");
  });

  test("light left to search by", () => {
    const now = Date.parse("2026-03-01T17:00:00Z");
    const o = { Light: 0, Sun: { AltitudeDeg: 4, AzimuthTrue: 255 }, Next: [{ Kind: 5, At: "2026-03-01T17:30:00Z" }, { Kind: 6, At: "2026-03-01T18:02:00Z" }] };
    expect(lightView(o, now)).toEqual(["Daylight", "Sunset 17:30 UTC, in 30 min", "Light to search by until 18:02 UTC, 62 min left", "Sun bears 255, 4 degrees high: glare on that side"]);
    expect(lightView({ Light: 4, Sun: { AltitudeDeg: -30, AzimuthTrue: 0 }, Next: null }, now)).toEqual(["Night", "It does not get light within 36 hours"]);
  });
});

describe("conditions", () => {
  test("what is said wins, what is not is assumed from what is known", () => {
    const c = conditions({ visibility_nm: 1 }, { windKn: 20, light: 3 });
    expect(c).toMatchObject({ visibility_nm: 1, sea_m: 2, night: true, tired: false });
    expect(conditions({ night: false, sea_m: 0.5 }, { windKn: 20, light: 3 })).toMatchObject({ night: false, sea_m: 0.5 });
    expect(conditions({}, { windKn: null, light: null })).toMatchObject({ night: false });
  });

  test("forces", () => {
    expect(knotsOf(4)).toBe(13);
    expect(knotsOf(13)).toBeNull();
    expect(probableSeaM(16.4)).toBe(1);
    expect(probableSeaM(200)).toBe(14);
  });

  test.each([["12", 12], [" 12,5 ", 12.5], ["-1.5", -1.5], ["", null], ["warm", null], ["12 kn", null], ["1e3", null], ["99", null]])("typed %j", (text, n) => {
    expect(typed(text, -2, 40)).toBe(n);
  });
});
