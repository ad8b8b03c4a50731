// Searches, as the log and the steer frame tell of them. The definitions are
// the Go packages search/incident and search/advice.

import type { Position } from "./event";

export interface SetDrift {
  set_deg: number;
  drift_kn: number;
}

/** Metres in the datum frame. */
export interface Offset {
  east_m: number;
  north_m: number;
}

export interface LegLaid {
  /** "search", or "cross" from one search leg to the next. */
  kind: string;
  course_deg: number;
  length_m: number;
  from: Offset;
  to: Offset;
}

/** Body of a search_laid event: what is meant, never what was run. */
export interface SearchLaid {
  person?: number;
  vessel?: string;
  pattern: "square" | "sector" | "parallel" | "creeping" | "track";
  /** At begin. */
  datum: Position;
  begin: string;
  speed_kn: number;
  current: SetDrift;
  datum_drift: SetDrift;
  spacing_nm?: number;
  sweep_width_nm?: number;
  sweep_width_by?: string;
  legs: LegLaid[];
  reason?: string;
}

export type How = "run" | "broken_off" | "skipped";

/** A leg that was begun; without an end while it is being run. */
export interface LegRun {
  leg: number;
  part: number;
  how: How | "";
  begun_at?: string;
  ended_at: string;
}

export interface Search extends SearchLaid {
  event: string;
  at: string;
  by?: string;
  device: string;
  status: "laid" | "running" | "paused" | "finished" | "dropped";
  /** The leg being steered, from 1; 0 before the first. */
  leg: number;
  done: LegRun[];
  last_reason?: string;
}

export interface RoleHeld {
  role: string;
  name?: string;
  holder?: string;
}

interface Observed {
  at: string;
  by?: string;
  /** "instrument", "person", "measured", "forecast" or "tables". */
  source: string;
  name?: string;
  from?: string | null;
}

export interface WindSaid extends Observed {
  from_deg: number;
  speed_kn: number;
}

export interface CurrentSaid extends Observed {
  set_deg: number;
  drift_kn: number;
}

export interface WaterSaid extends Observed {
  temp_c: number;
}

/** A thing seen, or lost from sight. */
export interface Sighting {
  event: string;
  at: string;
  by?: string;
  lost?: boolean;
  person?: number;
  what?: string;
  observer?: Position | null;
  bearing_deg?: number | null;
  range_m?: number | null;
}

/** What an incident's state says of searches and of what is assumed. */
export interface SearchState {
  searches?: Search[];
  roles?: RoleHeld[];
  winds?: WindSaid[];
  currents?: CurrentSaid[];
  waters?: WaterSaid[];
  sightings?: Sighting[];
}

/** The leg being steered, in a steer frame. */
export interface LegSeen {
  search: string;
  leg: number;
  of: number;
  kind: string;
  paused?: boolean;
  course_deg: number;
  steer_deg: number | null;
  steer_mag_deg: number | null;
  /** Off the leg, positive to the right of it. */
  cross_m: number | null;
  to_go_m: number | null;
  turn_in_s: number | null;
  next_steer_deg: number | null;
  /** Positive to starboard. */
  next_turn_deg: number | null;
  done?: boolean;
  from: Position;
  to: Position;
  note?: string;
}
