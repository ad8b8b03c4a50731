import { describe, expect, test } from "vitest";
import type { Frame, State } from "../wire/frame";
import { returnView } from "./return_view";
import { select, type Selection } from "./select";

const AT = "2026-06-01T02:17:19.000Z";
const FELL = "2026-06-01T02:14:07.000Z";

const frame: Frame = {
  incident: "i", at: AT, status: "open", person: 1, elapsed_s: 192,
  mark: null,
  fix: { position: { lat: 54.1, lon: 7.9 }, at: AT, age_s: 0.8, sog_kn: 5, cog_deg: 323, source: "vessel", error_m: 8 },
  datum: {
    position: { lat: 54.1, lon: 7.9 }, error_m: 61, age_s: 192, moved_m: 85, moved_towards_deg: 75,
    drift_kn: 0.9, drift_towards_deg: 75, wind_from_deg: 240, wind_kn: 14, wind_at: FELL,
    current_set_deg: null, current_drift_kn: null, current_at: null, basis: "mark",
  },
  heading_deg: 323, heading_source: "compass", range_m: 222, bearing_deg: 283, bearing_mag_deg: 281,
  variation_deg: 2, relative_deg: -40, wedge_deg: 15.9, closing_kn: 4.1, eta_s: 105,
  do: { code: "steer_to", bearing_deg: 283, relative_deg: -40, way: "port" },
  cautions: ["call_first", "no_current"],
};

const state: State = {
  id: "i", opened_at: FELL, last_at: FELL, events: 1, status: "open",
  marks: [{
    event: "m1", at: "2026-06-01T02:14:32.000Z", device: "d", device_at: FELL, fell_at: FELL, number: 1, person: 1,
    place: { position: { lat: 54.1, lon: 7.9 }, source: "track", error_m: 12 },
    adjusted: { event: "a", at: FELL, device: "d" },
  }],
  persons: [{ no: 1, status: "in_water", status_at: FELL, life_jacket: "unknown", in_sight: false, working_mark: "m1" }],
};

const selection = select([state], null) as Selection;
const input = { frame, frameAgeS: 0, selection, nowMs: Date.parse(AT), ringUp: "head_up" as const };

describe("returnView", () => {
  test("says what to do in words, with a handful of figures", () => {
    const v = returnView(input);
    expect(v.order).toBe("Come port, steer 283");
    expect(v.direction).toBe("40 degrees to port");
    expect(v.range).toEqual({ figure: "220", unit: "m" });
    expect(v.bearing).toBe("283 T, 281 M");
    expect(v.elapsed).toBe("00:03:12");
    expect(v.speed).toBe("closing 4.1 kn, 2 min");
  });

  test("the two things have two words, and each its own age or time", () => {
    const v = returnView(input);
    expect(v.look).toEqual({ word: "Where to look now", detail: "moved 85 m towards 075, within 65 m", typed: false });
    expect(v.happened.word).toBe("Where it happened");
    expect(v.happened.detail).toBe("mark 1, 02:14:07, recorded track, moved back, within 15 m");
  });

  test("the first caution is that this does not call for help", () => {
    expect(returnView(input).cautions[0]).toBe("This does not call for help. Use the radio.");
  });

  test("elapsed time runs on without any frame", () => {
    const v = returnView({ ...input, frame: null });
    expect(v.elapsed).toBe("00:03:12");
    expect(v.order).toBe("Marked and kept. Guidance is loading.");
    expect(v.fix).toEqual({ text: "no fix", stale: true });
    expect(v.ring.wedge).toBeNull();
  });

  test("head-up turns the ring, north-up does not", () => {
    expect(returnView(input).ring).toMatchObject({ northDeg: 37, wedge: { centreDeg: 320, halfDeg: 15.9 }, up: "Ahead is up" });
    expect(returnView({ ...input, ringUp: "north_up" }).ring).toMatchObject({ northDeg: 0, wedge: { centreDeg: 283 } });
  });

  test("without a heading the ring is north-up and says so; nothing is said of port and starboard", () => {
    const blind: Frame = { ...frame, heading_deg: null, relative_deg: null, do: { code: "steer_to", bearing_deg: 283 } };
    const v = returnView({ ...input, frame: blind });
    expect(v.ring).toMatchObject({ northDeg: 0, up: "North is up: no heading" });
    expect(v.direction).toBeNull();
    expect(v.order).toBe("Steer 283");
  });

  test("turned by the phone's compass: magnetic plus variation, and said so", () => {
    const phone = { ...input, ringUp: "phone_up" as const };
    expect(returnView({ ...phone, phoneMagDeg: 279 }).ring).toMatchObject({ wedge: { centreDeg: 2 }, up: "This phone's way is up" });
    expect(returnView({ ...phone, phoneMagDeg: null }).ring).toMatchObject({ northDeg: 0, up: "North is up: no compass" });
  });

  test("an error as large as the range is a full ring and a look all round", () => {
    const near: Frame = { ...frame, range_m: 50, wedge_deg: 180, do: { code: "look_all_round", range_m: 50 } };
    const v = returnView({ ...input, frame: near });
    expect(v.direction).toBe("all round");
    expect(v.order).toContain("Look all round");
    expect(v.ring.wedge?.halfDeg).toBe(180);
  });

  test("a turn back with the side unknown names no side (scenario 13)", () => {
    const astern: Frame = { ...frame, relative_deg: 170, do: { code: "come_about", bearing_deg: 133, way: "either" } };
    const v = returnView({ ...input, frame: astern });
    expect(v.order).toBe("Turn back, either way, steer 133");
  });

  test("a stale fix says how old, also as the frame itself ages", () => {
    const old: Frame = { ...frame, fix: { ...(frame.fix as NonNullable<Frame["fix"]>), age_s: 40, stale: true } };
    const v = returnView({ ...input, frame: old, frameAgeS: 10 });
    expect(v.fix).toEqual({ text: "OLD FIX: 50 s old, vessel", stale: true });
    expect(v.ring.stale).toBe(true);
  });

  test("the cross lies where the disc was before it moved", () => {
    // Dead ahead north 100 m, moved 100 m east since: the cross is 100 m north-west by vector.
    const f: Frame = {
      ...frame, heading_deg: 0, bearing_deg: 0, range_m: 100, relative_deg: 0,
      datum: { ...(frame.datum as NonNullable<Frame["datum"]>), moved_m: 100, moved_towards_deg: 90 },
    };
    const cross = returnView({ ...input, frame: f }).ring.cross;
    expect(cross?.rangeM).toBeCloseTo(Math.SQRT2 * 100, 6);
    expect(cross?.angleDeg).toBeCloseTo(315, 6);
  });

  test("a typed position is underlined", () => {
    const s = structuredClone(state);
    const mark = s.marks[0];
    if (mark?.place) mark.place.source = "typed";
    expect(returnView({ ...input, selection: select([s], null) as Selection }).happened.typed).toBe(true);
  });
});

describe("select", () => {
  test("real before drill, newest first, tests and closed ones never", () => {
    const drill = { ...state, id: "drill", drill: true, opened_at: "2026-06-01T03:00:00.000Z" };
    const trial = { ...state, id: "test", test: true };
    const closed = { ...state, id: "closed", status: "stood_down" as const };
    expect(select([drill, trial, closed, state], null)?.state.id).toBe("i");
    expect(select([trial, closed], null)).toBeNull();
  });

  test("recovering one does not clear the other (scenario 31)", () => {
    const two = structuredClone(state);
    two.persons[0] = { ...(two.persons[0] as State["persons"][0]), status: "aboard" };
    two.persons.push({ no: 2, status: "in_water", status_at: FELL, life_jacket: "unknown", in_sight: false, working_mark: "m2" });
    two.marks.push({ ...(two.marks[0] as State["marks"][0]), event: "m2", number: 2, person: 2 });
    const s = select([two], null);
    expect(s?.person?.no).toBe(2);
    expect(s?.mark?.event).toBe("m2");
  });
});
