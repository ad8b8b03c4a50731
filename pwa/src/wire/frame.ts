// What the server streams and the engine answers: the vessel's fix and the
// steer frame, one form from both.

import type { Kind, LogEvent, Position, PositionSource } from "./event";
import type { LegSeen, SearchState } from "./search";

/** Where the own vessel is, with its age and source. */
export interface Fix {
  position: Position;
  at: string;
  age_s: number;
  sog_kn: number | null;
  cog_deg: number | null;
  source: PositionSource;
  error_m: number | null;
  stale?: boolean;
}

/** Where it happened: fixed. */
export interface FrameMark {
  event: string;
  number: number;
  position: Position | null;
  /** The fall, as now believed. */
  at: string;
  press_at: string;
  source: PositionSource;
  error_m: number | null;
  fix_age_s: number | null;
  adjusted?: boolean;
  side?: string;
}

/** Where to look now: it moves, and says how far off it may be. */
export interface FrameDatum {
  position: Position;
  /** 95 in 100. */
  error_m: number;
  age_s: number;
  moved_m: number;
  moved_towards_deg: number | null;
  drift_kn: number;
  drift_towards_deg: number | null;
  wind_from_deg: number | null;
  wind_kn: number | null;
  wind_at: string | null;
  wind_by?: string;
  current_set_deg: number | null;
  current_drift_kn: number | null;
  current_at: string | null;
  current_by?: string;
  /** What it starts from: "mark", "beacon" or "sighting". */
  basis: string;
}

/** The one thing to do now. */
export interface Instruction {
  code: string;
  bearing_deg?: number;
  range_m?: number;
  relative_deg?: number;
  /** The way to turn; "either" while the side of the fall is not known. */
  way?: "port" | "starboard" | "either";
  /** The reciprocal of the course at the fall. */
  back_deg?: number;
}

/** What a screen shows at one moment: from the server's stream and from the engine alike. */
export interface Frame {
  incident: string;
  at: string;
  drill?: boolean;
  test?: boolean;
  status: "open" | "suspended" | "stood_down";
  person: number;
  elapsed_s: number | null;
  mark: FrameMark | null;
  fix: Fix | null;
  datum: FrameDatum | null;
  heading_deg: number | null;
  /** "compass" or "course". */
  heading_source?: string;
  range_m: number | null;
  bearing_deg: number | null;
  bearing_mag_deg: number | null;
  variation_deg: number | null;
  variation_note?: string;
  relative_deg: number | null;
  /** Half the width of the wedge; 180 is the full ring. */
  wedge_deg: number | null;
  closing_kn: number | null;
  eta_s: number | null;
  /** The search leg being steered, if there is one. */
  leg?: LegSeen | null;
  do: Instruction;
  cautions: string[];
}

export interface Said {
  event: string;
  at: string;
  by?: string;
  device: string;
}

export interface Place {
  position: Position;
  source: PositionSource;
  error_m?: number | null;
  fix_age_s?: number | null;
}

export interface Mark extends Said {
  number: number;
  person: number;
  fell_at: string;
  press?: Place | null;
  place?: Place | null;
  adjusted?: Said | null;
  back_s?: number | null;
  dismissed?: Said | null;
  reason?: string;
  sog_kn?: number | null;
  cog_deg?: number | null;
  heading_deg?: number | null;
  drill?: boolean;
  test?: boolean;
  clock_error_ms?: number | null;
  device_at: string;
}

export type PersonStatus = "in_water" | "missing" | "attached" | "alongside" | "aboard";

export interface PersonState {
  no: number;
  status: PersonStatus;
  status_at: string;
  condition?: string;
  name?: string;
  life_jacket: string;
  clothing?: string;
  moving?: string;
  working_mark?: string | null;
  in_sight: boolean;
  sight_at?: string;
  missed_passes?: unknown[];
}

export interface CallSaid extends Said {
  answered?: boolean;
  call: string;
  channel?: string;
  station?: string;
  text?: string;
}

export interface Asked extends Said {
  kind: Kind;
  mark?: string;
  reason?: string;
}

export interface Charge extends Said {
  name: string;
  holder: string;
  term: number;
}

/** What the events of one incident add up to; folded by the engine. */
export interface State extends SearchState {
  id: string;
  joined?: string[];
  drill?: boolean;
  test?: boolean;
  opened_at: string;
  last_at: string;
  events: number;
  status: "open" | "suspended" | "stood_down";
  status_at?: string;
  status_by?: string;
  status_reason?: string;
  asked?: Asked[];
  marks: Mark[];
  persons: PersonState[];
  in_charge?: Charge | null;
  rivals?: Charge[];
  head_count?: { aboard: number; expected?: number | null } | null;
  calls?: CallSaid[];
}

/** A message of the stream, as far as the page reads it. */
export type Message =
  | { t: "hello"; epoch: string; last_seq: number; after?: number; reset?: boolean }
  | { t: "event"; event: LogEvent }
  | ({ t: "fix" } & Record<string, unknown>)
  | ({ t: "steer" } & Record<string, unknown>)
  | ({ t: "tick" } & Record<string, unknown>)
  | ({ t: "time" } & Record<string, unknown>)
  | ({ t: "ack" } & Record<string, unknown>)
  | { t: "problem"; code: string; title?: string; over?: boolean; of?: string[] };
