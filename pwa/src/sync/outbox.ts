// The phone's journal that drains: every event is written here, with strict
// durability, before anything else happens to it, and leaves the outbox only
// when the server has acknowledged it after its own fsync.
//
// Stores: chain (the end of this device's chain), outbox (not yet
// acknowledged), known (every event of every device that this phone has seen),
// meta (what the stream resumes from), track (own fixes, to find the place of
// a mark that was pressed late).
//
// A second, tiny copy of the newest marks lies in localStorage: the hint for
// durability may be ignored, and a mark must not hang on one store.

import { type DBSchema, type IDBPDatabase, openDB } from "idb";
import type { Draft, LogEvent } from "../wire/event";
import { type Chain, seal } from "./event";

interface Schema extends DBSchema {
  chain: { key: string; value: Chain };
  outbox: { key: string; value: LogEvent };
  known: { key: string; value: LogEvent };
  refused: { key: string; value: { id: string; reason: string } };
  meta: { key: string; value: unknown };
  track: { key: number; value: TrackPoint };
}

/** One of this phone's own fixes. */
export interface TrackPoint {
  ms: number;
  lat: number;
  lon: number;
  error_m?: number;
  sog_kn?: number;
  cog_deg?: number;
}

const TRIP = "wakeback.tripwire";
const DEVICE = "wakeback.device";
/** Room of the tripwire, in characters: small enough to be written at once, at the press. */
const TRIP_ROOM = 1000;

export class Outbox {
  /** Called after the outbox changed: an event was added, acknowledged or refused. */
  onChange: () => void = () => {};
  private readonly db: Promise<IDBPDatabase<Schema>>;
  /** Set when the database cannot be used: events then live in memory only. */
  private memory: { chain: Chain; outbox: LogEvent[]; known: LogEvent[] } | null = null;
  private reason = "";

  constructor(name = "wakeback") {
    this.db = open(name);
    this.db.catch((err: unknown) => this.fallBack(err));
  }

  /** Why events are kept in memory only, or "" when they are on disk. */
  get unsafe(): string {
    return this.reason;
  }

  /** This device's id, the same from the first call on. */
  async device(): Promise<string> {
    if (this.memory) return this.memory.chain.device;
    try {
      const tx = (await this.db).transaction("chain", "readwrite");
      const chain = (await tx.store.get("self")) ?? freshChain();
      await Promise.all([tx.store.put(chain, "self"), tx.done]);
      return chain.device;
    } catch (err) {
      return this.fallBack(err).chain.device;
    }
  }

  /** Copies a mark into the tripwire, at once and without waiting. */
  trip(draft: Draft): void {
    const held = readTrip().filter((d) => d.id !== draft.id);
    const marks = [...held, draft];
    while (marks.length > 1 && JSON.stringify(marks).length > TRIP_ROOM) marks.shift();
    writeTrip(marks);
  }

  /**
   * Seals an event and writes it with strict durability, in one transaction
   * with the end of the chain. The same id again changes nothing.
   */
  async add(draft: Draft): Promise<LogEvent> {
    try {
      const event = await this.addToDisk(draft);
      this.onChange();
      return event;
    } catch (err) {
      const event = this.addToMemory(draft, err);
      this.onChange();
      return event;
    }
  }

  private async addToDisk(draft: Draft): Promise<LogEvent> {
    if (this.memory) throw new Error(this.reason);
    const tx = (await this.db).transaction(["chain", "outbox", "known"], "readwrite", { durability: "strict" });
    const had = await tx.objectStore("known").get(draft.id);
    if (had) return had;
    const chain = (await tx.objectStore("chain").get("self")) ?? freshChain();
    const sealed = seal(draft, chain);
    await Promise.all([
      tx.objectStore("outbox").put(sealed.event),
      tx.objectStore("known").put(sealed.event),
      tx.objectStore("chain").put(sealed.chain, "self"),
      tx.done,
    ]);
    return sealed.event;
  }

  private addToMemory(draft: Draft, err: unknown): LogEvent {
    const memory = this.fallBack(err);
    const had = memory.known.find((e) => e.id === draft.id);
    if (had) return had;
    const sealed = seal(draft, memory.chain);
    memory.chain = sealed.chain;
    memory.outbox.push(sealed.event);
    memory.known.push(sealed.event);
    return sealed.event;
  }

  /** From now on in memory, as a new device: its own chain may be unreadable. */
  private fallBack(err: unknown): NonNullable<Outbox["memory"]> {
    this.reason = err instanceof Error ? err.message : String(err);
    this.memory ??= {
      chain: { device: crypto.randomUUID(), next_seq: 1, last_hash: "" },
      outbox: [],
      known: [],
    };
    return this.memory;
  }

  /** Events not yet acknowledged nor refused, in the order of this device. */
  async pending(): Promise<LogEvent[]> {
    const held = await this.onDisk(async (db) => {
      const refused = new Set(await db.getAllKeys("refused"));
      return (await db.getAll("outbox")).filter((e) => !refused.has(e.id));
    }, []);
    return [...held, ...(this.memory?.outbox ?? [])].sort((a, b) => a.device_seq - b.device_seq);
  }

  /** How many events are only on this phone, and how many of them were refused. */
  async count(): Promise<{ only_here: number; refused: number }> {
    const held = await this.onDisk(
      async (db) => ({ only_here: await db.count("outbox"), refused: await db.count("refused") }),
      { only_here: 0, refused: 0 },
    );
    return { ...held, only_here: held.only_here + (this.memory?.outbox.length ?? 0) };
  }

  /** The server holds these: they leave the outbox and the tripwire. */
  async acknowledged(ids: string[]): Promise<void> {
    await this.onDisk(async (db) => {
      const tx = db.transaction(["outbox", "refused"], "readwrite");
      for (const id of ids) {
        tx.objectStore("outbox").delete(id);
        tx.objectStore("refused").delete(id);
      }
      await tx.done;
    }, undefined);
    if (this.memory) this.memory.outbox = this.memory.outbox.filter((e) => !ids.includes(e.id));
    writeTrip(readTrip().filter((d) => !ids.includes(d.id)));
    this.onChange();
  }

  /** Another store is on the server: everything this device ever wrote has to go there again. */
  async sendAllAgain(): Promise<void> {
    const device = await this.device();
    await this.onDisk(async (db) => {
      const tx = db.transaction(["known", "outbox", "refused"], "readwrite");
      for (const e of await tx.objectStore("known").getAll()) {
        if (e.device === device) tx.objectStore("outbox").put(e);
      }
      tx.objectStore("refused").clear();
      await tx.done;
    }, undefined);
    this.onChange();
  }

  /** The server will not take this one: it stays here, and is shown with the reason. */
  async refuse(id: string, reason: string): Promise<void> {
    await this.onDisk((db) => db.put("refused", { id, reason }), "");
    this.onChange();
  }

  /** Gives refused events another chance: a role or a version may have changed since. */
  async forgetRefusals(): Promise<void> {
    await this.onDisk((db) => db.clear("refused"), undefined);
  }

  /** Why events were refused. */
  async refusals(): Promise<{ id: string; reason: string }[]> {
    return this.onDisk((db) => db.getAll("refused"), []);
  }

  /** Keeps events that came from the server; returns those that were new here. */
  async keep(events: LogEvent[]): Promise<LogEvent[]> {
    if (events.length === 0) return [];
    return this.onDisk(async (db) => {
      const tx = db.transaction(["known"], "readwrite");
      const fresh: LogEvent[] = [];
      const store = tx.objectStore("known");
      for (const e of events) {
        const had = await store.get(e.id);
        if (!had) fresh.push(e);
        if (!had || (e.seq && !had.seq)) store.put(e);
      }
      await tx.done;
      return fresh;
    }, events);
  }

  /** Every event this phone knows. */
  async all(): Promise<LogEvent[]> {
    const held = await this.onDisk((db) => db.getAll("known"), []);
    return [...held, ...(this.memory?.known ?? [])];
  }

  /**
   * Finds marks that are in the tripwire but not in the database (it lost
   * them), and adds them again under the same id.
   */
  async mend(): Promise<LogEvent[]> {
    const known = new Set((await this.all()).map((e) => e.id));
    const mended: LogEvent[] = [];
    for (const draft of readTrip()) if (!known.has(draft.id)) mended.push(await this.add(draft));
    return mended;
  }

  /** A small value kept between starts. */
  async meta<T>(key: string): Promise<T | undefined> {
    return this.onDisk(async (db) => (await db.get("meta", key)) as T | undefined, undefined);
  }

  /** Keeps a small value between starts. */
  async setMeta(key: string, value: unknown): Promise<void> {
    await this.onDisk((db) => db.put("meta", value, key), "");
  }

  /** Keeps one of this phone's own fixes, and drops those older than keepMs. */
  async track(point: TrackPoint, keepMs: number): Promise<void> {
    await this.onDisk(async (db) => {
      const tx = db.transaction("track", "readwrite", { durability: "relaxed" });
      tx.store.put(point);
      tx.store.delete(IDBKeyRange.upperBound(point.ms - keepMs));
      await tx.done;
    }, undefined);
  }

  /** This phone's own fixes, oldest first. */
  async tracked(): Promise<TrackPoint[]> {
    return this.onDisk((db) => db.getAll("track"), []);
  }

  private async onDisk<T>(job: (db: IDBPDatabase<Schema>) => Promise<T>, otherwise: T): Promise<T> {
    try {
      return await job(await this.db);
    } catch (err) {
      this.reason ||= err instanceof Error ? err.message : String(err);
      return otherwise;
    }
  }
}

/** Async, so that a browser that throws at once is the same as one that fails later. */
async function open(name: string): Promise<IDBPDatabase<Schema>> {
  return openDB<Schema>(name, 1, {
    upgrade(db) {
      db.createObjectStore("chain");
      db.createObjectStore("outbox", { keyPath: "id" });
      db.createObjectStore("known", { keyPath: "id" });
      db.createObjectStore("refused", { keyPath: "id" });
      db.createObjectStore("meta");
      db.createObjectStore("track", { keyPath: "ms" });
    },
    // A newer page of ours must not wait for this one.
    blocking: (_now, _next, event) => (event.target as IDBDatabase).close(),
  });
}

function freshChain(): Chain {
  return { device: deviceId(), next_seq: 1, last_hash: "" };
}

/**
 * A new chain is a new device: if the database was lost, numbering on under
 * the old name would make two different events with one number.
 */
function deviceId(): string {
  const id = crypto.randomUUID();
  try {
    localStorage.setItem(DEVICE, id);
  } catch {
    // Only a convenience for the set-up page.
  }
  return id;
}

function readTrip(): Draft[] {
  try {
    const held = JSON.parse(localStorage.getItem(TRIP) ?? "[]") as unknown;
    return Array.isArray(held) ? (held as Draft[]).filter((d) => typeof d?.id === "string") : [];
  } catch {
    return [];
  }
}

function writeTrip(drafts: Draft[]): void {
  try {
    if (drafts.length === 0) localStorage.removeItem(TRIP);
    else localStorage.setItem(TRIP, JSON.stringify(drafts));
  } catch {
    // The tripwire is the second copy; the first is in the database.
  }
}
