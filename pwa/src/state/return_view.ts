// The return screen in words and figures: a pure function of what the engine
// says, so that it can be tested without a screen. It rounds and words; it
// computes nothing that a person steers by.

import type { RingView } from "../parts/ring_view";
import { type Key, isKey, t } from "../text/text";
import * as f from "../units/format";
import type { Frame } from "../wire/frame";
import type { Selection } from "./select";

export interface ReturnInput {
  frame: Frame | null;
  /** How long ago the frame was true, beyond the ages in it. */
  frameAgeS: number;
  selection: Selection;
  /** Common clock, Unix milliseconds. */
  nowMs: number;
  ringUp: "head_up" | "north_up" | "phone_up";
  /** Where this phone points, degrees magnetic; null when its compass is silent. */
  phoneMagDeg?: number | null;
}

/** One of the two things that never look alike. */
export interface Thing {
  word: string;
  detail: string;
  /** A person typed it: underlined. */
  typed: boolean;
}

export interface ReturnView {
  elapsed: string;
  /** The sentence: what to do now. */
  order: string;
  /** "40 degrees to port". */
  direction: string | null;
  range: f.Figure | null;
  bearing: string | null;
  speed: string | null;
  look: Thing;
  happened: Thing;
  fix: { text: string; stale: boolean };
  sight: string;
  cautions: string[];
  ring: RingView;
  stale: boolean;
}

/** Builds the view. */
export function returnView(input: ReturnInput): ReturnView {
  const { frame, selection, nowMs } = input;
  const fellMs = Date.parse(selection.mark?.fell_at ?? selection.state.opened_at);
  const stale = !frame?.fix || !!frame.fix.stale;
  const direction = directionWords(frame);
  return {
    elapsed: f.elapsed((nowMs - fellMs) / 1000),
    order: orderWords(frame),
    direction,
    range: frame?.range_m != null ? f.range(frame.range_m) : null,
    // Alongside or aboard, nobody steers by a bearing.
    bearing: near(frame) ? null : bearingWords(frame),
    speed: near(frame) ? null : speedWords(frame),
    look: lookThing(frame),
    happened: happenedThing(selection),
    fix: fixWords(frame, input.frameAgeS),
    sight: sightWords(selection),
    cautions: cautionWords(frame),
    ring: ringView(input, direction),
    stale,
  };
}

function directionWords(frame: Frame | null): string | null {
  if (frame?.wedge_deg != null && frame.wedge_deg >= 180) return t("return.all_round");
  if (frame?.relative_deg == null) return null;
  const { side, deg } = f.relative(frame.relative_deg);
  return t(`return.${side}`, { deg });
}

/** The sentence of the engine's code; a code without words still gets one that is true. */
function orderWords(frame: Frame | null): string {
  if (!frame) return t("return.waiting");
  const { code, way, back_deg, bearing_deg } = frame.do;
  const bearing = f.bearing(bearing_deg ?? frame.bearing_deg ?? 0);
  const side = way === "port" || way === "starboard" ? t(`way.${way}`) : "";
  switch (code) {
    case "steer_to":
      return side && Math.abs(frame.relative_deg ?? 0) >= 2.5
        ? t("do.steer_to.turn", { way: side, bearing })
        : t("do.steer_to", { bearing });
    case "steer_leg":
      return t("do.steer_leg", { bearing });
    case "come_about":
      return side ? t("do.come_about", { way: side, bearing }) : t("do.come_about.either", { bearing });
    case "no_position":
    case "window":
    case "no_fix":
      return back_deg === undefined
        ? t(`do.${code}`)
        : `${t(`do.${code}`)}, ${t("do.back", { bearing: f.bearing(back_deg) })}`;
  }
  const key = `do.${code}`;
  return isKey(key) ? t(key) : t("do.other");
}

const near = (frame: Frame | null): boolean => frame?.do.code === "recover" || frame?.do.code === "all_aboard";

function bearingWords(frame: Frame | null): string | null {
  if (frame?.bearing_deg == null) return null;
  const bearing = f.bearing(frame.bearing_deg);
  if (frame.bearing_mag_deg == null) return t("return.bearing", { true: bearing });
  return t("return.bearing_both", { true: bearing, mag: f.bearing(frame.bearing_mag_deg) });
}

/** Below this the range is as good as steady: our choice, what a receiver's speed wobbles by. */
const STEADY_KN = 0.3;

function speedWords(frame: Frame | null): string | null {
  const kn = frame?.closing_kn;
  if (kn == null || Math.abs(kn) < STEADY_KN) return null;
  if (kn < 0) return t("return.opening", { speed: f.speed(-kn) });
  const eta = frame?.eta_s != null ? f.duration(frame.eta_s) : "";
  return t("return.closing", { speed: f.speed(kn), eta }).replace(/, $/, "");
}

function lookThing(frame: Frame | null): Thing {
  const datum = frame?.datum;
  const word = t("return.look");
  if (!datum) return { word, detail: frame ? t("return.look.none") : t("return.waiting"), typed: false };
  const error = f.errorText(datum.error_m);
  // A move shorter than what a metre figure can show is no move.
  const still = datum.moved_m < 1 || datum.moved_towards_deg === null;
  const detail = still
    ? t("return.look.still", { error })
    : t("return.look.detail", {
        moved: f.rangeText(datum.moved_m),
        towards: f.bearing(datum.moved_towards_deg as number),
        error,
      });
  return { word, detail, typed: false };
}

function happenedThing({ mark }: Selection): Thing {
  const word = t("return.happened");
  if (!mark) return { word, detail: t("return.look.none"), typed: false };
  const time = f.utcTime(Date.parse(mark.fell_at));
  const args = { number: mark.number, time };
  if (!mark.place) return { word, detail: t("return.happened.none", args), typed: false };
  const parts = [t("return.happened.detail", { ...args, source: sourceWords(mark.place.source) })];
  if (mark.adjusted) parts.push(t("return.happened.adjusted"));
  if (mark.place.error_m != null) parts.push(t("return.happened.error", { error: f.errorText(mark.place.error_m) }));
  return { word, detail: parts.join(", "), typed: mark.place.source === "typed" };
}

/** The word for where a position came from. */
export function sourceWords(source: string): string {
  const key = `source.${source}`;
  return isKey(key) ? t(key) : source;
}

function fixWords(frame: Frame | null, frameAgeS: number): { text: string; stale: boolean } {
  const fix = frame?.fix;
  if (!fix) return { text: t("fix.none"), stale: true };
  const args = { age: f.duration(fix.age_s + frameAgeS), source: sourceWords(fix.source) };
  return fix.stale ? { text: t("fix.stale", args), stale: true } : { text: t("fix.age", args), stale: false };
}

function sightWords({ person }: Selection): string {
  if (!person?.in_sight) return t("return.not_in_sight");
  return t("return.in_sight", { time: f.utcTime(Date.parse(person.sight_at ?? person.status_at)) });
}

/** Each caution once, the engine's codes in the page's words. */
function cautionWords(frame: Frame | null): string[] {
  if (!frame) return [];
  const words = frame.cautions.map((code) => {
    const key = `caution.${code}`;
    const args = {
      age: f.duration(frame.fix?.age_s ?? 0),
      mark_age: f.duration(frame.mark?.fix_age_s ?? 0),
      wind_at: minute(frame.datum?.wind_at),
      current_at: minute(frame.datum?.current_at),
      code: code.replaceAll("_", " "),
    };
    return t(isKey(key) ? (key as Key) : "caution.other", args);
  });
  return [...new Set(words)];
}

function minute(at: string | null | undefined): string {
  return at ? f.utcMinute(Date.parse(at)) : "?";
}

/** Ring sizes, so that the picture jumps rarely instead of creeping always: our choice. */
const RING_M = [50, 100, 200, 400, 1000, 1852, 3704, 9260, 18520, 46300, 92600, 185200];

/** What is up: the direction, degrees true, and its words. */
function upOf({ frame, ringUp, phoneMagDeg }: ReturnInput, heading: number | null): { turn: number; up: string } {
  if (ringUp === "north_up") return { turn: 0, up: t("return.north_up") };
  if (ringUp === "head_up") {
    return heading === null ? { turn: 0, up: t("return.no_heading") } : { turn: heading, up: t("return.head_up") };
  }
  const variation = frame?.variation_deg;
  if (phoneMagDeg == null || variation == null) return { turn: 0, up: t("return.no_compass") };
  return { turn: phoneMagDeg + variation, up: t("return.phone_up") };
}

function ringView(input: ReturnInput, direction: string | null): RingView {
  const { frame } = input;
  const heading = frame?.heading_deg ?? headingFrom(frame);
  const { turn, up } = upOf(input, heading);
  const at = (deg: number): number => (((deg - turn) % 360) + 360) % 360;
  const place = frame ? places(frame) : null;
  const farM = Math.max(place?.look?.m ?? 0, place?.mark?.m ?? 0);
  const range = frame?.range_m != null ? f.rangeText(frame.range_m) : "";
  return {
    up,
    northDeg: at(0),
    headingDeg: heading ?? 0,
    wedge: frame?.wedge_deg != null && (frame.bearing_deg != null || frame.wedge_deg >= 180)
      ? { centreDeg: at(frame.bearing_deg ?? 0), halfDeg: Math.min(180, frame.wedge_deg) }
      : null,
    radiusM: RING_M.find((m) => m >= farM * 1.1) ?? farM * 1.1,
    disc: place?.look ? { angleDeg: at(place.look.deg), rangeM: place.look.m, errorM: frame?.datum?.error_m ?? 0 } : null,
    cross: place?.mark ? { angleDeg: at(place.mark.deg), rangeM: place.mark.m } : null,
    windDeg: frame?.datum?.wind_from_deg != null ? at(frame.datum.wind_from_deg) : null,
    driftDeg: frame?.datum?.drift_towards_deg != null ? at(frame.datum.drift_towards_deg) : null,
    stale: !frame?.fix || !!frame.fix.stale,
    text: t("return.ring", { text: [up, direction, range].filter(Boolean).join(", ") }),
  };
}

/** The direction that relative bearings are counted from, if it is not said. */
function headingFrom(frame: Frame | null): number | null {
  if (frame?.bearing_deg == null || frame.relative_deg == null) return null;
  return frame.bearing_deg - frame.relative_deg;
}

interface Polar {
  m: number;
  deg: number;
}

/** Where the two things are drawn, seen from the vessel: for the picture only, on a flat sea. */
function places(frame: Frame): { look: Polar | null; mark: Polar | null } {
  if (frame.range_m == null || !frame.datum) return { look: null, mark: null };
  const look = { m: frame.range_m, deg: frame.bearing_deg ?? 0 };
  const moved = { m: frame.datum.moved_m, deg: frame.datum.moved_towards_deg ?? 0 };
  const rad = Math.PI / 180;
  const east = look.m * Math.sin(look.deg * rad) - moved.m * Math.sin(moved.deg * rad);
  const north = look.m * Math.cos(look.deg * rad) - moved.m * Math.cos(moved.deg * rad);
  return { look, mark: { m: Math.hypot(east, north), deg: Math.atan2(east, north) / rad } };
}
