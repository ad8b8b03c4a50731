// What a person can do, as events of the log. Everything but time can be undone.

import { signal } from "@preact/signals";
import { EngineError } from "../engine/engine";
import { headingState, phoneHeading, startHeading } from "../sense/heading";
import { markedNow } from "../sense/position";
import { commonNow } from "../sync/clock";
import { t } from "../text/text";
import type { Kind, LogEvent, Marked } from "../wire/event";
import type { Mark } from "../wire/frame";
import { parts } from "./control";
import * as m from "./model";
import type { Selection } from "./select";

/** What could not be done, in words, until the next try. */
export const trouble = signal("");

/** Logs an event of the selected incident and offers to undo it. */
export async function log(s: Selection, kind: Kind, body: Record<string, unknown> = {}, undoable = true): Promise<LogEvent> {
  const event = await parts().add(kind, s.state.id, body, { drill: !!s.state.drill });
  m.lastAct.value = { id: event.id, key: `kind.${kind}`, ms: Date.now(), undoable };
  return event;
}

const ofPerson = (s: Selection): Record<string, unknown> => (s.person ? { person: s.person.no } : {});

/** The person is in sight, from where this vessel is now. */
export function seen(s: Selection): Promise<LogEvent> {
  return log(s, "seen", { ...ofPerson(s), what: "person", ...observer() });
}

export function lostSight(s: Selection): Promise<LogEvent> {
  return log(s, "lost_sight", { ...ofPerson(s), ...observer() });
}

function observer(): Record<string, unknown> {
  const here: Marked = markedNow();
  return here.position ? { observer: here.position } : {};
}

export function alongside(s: Selection): Promise<LogEvent> {
  return log(s, "alongside", ofPerson(s));
}

export function parted(s: Selection): Promise<LogEvent> {
  return log(s, "parted", ofPerson(s));
}

export function missedPass(s: Selection): Promise<LogEvent> {
  return log(s, "missed_pass", ofPerson(s));
}

export async function aboard(s: Selection, condition: string): Promise<LogEvent> {
  const was = s.person?.status;
  const event = await log(s, "aboard", { ...ofPerson(s), condition });
  if (was !== "aboard" && condition !== "never_left") await changeHeadCount(s, 1);
  return event;
}

/** Says how many were counted aboard. */
export function headCount(s: Selection, aboardNow: number): Promise<LogEvent> {
  const expected = s.state.head_count?.expected;
  return log(s, "head_count", { aboard: Math.max(0, aboardNow), ...(expected != null && { expected }) });
}

/** One more or fewer aboard, where they were counted at all; beside what caused it, so with no undo of its own. */
async function changeHeadCount(s: Selection, by: number): Promise<void> {
  const count = s.state.head_count;
  if (!count || count.aboard + by < 0) return;
  const body = { aboard: count.aboard + by, ...(count.expected != null && { expected: count.expected }) };
  await parts().add("head_count", s.state.id, body, { drill: !!s.state.drill });
}

export function callMade(s: Selection, call: "distress" | "urgency" | "cancel"): Promise<LogEvent> {
  return log(s, "call_made", { call });
}

export function callAnswered(s: Selection): Promise<LogEvent> {
  const last = s.state.calls?.filter((c) => !c.answered).at(-1);
  return log(s, "call_answered", { call: last?.call ?? "distress" });
}

export function note(s: Selection, text: string): Promise<LogEvent> {
  return log(s, "note", { text });
}

export function dismiss(s: Selection, mark: Mark): Promise<LogEvent> {
  return log(s, "mark_dismissed", { mark: mark.event });
}

export function workBy(s: Selection, mark: Mark): Promise<LogEvent> {
  return log(s, "working_mark", { mark: mark.event });
}

export function standDown(s: Selection, reason: string): Promise<LogEvent> {
  return log(s, "stood_down", { reason }, false);
}

export function reopen(s: Selection, reason: string): Promise<LogEvent> {
  return log(s, "reopened", { reason });
}

/** Takes charge, one term above whoever holds it. */
export function takeCharge(s: Selection): Promise<LogEvent> {
  const term = (s.state.in_charge?.term ?? 0) + 1;
  return log(s, "in_charge", { name: m.myName.value || t("down.someone"), device: m.device.value, term });
}

/** Takes an event back; it stays in the log. */
export async function undo(event: { id: string }): Promise<void> {
  const target = m.log.value.find((e) => e.id === event.id);
  if (!target) return;
  await parts().add("undone", target.incident, { event: target.id }, { drill: !!target.drill, test: !!target.test });
  if (m.lastAct.value?.id === event.id) m.lastAct.value = null;
}

/** Moves a mark back by so many seconds; 0 is the press itself. */
export async function moveBack(s: Selection, mark: Mark, backS: number): Promise<boolean> {
  return adjust(s, mark, { mark: mark.event, back_s: backS }, { back_s: backS });
}

/** Moves a mark to a time typed as hh:mm or hh:mm:ss UTC, the newest such time that is past. */
export async function moveToTime(s: Selection, mark: Mark, text: string): Promise<boolean> {
  const at = pastTime(text, commonNow());
  if (at === null) {
    trouble.value = t("when.bad_time");
    return false;
  }
  const fell_at = new Date(at).toISOString();
  return adjust(s, mark, { mark: mark.event, fell_at }, {});
}

async function adjust(
  s: Selection,
  mark: Mark,
  ask: { mark: string; back_s: number } | { mark: string; fell_at: string },
  extra: Record<string, unknown>,
): Promise<boolean> {
  trouble.value = "";
  let body: Record<string, unknown>;
  try {
    const { fell_at, position, source, error_m } = await parts().engine.call("back", ask);
    body = { mark: mark.event, fell_at, ...extra, ...(position && { position, source, ...(error_m != null && { error_m }) }) };
  } catch (err) {
    // Without a track the time is still worth having: the place stays where it was pressed.
    if (err instanceof EngineError && err.code !== "no_track" && err.code !== "not_ready") {
      trouble.value = err.message;
      return false;
    }
    const fellAt = "fell_at" in ask ? ask.fell_at : new Date(Date.parse(mark.at) - ask.back_s * 1000).toISOString();
    body = { mark: mark.event, fell_at: fellAt, ...extra };
  }
  await log(s, "mark_adjusted", body);
  return true;
}

/** Moves a mark to a position typed by a person; the engine reads it, or says what it expected. */
export async function moveToPosition(s: Selection, mark: Mark, text: string): Promise<boolean> {
  trouble.value = "";
  try {
    const position = await parts().engine.call("parse_position", { text });
    await log(s, "mark_adjusted", { mark: mark.event, position, source: "typed" });
    return true;
  } catch (err) {
    trouble.value = err instanceof EngineError && err.code === "not_ready" ? t("when.not_ready") : String((err as Error).message);
    return false;
  }
}

/** The newest moment before now that a clock showed so; null when the text is no time. */
export function pastTime(text: string, nowMs: number): number | null {
  const m = /^\s*(\d{1,2})[:.](\d{2})(?:[:.](\d{2}))?\s*$/.exec(text);
  if (!m) return null;
  const [h, min, sec] = [Number(m[1]), Number(m[2]), Number(m[3] ?? 0)];
  if (h > 23 || min > 59 || sec > 59) return null;
  const day = new Date(nowMs);
  const at = Date.UTC(day.getUTCFullYear(), day.getUTCMonth(), day.getUTCDate(), h, min, sec);
  return at <= nowMs ? at : at - 86_400_000;
}

/** Chooses the palette, for this start and the next. */
export function choosePalette(p: m.Palette): void {
  m.palette.value = p;
  m.store("wakeback.palette", p);
  document.documentElement.dataset.palette = p;
}

export function chooseRing(up: m.RingUp): void {
  m.ringUp.value = up;
  if (up === "phone_up") {
    void startHeading(() => (m.phoneHeading.value = { state: headingState(), heading: phoneHeading() }));
  }
  m.store("wakeback.ring", up);
}

export function chooseSpeech(on: boolean): void {
  m.speech.value = on;
  m.store("wakeback.speech", on ? "" : "off");
}

export function chooseDrill(on: boolean): void {
  m.drill.value = on;
  m.store("wakeback.drill", on ? "on" : "");
}

export function chooseName(name: string): void {
  m.myName.value = name.trim();
  m.store("wakeback.name", m.myName.value);
}

/** Pairs this phone with a code; returns "" or why it was not taken. */
export async function pair(code: string): Promise<string> {
  try {
    const response = await fetch("/api/v1/pair", {
      method: "POST",
      headers: { "content-type": "application/json" },
      body: JSON.stringify({ code: code.trim(), name: m.myName.value || t("setup.phone") }),
    });
    if (!response.ok) {
      const p = (await response.json().catch(() => ({}))) as { detail?: string; title?: string };
      return p.detail ?? p.title ?? `HTTP ${response.status}`;
    }
  } catch (err) {
    return String((err as Error).message);
  }
  m.link.value = { ...m.link.value, unpaired: false };
  parts().stream.revive();
  void parts().sender.send();
  return "";
}
