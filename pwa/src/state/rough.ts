// What is open, before the engine is loaded or when it cannot be: no drift, no
// bearing, only that someone is in the water, since when, and where it was
// pressed. The engine's fold replaces it as soon as it answers.

import type { LogEvent, Marked } from "../wire/event";
import type { Mark, PersonState, State } from "../wire/frame";

/** Groups events into incidents; only marks, dismissals, aboard and stand-downs count. */
export function roughStates(events: LogEvent[]): State[] {
  const sorted = [...events].sort((a, b) => (a.at < b.at ? -1 : a.at > b.at ? 1 : a.id < b.id ? -1 : 1));
  const states = new Map<string, State>();
  for (const e of sorted) {
    const s = states.get(e.incident) ?? fresh(e);
    states.set(e.incident, s);
    s.events++;
    s.last_at = e.at;
    apply(s, e);
  }
  for (const s of states.values()) settle(s);
  return [...states.values()];
}

function fresh(e: LogEvent): State {
  return {
    id: e.incident, opened_at: e.at, last_at: e.at, events: 0, status: "open", marks: [], persons: [],
    drill: !!e.drill, test: !!e.test,
  };
}

function apply(s: State, e: LogEvent): void {
  if (e.kind === "marked") {
    s.marks.push(markOf(e, s.marks.length + 1));
    if (!e.test) s.test = false;
    if (!e.drill) s.drill = false;
  } else if (e.kind === "mark_dismissed") {
    const m = s.marks.find((m) => m.event === e.body.mark);
    if (m) m.dismissed = { event: e.id, at: e.at, device: e.device };
  } else if (e.kind === "aboard") {
    personOf(s, Number(e.body.person ?? 1), e.at).status = "aboard";
  } else if (e.kind === "stood_down") {
    s.status = "stood_down";
    s.status_at = e.at;
  } else if (e.kind === "reopened") {
    s.status = "open";
  }
}

function markOf(e: LogEvent, number: number): Mark {
  const b = e.body as unknown as Marked;
  const place = b.position ? { position: b.position, source: b.source, error_m: b.error_m ?? null } : null;
  return {
    event: e.id, at: e.at, device: e.device, device_at: e.device_at, fell_at: e.at,
    number, person: b.person ?? 1, press: place, place,
    ...(e.by && { by: e.by }),
  };
}

function personOf(s: State, no: number, at: string): PersonState {
  let p = s.persons.find((p) => p.no === no);
  if (!p) {
    p = { no, status: "in_water", status_at: at, life_jacket: "unknown", in_sight: false };
    s.persons.push(p);
  }
  return p;
}

function settle(s: State): void {
  const real = s.marks.filter((m) => !m.dismissed);
  for (const m of real) {
    const p = personOf(s, m.person, m.at);
    p.working_mark ??= m.event;
  }
  if (s.marks.length > 0 && real.length === 0) s.status = "stood_down";
  const down = s.status_at;
  if (s.status === "stood_down" && down && real.some((m) => m.at > down)) s.status = "open";
}
