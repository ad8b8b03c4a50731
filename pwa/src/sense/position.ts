// Where the phone and the vessel are. One watch for the whole page: a second
// way of asking (getCurrentPosition beside a watch) ends the page in Chromium.

import type { Marked, Position } from "../wire/event";

/** A fix as this page holds it, with the moment it came in. */
export interface HeldFix {
  position: Position;
  /** 95 in 100. */
  error_m: number | null;
  sog_kn: number | null;
  cog_deg: number | null;
  heading_deg: number | null;
  /** Carried on by course and speed: the age is that of the fix it started from. */
  reckoned: boolean;
  /** When the receiver took it, Unix milliseconds on this device's clock. */
  taken_ms: number;
  /** performance.now() at the same moment. */
  taken_mono_ms: number;
}

export type PhoneState = "asking" | "ok" | "denied" | "unavailable" | "insecure";

/** Knots in a metre per second: 3600 / 1852, from the international nautical mile (1929). */
const KN_PER_MS = 3600 / 1852;

/** Vessel fixes up to this age win over the phone's: our choice, ten misses of a 1 Hz feed. */
const VESSEL_FRESH_S = 10;

let phoneFix: HeldFix | null = null;
let vesselFix: HeldFix | null = null;
let phoneState: PhoneState = "asking";
const listeners = new Set<() => void>();

/** Calls back at every new fix and change of state; returns the way to stop. */
export function onFix(listener: () => void): () => void {
  listeners.add(listener);
  return () => listeners.delete(listener);
}

export const phone = (): HeldFix | null => phoneFix;
export const vessel = (): HeldFix | null => vesselFix;
export const phonePositionState = (): PhoneState => phoneState;

/** Age of a fix in seconds; where the two clocks disagree, the older one counts. */
export function ageS(fix: HeldFix, nowMs = Date.now(), monoMs = performance.now()): number {
  return Math.max(0, nowMs - fix.taken_ms, monoMs - fix.taken_mono_ms) / 1000;
}

/** Starts the one watch. Safe to call again after it was refused. */
export function watchPosition(): void {
  if (!window.isSecureContext || !navigator.geolocation) {
    setState(window.isSecureContext ? "unavailable" : "insecure");
    return;
  }
  if (watch !== null) navigator.geolocation.clearWatch(watch);
  watch = navigator.geolocation.watchPosition(took, failed, {
    enableHighAccuracy: true,
    maximumAge: 0,
    timeout: 30_000,
  });
}
let watch: number | null = null;

function took(p: GeolocationPosition): void {
  const now = Date.now();
  const c = p.coords;
  // A receiver's clock may be off; a fix is never taken for younger than its arrival.
  const taken = Math.min(p.timestamp, now);
  phoneFix = {
    position: whole({ lat: c.latitude, lon: c.longitude }),
    // W3C Geolocation, 6.1 "accuracy": a 95 % confidence level.
    error_m: finite(c.accuracy),
    sog_kn: scaled(c.speed, KN_PER_MS),
    cog_deg: c.speed !== null && c.speed > 0 ? finite(c.heading) : null,
    heading_deg: null,
    reckoned: false,
    taken_ms: taken,
    taken_mono_ms: performance.now() - (now - taken),
  };
  setState("ok");
}

function failed(e: GeolocationPositionError): void {
  if (e.code === e.PERMISSION_DENIED) setState("denied");
  else if (!phoneFix) setState("unavailable");
}

function setState(s: PhoneState): void {
  phoneState = s;
  for (const l of listeners) l();
}

/** Takes in a fix from the vessel's instruments, age_s old on arrival. */
export function tookVessel(fix: Omit<HeldFix, "taken_ms" | "taken_mono_ms">, ageOnArrivalS: number): void {
  const ageMs = Math.max(0, ageOnArrivalS) * 1000;
  vesselFix = {
    ...fix,
    taken_ms: Date.now() - ageMs,
    taken_mono_ms: performance.now() - ageMs,
  };
  for (const l of listeners) l();
}

/** What a mark made now says about its position: the vessel first, the phone second. */
export function markedNow(nowMs = Date.now(), monoMs = performance.now()): Marked {
  return markedFrom(vesselFix, phoneFix, nowMs, monoMs);
}

/** The rule behind {@link markedNow}, without the sensors. */
export function markedFrom(
  vessel: HeldFix | null,
  phone: HeldFix | null,
  nowMs: number,
  monoMs: number,
): Marked {
  const vesselAge = vessel ? ageS(vessel, nowMs, monoMs) : Number.POSITIVE_INFINITY;
  const phoneAge = phone ? ageS(phone, nowMs, monoMs) : Number.POSITIVE_INFINITY;
  if (vessel && (vesselAge <= VESSEL_FRESH_S || vesselAge <= phoneAge)) return body(vessel, "vessel", vesselAge);
  if (phone) return body(phone, "phone", phoneAge);
  return { source: "nothing" };
}

function body(fix: HeldFix, source: "vessel" | "phone", age: number): Marked {
  return {
    position: fix.position,
    source: fix.reckoned ? "dr" : source,
    ...(fix.error_m !== null && { error_m: round(fix.error_m, 1) }),
    fix_age_s: round(age, 3),
    ...(fix.sog_kn !== null && { sog_kn: round(fix.sog_kn, 2) }),
    ...(fix.cog_deg !== null && { cog_deg: round(fix.cog_deg, 1) }),
    ...(fix.heading_deg !== null && { heading_deg: round(fix.heading_deg, 1) }),
  };
}

/** Rounds to 1e-7 degree before it is hashed or compared. */
export function whole(p: Position): Position {
  return { lat: round(p.lat, 7), lon: round(p.lon, 7) };
}

const round = (x: number, digits: number): number => Number(x.toFixed(digits));
const finite = (x: number | null | undefined): number | null =>
  typeof x === "number" && Number.isFinite(x) ? x : null;
const scaled = (x: number | null, by: number): number | null => {
  const f = finite(x);
  return f === null ? null : f * by;
};
