// Numbers as they are shown: here and nowhere else. Nothing is computed, only
// rounded to what can be read and used in a glance.

import type { Position } from "../wire/event";

const METRES_PER_NM = 1852; // international nautical mile, 1929
/** Metres are shown below a fifth of a mile, whole below 100 m, in tens from there. */
const METRES_BELOW_M = 0.2 * METRES_PER_NM;
const TENS_FROM_M = 100;

/** A figure and its unit, kept apart so that the figure can be set large. */
export interface Figure {
  figure: string;
  unit: string;
}

/** A range in the steps of the engine's own words (drift/nav WordsRange). */
export function range(m: number): Figure {
  if (m < METRES_BELOW_M) {
    const whole = Math.round(m);
    return { figure: String(whole >= TENS_FROM_M ? step(m, 10) : whole), unit: "m" };
  }
  const nm = m / METRES_PER_NM;
  return { figure: nm.toFixed(nm >= 99.95 ? 0 : nm >= 9.995 ? 1 : 2), unit: "nm" };
}

/** A range in one piece: "220 m". */
export function rangeText(m: number): string {
  const { figure, unit } = range(m);
  return `${figure} ${unit}`;
}

/** The radius of an error: two figures are more than it deserves, so it is rounded up. */
export function errorText(m: number): string {
  if (m < 995) return `${Math.ceil(m / (m < 100 ? 5 : 10)) * (m < 100 ? 5 : 10)} m`;
  return `${(Math.ceil((m / METRES_PER_NM) * 10) / 10).toFixed(1)} nm`;
}

/** A direction in three digits: "007", "283". */
export function bearing(deg: number): string {
  return String(((Math.round(deg) % 360) + 360) % 360).padStart(3, "0");
}

/** Brings an angle to -180 (excluded) to 180. */
export function signed(deg: number): number {
  const d = ((deg % 360) + 360) % 360;
  return d > 180 ? d - 360 : d;
}

/** The side and amount of a relative bearing, to the nearest 5 degrees. */
export function relative(deg: number): { side: "port" | "starboard" | "ahead" | "astern"; deg: number } {
  const d = signed(deg);
  const whole = Math.round(Math.abs(d) / 5) * 5;
  if (whole === 0) return { side: "ahead", deg: 0 };
  if (whole === 180) return { side: "astern", deg: 180 };
  return { side: d < 0 ? "port" : "starboard", deg: whole };
}

/** Elapsed time: "00:03:12", with days in front from the second day on. */
export function elapsed(s: number): string {
  const whole = Math.max(0, Math.floor(s));
  const days = Math.floor(whole / 86400);
  const clock = [Math.floor(whole / 3600) % 24, Math.floor(whole / 60) % 60, whole % 60]
    .map((n) => String(n).padStart(2, "0"))
    .join(":");
  return days > 0 ? `${days} d ${clock}` : clock;
}

/** An age or a duration in words: "3 s", "2 min", "1 h 05 min". */
export function duration(s: number): string {
  const whole = Math.max(0, Math.round(s));
  if (whole < 100) return `${whole} s`;
  const min = Math.round(whole / 60);
  if (min < 100) return `${min} min`;
  return `${Math.floor(min / 60)} h ${String(min % 60).padStart(2, "0")} min`;
}

/** Hours, minutes and seconds of a moment, UTC. */
export function utcTime(ms: number): string {
  return new Date(ms).toISOString().slice(11, 19);
}

/** Hours and minutes of a moment, UTC. */
export function utcMinute(ms: number): string {
  return new Date(ms).toISOString().slice(11, 16);
}

/** Hours, minutes and seconds of a moment by this device's own time zone. */
export function localTime(ms: number): string {
  const d = new Date(ms);
  return [d.getHours(), d.getMinutes(), d.getSeconds()].map((n) => String(n).padStart(2, "0")).join(":");
}

/** Speed in knots, one decimal. */
export function speed(kn: number): string {
  return `${kn.toFixed(1)} kn`;
}

/** A position in degrees and decimal minutes, as it is spoken: 54°06.000'N 007°54.000'E. */
export function position(p: Position): string {
  return `${half(p.lat, 2, "N", "S")} ${half(p.lon, 3, "E", "W")}`;
}

function half(deg: number, width: number, plus: string, minus: string): string {
  // In thousandths of a minute, so that 59.9996' becomes the next degree and not 60.000'.
  const all = Math.round(Math.abs(deg) * 60_000);
  const d = Math.floor(all / 60_000);
  const min = ((all % 60_000) / 1000).toFixed(3).padStart(6, "0");
  return `${String(d).padStart(width, "0")}°${min}'${deg < 0 && all > 0 ? minus : plus}`;
}

const step = (x: number, by: number): number => Math.round(x / by) * by;
