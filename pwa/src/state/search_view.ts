// The search in words and figures: pure functions of what the log and the
// engine say. They round and word; they compute nothing that is steered by.

import type { Proposal } from "../engine/search_calls";
import type { LegStyle } from "../plot/plot_view";
import { t } from "../text/text";
import * as f from "../units/format";
import type { State } from "../wire/frame";
import type { LegLaid, LegSeen, RoleHeld, Search } from "../wire/search";

/** The search of the own vessel that is steered now, by the same rule as the engine's. */
export function running(state: State): Search | null {
  return (state.searches ?? []).findLast((s) => !s.vessel && s.leg >= 1 && (s.status === "running" || s.status === "paused")) ?? null;
}

/** The newest search of the own vessel that was run to its end. */
export function finished(state: State): Search | null {
  return (state.searches ?? []).findLast((s) => !s.vessel && s.status === "finished") ?? null;
}

export interface LegView {
  /** "leg 3 of 9". */
  leg: string;
  /** "18 m right of leg". */
  cross: string;
  /** "turn in 1 min 40". */
  turn: string;
  /** "066 M", or "068 T" where magnetic is not known. */
  steer: { figure: string; unit: string } | null;
  /** "then starboard 120, steer 186 M". */
  next: string;
  note: string;
  /** The order is to turn. */
  turnNow: boolean;
}

/** This long before the end of a leg the helm is told to turn: our choice, time to hear and to move. */
export const TURN_NOW_S = 5;
/** The leg as good as kept: our choice, what a receiver wanders by. */
const ON_LEG_M = 5;

/** The leg being steered. */
export function legView(leg: LegSeen, lengthM: number, variationDeg: number | null): LegView {
  return {
    leg: t("search.leg", { leg: leg.leg, of: leg.of }),
    cross: crossWords(leg.cross_m),
    turn: turnWords(leg, lengthM),
    steer: steerOf(leg),
    next: nextWords(leg, variationDeg),
    note: leg.note ?? "",
    turnNow: isTurn(leg),
  };
}

/** The order is to turn. */
export function isTurn(leg: LegSeen): boolean {
  return !leg.paused && (!!leg.done || (leg.turn_in_s !== null && leg.turn_in_s <= TURN_NOW_S));
}

function crossWords(m: number | null): string {
  if (m === null) return t("search.cross.unknown");
  if (Math.abs(m) < ON_LEG_M) return t("search.cross.on");
  return t(m > 0 ? "search.cross.right" : "search.cross.left", { off: f.rangeText(Math.abs(m)) });
}

function turnWords(leg: LegSeen, lengthM: number): string {
  if (leg.paused) return t("search.paused");
  if (leg.leg === leg.of && isTurn(leg)) return t("search.end_now");
  if (isTurn(leg)) return t("search.turn_now");
  // Further from the end than the leg is long: it has still to be reached.
  if (leg.to_go_m !== null && leg.to_go_m > lengthM + ON_LEG_M) return t("search.to_start", { range: f.rangeText(leg.to_go_m - lengthM) });
  const key = leg.leg === leg.of ? "search.end_in" : "search.turn_in";
  if (leg.turn_in_s !== null) return t(key, { time: countdown(leg.turn_in_s) });
  return leg.to_go_m === null ? t("search.turn_unknown") : t(key, { time: f.rangeText(Math.max(0, leg.to_go_m)) });
}

/** "40 s", "1 min 40", "12 min": seconds in fives while they matter. */
export function countdown(s: number): string {
  const whole = s < 10 ? Math.ceil(s) : Math.ceil(s / 5) * 5;
  if (whole < 60) return `${whole} s`;
  const min = Math.floor(whole / 60);
  const rest = whole % 60;
  return min >= 10 || rest === 0 ? `${Math.round(whole / 60)} min` : `${min} min ${String(rest).padStart(2, "0")}`;
}

function steerOf(leg: LegSeen): { figure: string; unit: string } | null {
  if (leg.steer_mag_deg !== null) return { figure: f.bearing(leg.steer_mag_deg), unit: "M" };
  return leg.steer_deg === null ? null : { figure: f.bearing(leg.steer_deg), unit: "T" };
}

function nextWords(leg: LegSeen, variationDeg: number | null): string {
  if (leg.leg === leg.of) return t("search.last");
  if (leg.next_turn_deg === null || leg.next_steer_deg === null) return "";
  const deg = Math.round(Math.abs(leg.next_turn_deg));
  const steer = variationDeg === null ? `${f.bearing(leg.next_steer_deg)} T` : `${f.bearing(leg.next_steer_deg - variationDeg)} M`;
  if (deg === 0) return t("search.then_on", { steer });
  return t(leg.next_turn_deg > 0 ? "search.then_starboard" : "search.then_port", { deg, steer });
}

/** How much of a leg was run, 0 to 1. Without a position it is reckoned by the time since it was begun. */
export function partRun(leg: LegSeen, laid: LegLaid, speedKn: number, begunS: number): number {
  const run = leg.to_go_m === null ? speedKn * M_PER_S * begunS : laid.length_m - leg.to_go_m;
  const part = laid.length_m > 0 ? run / laid.length_m : 0;
  return Math.round(Math.min(1, Math.max(0, part)) * 1000) / 1000;
}

const M_PER_S = 1852 / 3600; // one knot

export interface LegPiece {
  leg: number;
  style: LegStyle;
  /** Shares of the leg, 0 to 1. */
  from: number;
  to: number;
  cross: boolean;
}

/** The legs as they were run: planned is never shown as run, and what was left out is a gap. */
export function legPieces(search: Search): LegPiece[] {
  return search.legs.flatMap((laid, i) => {
    const leg = i + 1;
    const ended = search.done.filter((d) => d.leg === leg && !isOpen(d.ended_at));
    const part = ended.reduce((most, d) => Math.max(most, d.part), 0);
    const steered = leg === search.leg && (search.status === "running" || search.status === "paused");
    const rest: LegStyle = steered ? "now" : ended.length > 0 || leg < search.leg ? "left_out" : "todo";
    const cross = laid.kind === "cross";
    const pieces: LegPiece[] = [];
    if (part > 0) pieces.push({ leg, style: "done", from: 0, to: part, cross });
    if (part < 1) pieces.push({ leg, style: rest, from: part, to: 1, cross });
    return pieces;
  });
}

/** A leg that has not ended carries the zero time. */
export const isOpen = (endedAt: string): boolean => !endedAt || endedAt.startsWith("0001-");

/** Where a leg's ends lie now, in metres from the datum of the plan: it rides along. */
export function rideM(search: { begin: string; datum_drift: { set_deg: number; drift_kn: number } }, nowMs: number): { east_m: number; north_m: number } {
  const m = search.datum_drift.drift_kn * M_PER_S * Math.max(0, (nowMs - Date.parse(search.begin)) / 1000);
  const rad = (search.datum_drift.set_deg * Math.PI) / 180;
  return { east_m: m * Math.sin(rad), north_m: m * Math.cos(rad) };
}

export interface Watch {
  device: string;
  /** Phones on the server's word; null while it is silent, when this phone speaks for itself alone. */
  phones: number | null;
  roles: RoleHeld[];
  inCharge: string | null;
  /** The phone that began the leg. */
  began: string;
}

/** Whether this phone moves on to the next leg by itself: one phone does, so that no leg is begun twice. */
export function mayAdvance(w: Watch): boolean {
  if (w.phones === null || w.phones <= 1) return true;
  const helm = w.roles.findLast((r) => r.role === "helm" && r.name && r.holder)?.holder;
  const holder = helm ?? w.inCharge ?? w.began;
  return holder === w.device;
}

export interface ProposalView {
  title: string;
  reason: string;
  first: string;
  size: string;
  coverage: string;
  pod: string;
  width: string;
  notes: string[];
}

/** A proposal in words. */
export function proposalView(p: Proposal): ProposalView {
  const { body } = p;
  const first = body.legs[0];
  const notes = [...p.notes];
  if (!p.covers) notes.unshift(t("search.not_all"));
  return {
    title: t(`search.pattern.${body.pattern}`),
    reason: body.reason ?? "",
    first: first ? t("search.first", { bearing: f.bearing(first.course_deg), length: f.rangeText(first.length_m) }) : "",
    size: t("search.size", { legs: body.legs.length, length: f.rangeText(p.length_m), time: f.duration(p.takes_s) }),
    coverage: t("search.coverage", { coverage: p.coverage.toFixed(2) }),
    pod: t("search.pod_planned", { poor: percent(p.pod_poor), ideal: percent(p.pod_ideal) }),
    width: body.sweep_width_nm ? t("search.width", { width: f.rangeText(body.sweep_width_nm * 1852), by: body.sweep_width_by ?? "" }) : "",
    notes: notes.map(sentence),
  };
}

/** The engine's words, as a sentence of their own. */
const sentence = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);

/** Never rounded up to certainty. */
export function percent(share: number): string {
  return `${Math.min(99, Math.floor(share * 100))} %`;
}
