// A search from this page: what is asked of the engine, and what is logged.

import { signal } from "@preact/signals";
import { EngineError } from "../engine/engine";
import type { Cloud, Proposal, Searched } from "../engine/search_calls";
import { play } from "../sense/sound";
import { say } from "../sense/voice";
import { commonNow } from "../sync/clock";
import { t } from "../text/text";
import type { LogEvent } from "../wire/event";
import type { Frame } from "../wire/frame";
import type { How, LegSeen, Search } from "../wire/search";
import * as act from "./actions";
import { conditions, type Stated } from "./conditions";
import { linkNow, parts } from "./control";
import * as m from "./model";
import { isOpen, isTurn, legView, mayAdvance, partRun, running } from "./search_view";
import type { Selection } from "./select";

export const stated = signal<Stated>(read());
export const proposals = signal<Proposal[]>([]);
/** Which proposal is shown. */
export const shown = signal(0);
export const trouble = signal("");
export const cloud = signal<Cloud | null>(null);
export const searched = signal<Searched | null>(null);
/** The sun's light, 0 daylight to 4 night. */
export const light = signal<number | null>(null);
/** Until a tap is in the log, another does nothing. */
export const busy = signal(false);

/** The cloud and the searched water are asked for at most so often. */
const CLOUD_EVERY_MS = 10_000;
const PROPOSE_EVERY_MS = 15_000;
const LIGHT_EVERY_MS = 60_000;

const asked = new Map<string, number>();

/** Asks anew what has grown old. Called every second while the search screen is up. */
export function refresh(s: Selection, frame: Frame | null): void {
  if (m.engine.value.state !== "ready") return;
  const key = `${s.state.id}/${s.person?.no ?? 0}`;
  if (asked.get("for") !== hash(key)) {
    asked.clear();
    asked.set("for", hash(key));
    cloud.value = null;
    searched.value = null;
    proposals.value = [];
  }
  if (due("light", LIGHT_EVERY_MS)) void askLight(frame);
  if (due("cloud", CLOUD_EVERY_MS)) void askCloud(s);
  if (due("searched", CLOUD_EVERY_MS) && (s.state.searches ?? []).length > 0) void askSearched(s);
  if (!running(s.state) && due("propose", PROPOSE_EVERY_MS)) void propose(s, frame);
}

const hash = (text: string): number => [...text].reduce((h, c) => (h * 31 + c.charCodeAt(0)) | 0, 7);

function due(what: string, everyMs: number): boolean {
  const now = Date.now();
  if (now - (asked.get(what) ?? Number.NEGATIVE_INFINITY) < everyMs) return false;
  asked.set(what, now);
  return true;
}

const iso = (): string => new Date(commonNow()).toISOString();
const who = (s: Selection) => ({ now: iso(), incident: s.state.id, ...(s.person && { person: s.person.no }) });

async function askLight(frame: Frame | null): Promise<void> {
  const position = frame?.fix?.position ?? frame?.datum?.position;
  if (!position) return void asked.delete("light");
  const out = await parts().engine.call("daylight", { now: iso(), position }).catch(() => null);
  light.value = out?.Light ?? null;
}

async function askCloud(s: Selection): Promise<void> {
  // Without a place or a wind there is no cloud: the halo of the datum stands alone.
  cloud.value = await parts().engine.call("cloud", { ...who(s), members: 2000 }).catch(() => null);
}

async function askSearched(s: Selection): Promise<void> {
  searched.value = await parts().engine.call("searched", { ...who(s), members: 2000 }).catch(() => searched.value);
}

/** Asks for proposals now. */
export async function propose(s: Selection, frame: Frame | null): Promise<void> {
  asked.set("propose", Date.now());
  const windKn = frame?.datum?.wind_kn ?? null;
  try {
    const answer = await parts().engine.call("propose_search", { ...who(s), ...conditions(stated.value, { windKn, light: light.value }) });
    proposals.value = answer.proposals;
    if (shown.value >= answer.proposals.length) shown.value = 0;
    trouble.value = "";
  } catch (err) {
    proposals.value = [];
    trouble.value = (err as Error).message;
    if (err instanceof EngineError && err.code === "not_ready") asked.delete("propose");
  }
}

/** Changes what is said of the conditions, and lays anew for them. */
export function state(s: Selection, frame: Frame | null, change: Stated): void {
  stated.value = { ...stated.value, ...change };
  m.store("wakeback.conditions", JSON.stringify({ at: Date.now(), said: stated.value }));
  void propose(s, frame);
}

/** Conditions said longer ago are another day's: our choice. */
const STATED_MS = 6 * 3600_000;

function read(): Stated {
  try {
    const kept = JSON.parse(localStorage.getItem("wakeback.conditions") ?? "null") as { at: number; said: Stated } | null;
    return kept && Date.now() - kept.at < STATED_MS ? kept.said : {};
  } catch {
    return {};
  }
}

async function once<T>(what: () => Promise<T>): Promise<T | null> {
  if (busy.value) return null;
  busy.value = true;
  try {
    return await what();
  } finally {
    busy.value = false;
  }
}

/** Lays a search and begins its first leg. */
export function begin(s: Selection, p: Proposal): Promise<LogEvent | null> {
  return once(async () => {
    const laid = await act.log(s, "search_laid", { ...p.body });
    // No undo over the first order to steer: dropping the search is a hold away.
    return act.log(s, "leg_begun", { search: laid.id, leg: 1 }, false);
  });
}

/** What was seen with, for the count: the crew's own words, or nothing. */
function seenWith(): Record<string, unknown> {
  const { lookouts, visibility_nm } = stated.value;
  const by = light.value === null ? "" : light.value === 0 ? "day" : light.value === 1 ? "dusk" : "night";
  return { ...(lookouts !== undefined && { lookouts }), ...(visibility_nm !== undefined && { visibility_nm }), ...(by && { light: by }) };
}

/** The leg's run that has not ended. */
const open = (r: Search) => r.done.findLast((d) => d.leg === r.leg && isOpen(d.ended_at));

async function end(s: Selection, r: Search, leg: LegSeen | null, how: How): Promise<void> {
  const laid = r.legs[r.leg - 1];
  const run = open(r);
  // A leg that was broken off already has its part.
  if (!laid || !run) return;
  const begunS = run.begun_at ? (commonNow() - Date.parse(run.begun_at)) / 1000 : 0;
  const part = how === "run" ? 1 : leg ? partRun(leg, laid, r.speed_kn, begunS) : 0;
  await act.log(s, "leg_ended", { search: r.event, leg: r.leg, part, how, ...seenWith() }, false);
}

async function next(s: Selection, r: Search, leg: LegSeen | null, how: How): Promise<void> {
  await end(s, r, leg, how);
  if (r.leg < r.legs.length) await act.log(s, "leg_begun", { search: r.event, leg: r.leg + 1 }, false);
  else if (how !== "run") await act.log(s, "search_dropped", { search: r.event, reason: how }, false);
}

/** The next leg by hand: this one was run to its end, or is left out. */
export function advance(s: Selection, leg: LegSeen | null, how: "run" | "skipped"): Promise<unknown> {
  return once(async () => {
    const r = running(s.state);
    if (r) await next(s, r, leg, how);
  });
}

/** Breaks the leg off where it is: what is run while paused is not search. */
export function pause(s: Selection, leg: LegSeen | null, reason = ""): Promise<unknown> {
  return once(async () => {
    const r = running(s.state);
    if (r?.status !== "running") return;
    await end(s, r, leg, "broken_off");
    await act.log(s, "search_paused", { search: r.event, ...(reason && { reason }) });
  });
}

export function resume(s: Selection): Promise<unknown> {
  return once(async () => {
    const r = running(s.state);
    if (!r) return;
    await act.log(s, "search_resumed", { search: r.event });
    await act.log(s, "leg_begun", { search: r.event, leg: r.leg }, false);
  });
}

/** Seen: the sighting is logged first, then the leg is broken off. */
export async function seen(s: Selection, leg: LegSeen | null): Promise<void> {
  await act.seen(s);
  await pause(s, leg, "seen");
}

export function drop(s: Selection, leg: LegSeen | null): Promise<unknown> {
  return once(async () => {
    const r = running(s.state);
    if (!r) return;
    await end(s, r, leg, "broken_off");
    await act.log(s, "search_dropped", { search: r.event }, false);
  });
}

// --- by itself ---

/** A leg has to stay done so long before the next begins: as the engine's own rule has it. */
const SETTLE_MS = 2_000;
let done = { leg: "", ms: 0 };

let called = "";
let begunSaid = "";

/** Turn now is heard once for each turn, on every screen; the steer of a new leg is said. */
function call(leg: LegSeen, lengthM: number, variationDeg: number | null): void {
  const key = `${leg.search}/${leg.leg}`;
  const view = legView(leg, lengthM, variationDeg);
  if (isTurn(leg) && called !== key) {
    called = key;
    play("turn");
    if (m.speech.value) say([view.turn, view.next].filter(Boolean).join(". "));
  } else if (!leg.paused && begunSaid !== key) {
    begunSaid = key;
    if (m.speech.value && view.steer) say(`${view.leg}. ${t("search.steer")} ${[...view.steer.figure].join(" ")}`);
  }
}

/** A search that runs with no leg begun, because a pause or a drop was taken back, begins its leg anew after this. Our choice: longer than two events of one act lie apart. */
const BARE_MS = 5_000;
let bare = { search: "", ms: 0 };

function mend(s: Selection, r: Search): void {
  if (r.status !== "running" || open(r) || s.person?.in_sight) {
    bare = { search: "", ms: 0 };
    return;
  }
  if (bare.search !== r.event) bare = { search: r.event, ms: Date.now() };
  if (Date.now() - bare.ms < BARE_MS || !mayAdvance(watch(s, r))) return;
  bare = { search: "", ms: 0 };
  void once(() => act.log(s, "leg_begun", { search: r.event, leg: r.leg }, false));
}

/** Moves on to the next leg when this one has been done for a while. Called with every frame. */
export function follow(s: Selection, frame: Frame | null): void {
  const leg = frame?.leg ?? null;
  const r = running(s.state);
  if (leg && r?.event === leg.search && !s.person?.in_sight) call(leg, r.legs[leg.leg - 1]?.length_m ?? 0, frame?.variation_deg ?? null);
  if (r) mend(s, r);
  if (!leg?.done || leg.paused || s.person?.in_sight || !r || r.event !== leg.search || r.leg !== leg.leg) {
    done = { leg: "", ms: 0 };
    return;
  }
  const key = `${leg.search}/${leg.leg}`;
  if (done.leg !== key) done = { leg: key, ms: Date.now() };
  if (Date.now() - done.ms < SETTLE_MS || !open(r) || !mayAdvance(watch(s, r))) return;
  done = { leg: "", ms: 0 };
  void advance(s, leg, "run");
}

function watch(s: Selection, r: Search) {
  const laid = m.log.value.find((e) => e.kind === "leg_begun" && e.body.search === r.event && e.body.leg === r.leg);
  return {
    device: m.device.value,
    phones: linkNow().fresh ? m.link.value.phones : null,
    roles: s.state.roles ?? [],
    inCharge: s.state.in_charge?.holder ?? null,
    began: laid?.device ?? r.device,
  };
}
