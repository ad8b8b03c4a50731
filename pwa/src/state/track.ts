// The own track as this page saw it, for the plot: the vessel's where it is
// known, else this phone's.

import { effect } from "@preact/signals";
import type { Position } from "../wire/event";
import * as m from "./model";

export interface TrackPoint extends Position {
  ms: number;
}

/** Between two points, and how many are kept: our choice, three hours. */
const EVERY_MS = 3_000;
const KEPT = 3600;

const points: TrackPoint[] = [];
let source = "";

/** The track, oldest first; grows in place. */
export const track = (): readonly TrackPoint[] => points;

/** Adds a point, thinned. Another source begins a new track: two receivers' tracks are not one line. */
export function tracked(ms: number, p: Position, from: string): void {
  if (from !== source) points.length = 0;
  source = from;
  const last = points.at(-1);
  if (last && ms - last.ms < EVERY_MS) return;
  points.push({ ms, lat: p.lat, lon: p.lon });
  if (points.length > KEPT) points.splice(0, points.length - KEPT);
}

/** Follows the fixes. */
export function keepTrack(): void {
  effect(() => {
    const vessel = m.vesselFix.value;
    const fix = vessel ?? m.phoneFix.value;
    if (fix) tracked(fix.taken_ms, fix.position, vessel ? "vessel" : "phone");
  });
}
