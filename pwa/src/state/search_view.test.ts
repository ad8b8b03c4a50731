import { describe, expect, test } from "vitest";
import type { LegLaid, LegSeen, Search } from "../wire/search";
import { countdown, legPieces, legView, mayAdvance, partRun, percent, proposalView, rideM, running } from "./search_view";

const seen: LegSeen = {
  search: "s", leg: 3, of: 9, kind: "search", course_deg: 64, steer_deg: 68, steer_mag_deg: 66.2, cross_m: 18.4, to_go_m: 260,
  turn_in_s: 98.7, next_steer_deg: 188, next_turn_deg: 120, from: { lat: 0, lon: 0 }, to: { lat: 0, lon: 0 },
};

describe("the leg in words", () => {
  test("as the helm reads it", () => {
    const v = legView(seen, 900, 2);
    expect(v.leg).toBe("Leg 3 of 9");
    expect(v.cross).toBe("18 m right of leg");
    expect(v.turn).toBe("turn in 1 min 40");
    expect(v.steer).toEqual({ figure: "066", unit: "M" });
    expect(v.next).toBe("then starboard 120, 186 M");
    expect(v.turnNow).toBe(false);
  });

  test("left of it, to port, true where magnetic is not known", () => {
    const v = legView({ ...seen, cross_m: -120, next_turn_deg: -90, steer_mag_deg: null }, 900, null);
    expect(v.cross).toBe("120 m left of leg");
    expect(v.next).toBe("then port 90, 188 T");
    expect(v.steer).toEqual({ figure: "068", unit: "T" });
  });

  test("turn now, also when it is done; never while paused", () => {
    expect(legView({ ...seen, turn_in_s: 4 }, 900, 2)).toMatchObject({ turn: "TURN NOW", turnNow: true });
    expect(legView({ ...seen, turn_in_s: null, to_go_m: -3, done: true }, 900, 2).turnNow).toBe(true);
    expect(legView({ ...seen, done: true, paused: true }, 900, 2)).toMatchObject({ turn: "paused", turnNow: false });
    expect(legView({ ...seen, leg: 9, done: true }, 900, 2)).toMatchObject({ turn: "END OF THE LAST LEG", next: "last leg" });
  });

  test("before the leg has begun it says how far that is, not when to turn", () => {
    expect(legView({ ...seen, to_go_m: 1100 }, 900, 2).turn).toBe("leg begins in 200 m");
  });

  test("no position: heading and time, and nothing invented", () => {
    const v = legView({ ...seen, cross_m: null, to_go_m: null, turn_in_s: null, note: "own position unknown: steer by heading and time" }, 900, 2);
    expect(v.cross).toBe("Steer by heading and time");
    expect(v.turn).toBe("time to turn not known");
    expect(v.steer?.figure).toBe("066");
  });

  test.each([[3.2, "4 s"], [41, "45 s"], [98.7, "1 min 40"], [120, "2 min"], [58, "1 min"], [725, "12 min"]])("%d s is %s", (s, text) => {
    expect(countdown(s)).toBe(text);
  });
});

const laid: LegLaid = { kind: "search", course_deg: 90, length_m: 1000, from: { east_m: 0, north_m: 0 }, to: { east_m: 1000, north_m: 0 } };

describe("what was run", () => {
  // Scenario 22: the helm left leg 4 after 40 %.
  test("only the part that was run is counted", () => {
    expect(partRun({ ...seen, to_go_m: 600 }, laid, 5, 0)).toBe(0.4);
    expect(partRun({ ...seen, to_go_m: 1200 }, laid, 5, 0)).toBe(0);
    expect(partRun({ ...seen, to_go_m: -20 }, laid, 5, 0)).toBe(1);
  });

  test("with no position by time: 5 kn for 100 s are 257 m", () => {
    expect(partRun({ ...seen, to_go_m: null }, laid, 5, 100)).toBeCloseTo(0.257, 3);
  });

  const search: Search = {
    event: "s", at: "", device: "d", status: "running", leg: 5, pattern: "square", datum: { lat: 54, lon: 8 }, begin: "2026-01-01T10:00:00Z",
    speed_kn: 5, current: { set_deg: 0, drift_kn: 0 }, datum_drift: { set_deg: 90, drift_kn: 1.5 }, legs: Array.from({ length: 6 }, () => laid),
    done: [
      { leg: 1, part: 1, how: "run", ended_at: "2026-01-01T10:05:00Z" },
      { leg: 2, part: 1, how: "run", ended_at: "2026-01-01T10:10:00Z" },
      { leg: 4, part: 0.4, how: "skipped", ended_at: "2026-01-01T10:20:00Z" },
      { leg: 5, part: 0, how: "", ended_at: "0001-01-01T00:00:00Z" },
    ],
  };

  test("done, left out, steered and to do are told apart; the gap is drawn", () => {
    expect(legPieces(search).map((p) => `${p.leg} ${p.style} ${p.from}-${p.to}`)).toEqual([
      "1 done 0-1", "2 done 0-1", "3 left_out 0-1", "4 done 0-0.4", "4 left_out 0.4-1", "5 now 0-1", "6 todo 0-1",
    ]);
  });

  // Scenario 20: the centre moves 1.125 nm in 45 min at 1.5 kn.
  test("the legs ride with the datum", () => {
    const { east_m, north_m } = rideM(search, Date.parse("2026-01-01T10:45:00Z"));
    expect(east_m).toBeCloseTo(1.125 * 1852, 3);
    expect(north_m).toBeCloseTo(0, 3);
    expect(rideM(search, Date.parse("2026-01-01T09:00:00Z")).east_m).toBe(0);
  });

  test("the newest of the own vessel that runs is steered; another's is not", () => {
    const of = (over: Partial<Search>) => ({ searches: [search, { ...search, event: "t", ...over }] }) as never;
    expect(running(of({}))?.event).toBe("t");
    expect(running(of({ vessel: "other" }))?.event).toBe("s");
    expect(running(of({ status: "dropped" }))?.event).toBe("s");
    expect(running(of({ status: "paused" }))?.event).toBe("t");
  });
});

describe("who moves on to the next leg", () => {
  const watch = { device: "me", phones: 3, roles: [], inCharge: null, began: "other" };
  test.each([
    ["alone", { phones: null }, true],
    ["the only phone", { phones: 1 }, true],
    ["one of three, another began", {}, false],
    ["one of three, began it", { began: "me" }, true],
    ["in charge", { inCharge: "me" }, true],
    ["another in charge", { inCharge: "other", began: "me" }, false],
    ["at the helm", { inCharge: "other", roles: [{ role: "helm", name: "A", holder: "me" }] }, true],
    ["in charge, another at the helm", { inCharge: "me", roles: [{ role: "helm", name: "A", holder: "other" }] }, false],
    ["the helm was laid down", { inCharge: "me", roles: [{ role: "helm", name: "", holder: "other" }] }, true],
  ])("%s", (_, over, may) => {
    expect(mayAdvance({ ...watch, ...over })).toBe(may);
  });
});

describe("a proposal", () => {
  const body = {
    pattern: "sector" as const, datum: { lat: 54, lon: 8 }, begin: "", speed_kn: 6, current: { set_deg: 0, drift_kn: 0 }, datum_drift: { set_deg: 0, drift_kn: 0 },
    legs: [{ ...laid, course_deg: 42 }], sweep_width_nm: 0.2, sweep_width_by: "table: small boat", reason: "because",
  };

  // Scenario 21: a chance is titled with what it stands on, and is no success.
  test("its chance says what it stands on", () => {
    const v = proposalView({ body, coverage: 0.57, pod_ideal: 0.789, pod_poor: 0.44, length_m: 8334, takes_s: 2700, covers: false, notes: ["n"] });
    expect(v.pod).toMatch(/^If the person is inside, conditions as stated: .*44 % to 78 %/);
    expect(v.coverage).toBe("Coverage 0.57.");
    expect(v.title).toBe("Sector search");
    expect(v.size).toBe("1 legs, 4.50 nm, 45 min");
    expect(v.notes).toEqual(["Does not reach over the whole error", "N"]);
    expect(JSON.stringify(v)).not.toMatch(/success/i);
  });

  test("nothing is ever certain", () => {
    expect(percent(1)).toBe("99 %");
    expect(percent(0.999)).toBe("99 %");
    expect(percent(0.44)).toBe("44 %");
  });
});
