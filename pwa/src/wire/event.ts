// The events of an incident's log, as they stand on the wire. The one
// definition is the Go package search/incident; the shared hash vectors keep
// the two from drifting apart.

export interface Position {
  lat: number;
  lon: number;
}

export type PositionSource = "phone" | "vessel" | "dr" | "track" | "typed" | "beacon" | "nothing";

export type Kind =
  | "marked" | "mark_placed" | "mark_adjusted" | "mark_dismissed" | "working_mark"
  | "beacon" | "missing" | "clue" | "seen" | "lost_sight" | "person"
  | "wind" | "current" | "water" | "in_charge" | "role" | "head_count"
  | "attached" | "alongside" | "parted" | "aboard" | "missed_pass"
  | "stood_down" | "reopened" | "suspended" | "order"
  | "call_made" | "call_answered" | "buoy_dropped" | "buoy_seen"
  | "search_laid" | "leg_begun" | "leg_ended" | "search_paused" | "search_resumed" | "search_dropped"
  | "note" | "undone" | "joined";

/** Body of an event: JSON, its form decided by the kind. */
export type Body = Record<string, unknown>;

export interface LogEvent {
  id: string;
  incident: string;
  device: string;
  device_seq: number;
  prev_hash: string;
  kind: Kind;
  /** On the vessel's common clock, as well as this device knew it. */
  at: string;
  /** The same moment on the device's own clock, never corrected. */
  device_at: string;
  clock_error_ms?: number;
  by?: string;
  drill?: boolean;
  test?: boolean;
  body: Body;
  hash: string;
  /** Added by the server that stored it. */
  seq?: number;
  received_at?: string;
}

/** What is known of an event before it gets its place in the device's chain. */
export interface Draft {
  id: string;
  incident: string;
  kind: Kind;
  at: string;
  device_at: string;
  clock_error_ms?: number;
  by?: string;
  drill?: boolean;
  test?: boolean;
  body: Body;
}

/** Body of a marked event. */
export interface Marked {
  position?: Position;
  source: PositionSource;
  /** Radius that holds the true position in 95 of 100 cases. */
  error_m?: number;
  fix_age_s?: number;
  sog_kn?: number;
  cog_deg?: number;
  heading_deg?: number;
  person?: number;
  new_incident?: boolean;
}
