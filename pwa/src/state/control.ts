// Wires the parts together: outbox, sender, stream, engine and senses write
// what they learn into the model. Everything else reads the model.

import { batch, effect } from "@preact/signals";
import type { MarkButton, Pressed } from "../boot/mark";
import { Engine } from "../engine/engine";
import * as place from "../sense/position";
import { play, soundState, unlockSound } from "../sense/sound";
import { askStorage } from "../sense/storage";
import { keepAwake, wakeState } from "../sense/wake";
import { clockOffset, common, commonNow, measured } from "../sync/clock";
import { uuidv7 } from "../sync/event";
import type { Outbox } from "../sync/outbox";
import { Sender } from "../sync/sender";
import { Stream } from "../sync/stream";
import type { Kind, LogEvent, Position } from "../wire/event";
import type { Frame, Message, State } from "../wire/frame";
import * as m from "./model";
import { linkView } from "./link_view";
import { roughStates } from "./rough";
import { frameKey, live, select } from "./select";

/** A mark that is older than this when it is first heard of calls nobody: it is history. Our choice. */
const CALL_WITHIN_MS = 10 * 60_000;
/** How long this phone keeps its own track on disk, to find the place of a mark pressed late. */
const TRACK_KEPT_MS = 2 * 3600_000;
/** Between two points on disk: our choice, a tenth of a cable at 7 kn. */
const TRACK_EVERY_MS = 5_000;

export interface Control {
  outbox: Outbox;
  sender: Sender;
  engine: Engine;
  mark: MarkButton;
  stream: Stream;
  /** Writes an event and sends it. */
  add: (kind: Kind, incident: string, body: Record<string, unknown>, flags?: { drill?: boolean; test?: boolean }) => Promise<LogEvent>;
}

const events = new Map<string, LogEvent>();
let control: Control;

/** The running page's parts. */
export const parts = (): Control => control;

/** Starts everything. */
export function startControl(outbox: Outbox, mark: MarkButton): Control {
  const engine = new Engine();
  const sender = new Sender(outbox);
  const stream = new Stream({ url: streamUrl, onMessage: heard, onState: connected });
  control = { outbox, sender, engine, mark, stream, add };

  mark.onPress = pressed;
  outbox.onChange = () => void refreshOutbox();
  sender.onResult = (r) => {
    m.link.value = { ...m.link.value, unpaired: r === "unpaired" };
  };
  engine.onState = () => {
    m.engine.value = { state: engine.state, why: engine.why };
  };
  engine.onReady = () => void feedEngine();

  unlockSound(() => (m.sound.value = soundState()));
  m.sound.value = soundState();
  keepAwake(() => (m.wake.value = wakeState()));
  place.onFix(() => void fixed());
  fixed();
  void askStorage().then((s) => (m.storage.value = s));

  void begin(outbox, engine, sender, stream);
  setInterval(tick, 1000);
  effect(follow);
  return control;
}

async function begin(outbox: Outbox, engine: Engine, sender: Sender, stream: Stream): Promise<void> {
  m.device.value = await outbox.device();
  await outbox.mend();
  await outbox.forgetRefusals();
  for (const e of await outbox.all()) events.set(e.id, e);
  lastSeq = (await outbox.meta<number>("last_seq")) ?? 0;
  epoch = (await outbox.meta<string>("epoch")) ?? "";
  await showEvents();
  m.loaded.value = true;
  await refreshOutbox();
  engine.start();
  sender.start();
  stream.start();
}

// --- events ---

async function add(
  kind: Kind,
  incident: string,
  body: Record<string, unknown>,
  flags: { drill?: boolean; test?: boolean } = {},
): Promise<LogEvent> {
  const now = Date.now();
  const offset = clockOffset();
  const event = await control.outbox.add({
    id: uuidv7(now),
    incident,
    kind,
    at: new Date(common(now)).toISOString(),
    device_at: new Date(now).toISOString(),
    ...(offset && { clock_error_ms: offset.error_ms }),
    ...(m.myName.value && { by: m.myName.value }),
    ...(flags.drill && { drill: true }),
    ...(flags.test && { test: true }),
    body,
  });
  await took([event]);
  void control.sender.send();
  return event;
}

/** A press of MARK: the screen changes now, everything else follows. */
function pressed(p: Pressed): void {
  const { draft } = p;
  if (!draft.test) {
    play("marked");
    // Shown before the disk has answered; the sealed event replaces it.
    events.set(draft.id, { ...draft, device: m.device.value, device_seq: 0, prev_hash: "", hash: "" });
    if (draft.body.person !== undefined) {
      m.chosen.value = { incident: draft.incident, person: Number(draft.body.person) };
    }
    m.sheet.value = "";
    m.incidents.value = mergeRough();
  }
  m.lastAct.value = { id: draft.id, key: "kind.marked", ms: Date.now(), undoable: false };
  void p.kept.then(async (event) => {
    const before = m.incidents.value.find((s) => s.id === draft.incident || s.joined?.includes(draft.incident));
    await took([event]);
    void control.sender.send();
    await oneFewer(draft, before);
  });
}

/** Someone else went over the side: where heads were counted, one fewer is aboard. */
async function oneFewer(draft: Pressed["draft"], before: State | undefined): Promise<void> {
  const count = before?.head_count;
  const known = before?.persons.some((p) => p.no === draft.body.person && p.status !== "aboard");
  const another = before?.marks.some((k) => k.person === draft.body.person && k.event !== draft.id);
  if (!count || count.aboard < 1 || draft.body.person === undefined || (known && another)) return;
  const body = { aboard: count.aboard - 1, ...(count.expected != null && { expected: count.expected }) };
  await add("head_count", draft.incident, body, { drill: !!draft.drill });
}

/** New events, from here or from the server. */
async function took(fresh: LogEvent[]): Promise<void> {
  for (const e of fresh) events.set(e.id, e);
  if (control.engine.state === "ready") {
    await control.engine.call("add_events", { events: fresh }).catch(() => {});
  }
  await showEvents();
}

async function feedEngine(): Promise<void> {
  const { engine } = control;
  for (const p of await control.outbox.tracked()) {
    const fix = { at: iso(p.ms), position: { lat: p.lat, lon: p.lon }, sog_kn: p.sog_kn ?? null, cog_deg: p.cog_deg ?? null, error_m: p.error_m ?? null };
    await engine.call("own", { source: "phone", fix });
  }
  await engine.call("add_events", { events: sealed() });
  tellEngine(place.vessel(), "vessel");
  tellEngine(place.phone(), "phone");
  await showEvents();
}

/** The events that have their place in a chain; a press is shown a moment before it has. */
const sealed = (): LogEvent[] => [...events.values()].filter((e) => e.hash !== "");

async function showEvents(): Promise<void> {
  let states = roughStates([...events.values()]);
  if (control.engine.state === "ready") {
    states = (await control.engine.call("states", {}).catch(() => null))?.incidents ?? states;
    // A press that is on its way to the disk is already on the screen.
    if (sealed().length < events.size) states = merge(states);
  }
  batch(() => {
    m.incidents.value = states;
    m.log.value = [...events.values()].sort((a, b) => (a.at < b.at ? 1 : a.at > b.at ? -1 : a.id < b.id ? 1 : -1));
  });
  await steer();
}

const mergeRough = () => merge(m.incidents.value);

/** Adds what only the rough fold knows yet: a press in the moment before it is kept. */
function merge(states: typeof m.incidents.value): typeof m.incidents.value {
  const rough = roughStates([...events.values()]);
  const known = new Set(states.filter((s) => s.status !== "stood_down").flatMap((s) => [s.id, ...(s.joined ?? [])]));
  return [...states.filter((s) => s.status !== "stood_down" || !rough.some((r) => r.id === s.id && r.status === "open")), ...rough.filter((r) => !known.has(r.id))];
}

async function refreshOutbox(): Promise<void> {
  const { outbox } = control;
  const pending = await outbox.pending();
  const refused = await outbox.refusals();
  batch(() => {
    m.onlyHere.value = { only_here: pending.length + refused.length, refused: refused.length };
    m.pendingIds.value = new Set([...pending.map((e) => e.id), ...refused.map((r) => r.id)]);
    m.refusals.value = new Map(refused.map((r) => [r.id, r.reason]));
    m.unsafe.value = outbox.unsafe;
  });
}

// --- the server ---

let lastSeq = 0;
let epoch = "";

function streamUrl(): string {
  const scheme = location.protocol === "https:" ? "wss" : "ws";
  const query = new URLSearchParams({ after: String(lastSeq), ...(epoch && { epoch }) });
  return `${scheme}://${location.host}/api/v1/stream?${query}`;
}

function connected(on: boolean): void {
  const before = m.link.value;
  m.link.value = { ...before, connected: on };
  if (on) {
    void control.sender.send();
    askTime();
  } else if (live(m.incidents.value).length > 0) {
    play("lost");
  }
}

let askedMs = 0;

/** Asks the server's time: what makes the phones' clocks one. */
function askTime(): void {
  askedMs = Date.now();
  control.stream.send({ t: "time", client_ms: askedMs });
}

function heard(message: Message): void {
  m.link.value = { ...m.link.value, connected: true, heardMs: control.stream.heardMs, unpaired: false };
  switch (message.t) {
    case "hello":
      void hello(message);
      break;
    case "event":
      void gotEvent(message.event);
      break;
    case "fix":
      gotFix(message);
      break;
    case "steer":
      gotFrame(message as unknown as Frame);
      break;
    case "tick":
      gotTick(message);
      break;
    case "time":
      gotTime(message);
      break;
    case "problem":
      gotProblem(message);
      break;
  }
}

async function hello(h: { epoch: string; after?: number; reset?: boolean }): Promise<void> {
  m.link.value = { ...m.link.value, warning: "" };
  if (h.reset && h.after !== undefined) lastSeq = h.after;
  if (epoch && h.epoch !== epoch) {
    // Another store: all that this phone wrote goes to it, and its log is read from the start.
    lastSeq = 0;
    await control.outbox.setMeta("last_seq", 0);
    await control.outbox.sendAllAgain();
    void control.sender.send();
  }
  epoch = h.epoch;
  await control.outbox.setMeta("epoch", epoch);
}

let keeping: Promise<void> = Promise.resolve();
let waiting: LogEvent[] = [];

/** Events come singly and often in long runs; they are kept in the order they came, many at once. */
function gotEvent(event: LogEvent): Promise<void> {
  waiting.push(event);
  if (waiting.length === 1) {
    keeping = keeping.then(async () => {
      const batchOf = waiting;
      waiting = [];
      await keepEvents(batchOf);
    });
  }
  return keeping;
}

async function keepEvents(got: LogEvent[]): Promise<void> {
  const fresh = await control.outbox.keep(got);
  const seq = Math.max(lastSeq, ...got.map((e) => e.seq ?? 0));
  if (seq > lastSeq) {
    lastSeq = seq;
    await control.outbox.setMeta("last_seq", lastSeq);
  }
  const mine = got.filter((e) => e.device === m.device.value).map((e) => e.id);
  if (mine.length > 0 && mine.some((id) => m.pendingIds.value.has(id))) await control.outbox.acknowledged(mine);
  await took(got);
  for (const e of fresh) if (callsAll(e)) allHands(e);
}

/** A mark by someone else, just now: every phone turns to the return screen and sounds. */
function callsAll(e: LogEvent): boolean {
  const calls = e.kind === "marked" || e.kind === "beacon" || e.kind === "missing";
  return calls && !e.test && e.device !== m.device.value && commonNow() - Date.parse(e.at) < CALL_WITHIN_MS;
}

function allHands(e: LogEvent): void {
  if (e.kind === "beacon" && live(m.incidents.value).some((s) => s.id === e.incident && s.events > 1)) return;
  play("marked");
  if (m.sheet.value === "log" || m.sheet.value === "setup") m.sheet.value = "";
}

function gotFix(f: Record<string, unknown>): void {
  const position = f.position as Position | undefined | null;
  if (!position) return; // the last one stays, and grows older
  const num = (x: unknown): number | null => (typeof x === "number" ? x : null);
  place.tookVessel(
    {
      position,
      error_m: num(f.error_m),
      sog_kn: num(f.sog_kn),
      cog_deg: num(f.cog_deg),
      heading_deg: num(f.heading_deg),
      reckoned: f.source === "dr",
    },
    num(f.age_s) ?? 0,
  );
}

function gotFrame(frame: Frame): void {
  const next = new Map(m.serverFrames.value);
  next.set(frameKey(frame.incident, frame.person), { frame, gotMs: Date.now() });
  m.serverFrames.value = next;
}

function gotTick(tick: Record<string, unknown>): void {
  const phones = typeof tick.clients === "number" ? tick.clients : m.link.value.phones;
  m.link.value = { ...m.link.value, phones };
}

function gotTime(answer: Record<string, unknown>): void {
  const [t1, t2, t3] = [answer.client_ms, answer.received_ms, answer.server_ms].map(Number) as [number, number, number];
  measured({ t1, t2, t3, t4: Date.now() });
}

/** What the server says of itself that everyone should know, until it says that it is over. */
function gotProblem(p: { title?: string; over?: boolean; of?: unknown }): void {
  if (p.of) return;
  m.link.value = { ...m.link.value, warning: p.over ? "" : (p.title ?? "") };
  if (p.over) void control.sender.send();
}

// --- position ---

let trackedMs = 0;

function fixed(): void {
  const vessel = place.vessel();
  const phone = place.phone();
  if (vessel !== m.vesselFix.value) tellEngine(vessel, "vessel");
  if (phone !== m.phoneFix.value) {
    tellEngine(phone, "phone");
    if (phone && phone.taken_ms - trackedMs >= TRACK_EVERY_MS) {
      trackedMs = phone.taken_ms;
      const { position, error_m, sog_kn, cog_deg } = phone;
      const point = { ms: common(phone.taken_ms), ...position, ...(error_m !== null && { error_m }), ...(sog_kn !== null && { sog_kn }), ...(cog_deg !== null && { cog_deg }) };
      void control.outbox.track(point, TRACK_KEPT_MS);
    }
  }
  batch(() => {
    m.vesselFix.value = vessel;
    m.phoneFix.value = phone;
    m.phoneState.value = place.phonePositionState();
  });
}

function tellEngine(fix: place.HeldFix | null, source: "vessel" | "phone"): void {
  if (!fix || control.engine.state !== "ready") return;
  const at = iso(common(fix.taken_ms));
  const own = { at, position: fix.position, sog_kn: fix.sog_kn, cog_deg: fix.cog_deg, error_m: fix.error_m };
  const heading = fix.heading_deg === null ? {} : { heading_deg: fix.heading_deg, heading_at: at };
  void control.engine.call("own", { source: fix.reckoned ? "dr" : source, fix: own, ...heading }).catch(() => {});
}

// --- every second ---

function tick(): void {
  m.nowMs.value = Date.now();
  void steer();
  if (m.link.value.connected && Date.now() - askedMs > 30_000) askTime();
}

/** The server's frame while its word is fresh, else this phone's own. */
async function steer(): Promise<void> {
  const selection = select(m.incidents.value, m.chosen.value);
  if (!selection || control.engine.state !== "ready") {
    if (!selection) m.ownFrame.value = null;
    return;
  }
  const person = selection.person?.no;
  const frame = await control.engine
    .call("steer", { now: iso(commonNow()), incident: selection.state.id, ...(person !== undefined && { person }) })
    .catch(() => null);
  m.ownFrame.value = frame ? { frame, gotMs: Date.now() } : null;
}

/** Keeps what the MARK button needs in step with the model. */
function follow(): void {
  if (!m.loaded.value) return;
  const open = live(m.incidents.value);
  const current = select(m.incidents.value, m.chosen.value)?.state ?? open[0];
  control.mark.context = {
    incident: current?.id ?? null,
    by: m.myName.value,
    drill: current ? !!current.drill : m.drill.value,
    heading_deg: m.vesselFix.value?.heading_deg ?? null,
  };
  m.store("wakeback.open", current ? JSON.stringify({ incident: current.id, drill: !!current.drill }) : "");
}

/** What the link says now. */
export function linkNow() {
  return linkView(m.link.value, m.nowMs.value, m.openedMs, common);
}

const iso = (ms: number): string => new Date(ms).toISOString();
