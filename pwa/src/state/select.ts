// Which incident and which person this phone shows.

import type { Mark, PersonState, State } from "../wire/frame";

export interface Selection {
  state: State;
  person: PersonState | null;
  mark: Mark | null;
}

/** Incidents in which someone still has to be found or brought aboard: real before drill, newest first. */
export function live(states: State[]): State[] {
  return states
    .filter((s) => s.status !== "stood_down" && !s.test)
    .sort((a, b) => Number(!!a.drill) - Number(!!b.drill) || (a.opened_at < b.opened_at ? 1 : -1));
}

/** The person chosen here, else the first not yet aboard, else the last. */
export function select(states: State[], chosen: { incident: string; person: number } | null): Selection | null {
  const open = live(states);
  const state = open.find((s) => s.id === chosen?.incident || s.joined?.includes(chosen?.incident ?? "")) ?? open[0];
  if (!state) return null;
  const person =
    (chosen && state.persons.find((p) => p.no === chosen.person && chosen.incident === state.id)) ??
    state.persons.find((p) => p.status !== "aboard") ??
    state.persons.at(-1) ??
    null;
  const working = person?.working_mark;
  const mark = state.marks.find((m) => m.event === working) ?? state.marks.find((m) => !m.dismissed) ?? null;
  return { state, person, mark };
}

/** The key under which frames of an incident's person are held. */
export function frameKey(incident: string, person: number): string {
  return `${incident}/${person}`;
}

/** The next free number for another person. */
export function nextPerson(state: State): number {
  return Math.max(0, ...state.persons.map((p) => p.no), ...state.marks.map((m) => m.person)) + 1;
}
