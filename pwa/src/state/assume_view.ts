// What is assumed of the person, the wind, the water and the light, and who or
// what said so: in words.

import type { Band, ColdWater, Outlook } from "../engine/search_calls";
import { isKey, t } from "../text/text";
import * as f from "../units/format";
import type { CurrentSaid, WaterSaid, WindSaid } from "../wire/search";

export interface Assumed {
  value: string;
  /** Who or what said it, and when. */
  by: string;
  /** A person typed it: underlined. */
  typed: boolean;
}

interface Said {
  at: string;
  by?: string;
  source: string;
  name?: string;
}

function byWords(s: Said): string {
  const key = `said.${s.source}`;
  const who = [isKey(key) ? t(key) : s.source, s.name || s.by].filter(Boolean).join(", ");
  return t("assume.by", { who, time: f.utcMinute(Date.parse(s.at)) });
}

const none = (): Assumed => ({ value: t("assume.unknown"), by: "", typed: false });
const typedBy = (s: Said): boolean => s.source === "person" || s.source === "tables";

export function windView(w: WindSaid | undefined): Assumed {
  if (!w) return none();
  return { value: t("assume.wind_is", { from: f.bearing(w.from_deg), speed: f.speed(w.speed_kn) }), by: byWords(w), typed: typedBy(w) };
}

export function currentView(c: CurrentSaid | undefined): Assumed {
  if (!c) return none();
  return { value: t("assume.current_is", { set: f.bearing(c.set_deg), drift: f.speed(c.drift_kn) }), by: byWords(c), typed: typedBy(c) };
}

export function waterView(w: WaterSaid | undefined): Assumed {
  if (!w) return none();
  return { value: `${w.temp_c.toFixed(1)} °C`, by: byWords(w), typed: typedBy(w) };
}

export interface ColdView {
  lines: { what: string; band: string }[];
  /** Each table's own figure, with its source. */
  figures: string[];
  texts: string[];
}

/** Cold water with its spread and its sources: for the recovery, never a countdown. */
export function coldView(w: ColdWater): ColdView {
  const lines: ColdView["lines"] = [];
  for (const [key, band] of [["movement", w.Movement], ["consciousness", w.Consciousness], ["survival", w.Survival]] as const) {
    if (band) lines.push({ what: t(`cold.${key}`), band: bandText(band) });
  }
  const figures = (w.Figures ?? []).map((g) => {
    const key = `cold.${g.What}`;
    return t("cold.figure", { what: isKey(key) ? t(key) : g.What, band: bandText(g.Band), source: g.Source });
  });
  return { lines, figures, texts: [w.State === "in the tables" ? "" : w.State, ...w.Texts].filter(Boolean) };
}

/** From the lowest to the highest; an end that no table has is said to be open. */
export function bandText(b: Band): string {
  const low = b.Low === null ? null : span(b.Low / 1e9);
  const high = b.High === null ? null : span(b.High / 1e9);
  if (low !== null && high !== null) return low === high ? low : t("cold.band", { low, high });
  if (low !== null) return t("cold.from", { low });
  return high === null ? t("assume.unknown") : t("cold.to", { high });
}

function span(s: number): string {
  if (s < 5400) return `${Math.round(s / 60)} min`;
  const h = s / 3600;
  return `${Number.isInteger(h) || h >= 10 ? Math.round(h) : h.toFixed(1)} h`;
}

/** Kinds of the engine's events of the sun. */
const CIVIL_DAWN = 2;
const SUNRISE = 3;
const SUNSET = 5;
const CIVIL_DUSK = 6;

/** Light left, and when it comes back. */
export function lightView(o: Outlook, nowMs: number): string[] {
  const next = (kind: number): number | null => {
    const e = (o.Next ?? []).find((n) => n.Kind === kind);
    return e ? Date.parse(e.At) : null;
  };
  const at = (key: "light.sunset" | "light.dusk" | "light.dawn" | "light.sunrise", ms: number | null): string =>
    ms === null ? "" : t(key, { time: f.utcMinute(ms), left: f.duration((ms - nowMs) / 1000) });
  const bright = o.Light <= 1;
  const words = bright
    ? [o.Light === 0 ? at("light.sunset", next(SUNSET)) : "", next(CIVIL_DUSK) === null ? t("light.no_dusk") : at("light.dusk", next(CIVIL_DUSK))]
    : [next(CIVIL_DAWN) === null ? t("light.no_dawn") : at("light.dawn", next(CIVIL_DAWN)), at("light.sunrise", next(SUNRISE))];
  const key = `light.${Math.min(4, Math.max(0, o.Light)) as 0 | 1 | 2 | 3 | 4}` as const;
  const sun = o.Sun.AltitudeDeg > 0 ? t("light.sun", { bearing: f.bearing(o.Sun.AzimuthTrue), height: Math.round(o.Sun.AltitudeDeg) }) : "";
  return [t(key), ...words, sun].filter(Boolean);
}
