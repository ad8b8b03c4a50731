// What the engine answers about searches, the cloud, and what is assumed.

import type { Position } from "../wire/event";
import type { SearchLaid } from "../wire/search";

export interface Conditions {
  speed_kn: number;
  visibility_nm: number;
  sea_m: number;
  night: boolean;
  tired: boolean;
  first_into: "into_wind" | "down_drift";
  /** Seconds that may be used; 0 for as long as it takes. */
  limit_s: number;
}

export interface Proposal {
  /** Body of a search_laid event, to be added as it is. */
  body: SearchLaid;
  radius_nm?: number;
  coverage: number;
  pod_ideal: number;
  pod_poor: number;
  length_m: number;
  takes_s: number;
  covers: boolean;
  notes: string[];
}

export interface Cloud {
  at: string;
  n: number;
  ashore: number;
  mean: Position;
  r50_m: number;
  r95_m: number;
  regions: { share: number; rings: Position[][] | null }[] | null;
  points: Position[] | null;
}

export interface Searched {
  run_m: number;
  swept_m2: number;
  /** If the person was inside, conditions as stated. */
  pod: number | null;
  coverage: number | null;
  runs: [Position, Position][];
}

/** A span of nanoseconds; an end that no table has is null. */
export interface Band {
  Low: number | null;
  High: number | null;
}

export interface ColdWater {
  TempC: number;
  State: string;
  Movement: Band | null;
  Consciousness: Band | null;
  Survival: Band | null;
  Figures: { What: string; Band: Band; Source: string }[] | null;
  Texts: string[];
}

export interface Outlook {
  /** 0 daylight, 1 civil, 2 nautical, 3 astronomical twilight, 4 night. */
  Light: number;
  Sun: { AltitudeDeg: number; AzimuthTrue: number };
  /** Kinds in order of a morning and an evening: 2 civil dawn, 3 sunrise, 5 sunset, 6 civil dusk. */
  Next: { Kind: number; At: string }[] | null;
}

export type Wearing = "unknown" | "clothes" | "buoyancy_vest" | "lifejacket" | "survival_suit" | "diving_suit";
export type Moving = "unknown" | "yes" | "no";

/** Names an incident, a person of it, and a moment. */
export interface Who {
  now: string;
  incident: string;
  person?: number;
}

/** The calls, for the engine's typed face. */
export interface SearchMethods {
  propose_search: { args: Who & Conditions; answer: { proposals: Proposal[] } };
  cloud: { args: Who & { members?: number }; answer: Cloud };
  searched: { args: Who & { members?: number }; answer: Searched };
  cold_water: { args: { temp_c: number; flotation: "unknown" | "none" | "worn" | "suit" }; answer: ColdWater };
  choose_class: { args: { wearing: Wearing; moving: Moving }; answer: { object: string; why: string } };
  daylight: { args: { now: string; position: Position }; answer: Outlook };
}
