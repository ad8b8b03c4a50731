import "fake-indexeddb/auto";
import { IDBFactory } from "fake-indexeddb";
import { beforeEach, describe, expect, test, vi } from "vitest";
import type { Draft } from "../wire/event";
import { hashOf, uuidv7 } from "./event";
import { Outbox } from "./outbox";
import { runs, Sender } from "./sender";

class Storage {
  items = new Map<string, string>();
  getItem = (k: string) => this.items.get(k) ?? null;
  setItem = (k: string, v: string) => void this.items.set(k, v);
  removeItem = (k: string) => void this.items.delete(k);
}

beforeEach(() => {
  vi.stubGlobal("indexedDB", new IDBFactory());
  vi.stubGlobal("localStorage", new Storage());
});

let made = 0;
function draft(over: Partial<Draft> = {}): Draft {
  const ms = 1_780_000_000_000 + made++;
  const at = new Date(ms).toISOString();
  return {
    id: uuidv7(ms), incident: "018f3c2e-7b1a-7c3d-9e4f-000000000001", kind: "marked", at, device_at: at,
    body: { source: "nothing" }, ...over,
  };
}

describe("Outbox", () => {
  test("numbers events without a gap and links them, whatever comes in together", async () => {
    const box = new Outbox();
    const events = await Promise.all(Array.from({ length: 20 }, () => box.add(draft())));
    const sorted = [...events].sort((a, b) => a.device_seq - b.device_seq);
    expect(sorted.map((e) => e.device_seq)).toEqual(Array.from({ length: 20 }, (_, i) => i + 1));
    sorted.forEach((e, i) => {
      const { hash, ...rest } = e;
      expect(hashOf(rest)).toBe(hash);
      expect(e.prev_hash).toBe(i === 0 ? "" : sorted[i - 1]?.hash);
    });
  });

  test("two pages of one phone share one chain", async () => {
    const [a, b] = [new Outbox(), new Outbox()];
    const events = await Promise.all([a.add(draft()), b.add(draft()), a.add(draft()), b.add(draft())]);
    expect(new Set(events.map((e) => e.device)).size).toBe(1);
    expect(events.map((e) => e.device_seq).sort()).toEqual([1, 2, 3, 4]);
  });

  test("the same id again changes nothing", async () => {
    const box = new Outbox();
    const d = draft();
    const first = await box.add(d);
    expect(await box.add({ ...d, body: { source: "typed" } })).toEqual(first);
    expect((await box.count()).only_here).toBe(1);
  });

  test("asks for strict durability when it writes an event", async () => {
    const durabilities: (string | undefined)[] = [];
    const original = IDBDatabase.prototype.transaction;
    const spy = vi.spyOn(IDBDatabase.prototype, "transaction").mockImplementation(function (this: IDBDatabase, ...args) {
      if (args[1] === "readwrite" && [args[0]].flat().includes("outbox")) durabilities.push(args[2]?.durability);
      return original.apply(this, args as Parameters<typeof original>);
    });
    await new Outbox().add(draft());
    spy.mockRestore();
    expect(durabilities).toEqual(["strict"]);
  });

  test("an event leaves the outbox only when it is acknowledged, and stays known", async () => {
    const box = new Outbox();
    const e = await box.add(draft());
    await box.acknowledged(["another"]);
    expect((await box.pending()).map((x) => x.id)).toEqual([e.id]);
    await box.acknowledged([e.id]);
    expect(await box.pending()).toEqual([]);
    expect((await box.all()).map((x) => x.id)).toEqual([e.id]);
  });

  test("the tripwire brings back a mark that the database lost, under the same id", async () => {
    const d = draft();
    const box = new Outbox();
    box.trip(d);
    await box.add(d);
    vi.stubGlobal("indexedDB", new IDBFactory()); // the database is gone
    const after = new Outbox();
    const mended = await after.mend();
    expect(mended.map((e) => e.id)).toEqual([d.id]);
    expect(await after.mend()).toEqual([]);
    await after.acknowledged([d.id]);
    expect(localStorage.getItem("wakeback.tripwire")).toBeNull();
  });

  test("the tripwire stays under 1 kB", () => {
    const box = new Outbox();
    const body = { position: { lat: -54.1234567, lon: -107.9876543 }, source: "vessel", error_m: 12.5, fix_age_s: 95.123, sog_kn: 16.25, cog_deg: 359.9, heading_deg: 123.4, person: 2 };
    for (let i = 0; i < 9; i++) box.trip(draft({ body, clock_error_ms: 1500 }));
    expect((localStorage.getItem("wakeback.tripwire") ?? "").length).toBeLessThan(1024);
  });

  test("without a database it still takes marks, says so, and can send them", async () => {
    vi.stubGlobal("indexedDB", { open: () => { throw new Error("storage is off"); } });
    const box = new Outbox();
    const [a, b] = [await box.add(draft()), await box.add(draft())];
    expect(box.unsafe).toContain("storage is off");
    expect([a.device_seq, b.device_seq]).toEqual([1, 2]);
    expect(await box.pending()).toHaveLength(2);
    await box.acknowledged([a.id, b.id]);
    expect(await box.pending()).toHaveLength(0);
  });

  test("keeps the server's events once and tells which were new", async () => {
    const box = new Outbox();
    const mine = await box.add(draft());
    const theirs = { ...mine, id: uuidv7(1), device: "other", seq: 4 };
    expect(await box.keep([{ ...mine, seq: 3 }, theirs])).toEqual([theirs]);
    expect(await box.keep([theirs])).toEqual([]);
    expect((await box.all()).find((e) => e.id === mine.id)?.seq).toBe(3);
  });
});

describe("Sender", () => {
  const ok = () => new Response("{}", { status: 200 });

  test("sends in the device's order, one incident at a time", async () => {
    const box = new Outbox();
    for (const incident of ["a", "a", "b", "a"]) await box.add(draft({ incident }));
    const sent: [string, number][] = [];
    const sender = new Sender(box, async (url, init) => {
      sent.push([url, JSON.parse(String(init.body)).events.length]);
      return ok();
    });
    expect(await sender.send()).toBe("done");
    expect(sent.map(([url, n]) => `${url.split("/")[4]}:${n}`)).toEqual(["a:2", "b:1", "a:1"]);
    expect(await box.pending()).toEqual([]);
  });

  test.each([
    ["unreachable", async () => { throw new TypeError("no route"); }],
    ["server_error", async () => new Response("", { status: 503 })],
    ["unpaired", async () => new Response("", { status: 401 })],
  ])("keeps everything when the answer is %s", async (result, fetcher) => {
    const box = new Outbox();
    await box.add(draft());
    expect(await new Sender(box, fetcher).send()).toBe(result);
    expect((await box.count()).only_here).toBe(1);
  });

  test("one refused event holds up no other, stays on the phone, and says why", async () => {
    const box = new Outbox();
    const [good, bad, last] = [await box.add(draft()), await box.add(draft()), await box.add(draft())];
    const taken: string[] = [];
    const sender = new Sender(box, async (_url, init) => {
      const ids = (JSON.parse(String(init.body)).events as { id: string }[]).map((e) => e.id);
      if (ids.includes(bad.id)) {
        return new Response('{"title":"Bad","detail":"body.text: expected a text"}', { status: 422 });
      }
      taken.push(...ids);
      return ok();
    });
    await sender.send();
    expect(taken).toEqual([good.id, last.id]);
    expect(await box.refusals()).toEqual([{ id: bad.id, reason: "body.text: expected a text" }]);
    expect(await box.count()).toEqual({ only_here: 1, refused: 1 });
  });

  test("a call while a round runs makes one more round", async () => {
    const box = new Outbox();
    await box.add(draft());
    let rounds = 0;
    const sender = new Sender(box, async () => {
      rounds++;
      if (rounds === 1) {
        await box.add(draft());
        void sender.send();
      }
      return ok();
    });
    await sender.send();
    expect(rounds).toBe(2);
    expect(await box.pending()).toEqual([]);
  });

  test("splits long runs", () => {
    const e = { incident: "a" } as never;
    expect(runs(Array.from({ length: 250 }, () => e)).map((r) => r.length)).toEqual([100, 100, 50]);
  });
});
