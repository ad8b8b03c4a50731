// What a search is proposed for: stated by the crew, or assumed and said so.

import type { Conditions } from "../engine/search_calls";

/** What this crew said; what it did not say is assumed. */
export interface Stated {
  speed_kn?: number;
  visibility_nm?: number;
  sea_m?: number;
  night?: boolean;
  tired?: boolean;
  lookouts?: number;
  first_into?: Conditions["first_into"];
}

export interface Known {
  windKn: number | null;
  /** 0 daylight to 4 night, by the sun; null where it is not known. */
  light: number | null;
}

/** Search speed where none was said: our choice, slow enough to look and fast enough to steer. */
const SPEED_KN = 5;
/** Visibility where none was said: our choice; for a person in the water the small boat table gives 1 and 3 nm one width. */
const VISIBILITY_NM = 3;
/** Sea where neither it nor the wind is known: our choice. */
const SEA_M = 0.5;

/** Conditions to propose for, each stated or assumed. */
export function conditions(stated: Stated, known: Known): Conditions {
  return {
    speed_kn: stated.speed_kn ?? SPEED_KN,
    visibility_nm: stated.visibility_nm ?? VISIBILITY_NM,
    sea_m: stated.sea_m ?? (known.windKn === null ? SEA_M : probableSeaM(known.windKn)),
    night: stated.night ?? (known.light ?? 0) >= 2,
    tired: stated.tired ?? false,
    first_into: stated.first_into ?? "into_wind",
    limit_s: 0,
  };
}

/**
 * The Beaufort scale: the last knot of each force, a middle speed, and the
 * probable height of waves in the open sea, metres (World Meteorological
 * Organization, Beaufort scale; from memory).
 */
const BEAUFORT = [
  { to: 0.9, kn: 0, sea: 0 },
  { to: 3, kn: 2, sea: 0.1 },
  { to: 6, kn: 5, sea: 0.2 },
  { to: 10, kn: 9, sea: 0.6 },
  { to: 16, kn: 13, sea: 1 },
  { to: 21, kn: 19, sea: 2 },
  { to: 27, kn: 24, sea: 3 },
  { to: 33, kn: 30, sea: 4 },
  { to: 40, kn: 37, sea: 5.5 },
  { to: 47, kn: 44, sea: 7 },
  { to: 55, kn: 52, sea: 9 },
  { to: 63, kn: 60, sea: 11.5 },
  { to: Number.POSITIVE_INFINITY, kn: 68, sea: 14 },
] as const;

export const FORCES = BEAUFORT.length;

/** Knots of a force of wind; null where there is no such force. */
export function knotsOf(force: number): number | null {
  return BEAUFORT[force]?.kn ?? null;
}

/** The probable sea of a wind. */
export function probableSeaM(kn: number): number {
  return BEAUFORT.find((b) => Math.round(kn) <= b.to)?.sea ?? 14;
}

/** A number typed by a person, with a comma or a point; null when it is none or out of range. */
export function typed(text: string, least: number, most: number): number | null {
  if (!/^\s*-?\d+([.,]\d+)?\s*$/.test(text)) return null;
  const n = Number(text.replace(",", "."));
  return n >= least && n <= most ? n : null;
}
