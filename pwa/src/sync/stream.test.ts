import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import { linkView } from "../state/link_view";
import { Stream } from "./stream";

/** A socket that says and hears what the test wants, and lies about being open. */
class Socket {
  static made: Socket[] = [];
  static OPEN = 1;
  readyState = 1;
  closed = false;
  onmessage: ((e: { data: string }) => void) | null = null;
  onclose: (() => void) | null = null;
  onerror: (() => void) | null = null;
  constructor(readonly url: string) {
    Socket.made.push(this);
  }
  close() {
    this.closed = true;
  }
  send() {}
  says(m: unknown) {
    this.onmessage?.({ data: JSON.stringify(m) });
  }
}

const page = { state: "visible", wake: new Map<string, () => void>() };

beforeEach(() => {
  vi.useFakeTimers();
  Socket.made = [];
  vi.stubGlobal("WebSocket", Socket);
  vi.stubGlobal("addEventListener", (t: string, f: () => void) => page.wake.set(t, f));
  vi.stubGlobal("document", {
    get visibilityState() {
      return page.state;
    },
    addEventListener: (t: string, f: () => void) => page.wake.set(t, f),
  });
});
afterEach(() => {
  vi.useRealTimers();
  vi.unstubAllGlobals();
});

function open() {
  const states: boolean[] = [];
  const heard: unknown[] = [];
  const stream = new Stream({
    url: () => `ws://x/${Socket.made.length}`,
    onMessage: (m) => heard.push(m),
    onState: (s) => states.push(s),
    socket: (url) => new Socket(url) as unknown as WebSocket,
  });
  stream.start();
  return { stream, states, heard, socket: () => Socket.made.at(-1) as Socket };
}

const tick = { t: "tick" };

describe("Stream", () => {
  test("a silent socket is dropped after 8 s and another is opened, whatever it says of itself", async () => {
    const s = open();
    s.socket().says(tick);
    expect(s.states).toEqual([true]);
    await vi.advanceTimersByTimeAsync(8_000);
    expect(Socket.made).toHaveLength(1);
    await vi.advanceTimersByTimeAsync(2_500);
    expect(Socket.made[0]?.closed).toBe(true);
    expect(s.states).toEqual([true, false]);
    expect(Socket.made.length).toBeGreaterThan(1);
  });

  test("ticks keep it", async () => {
    const s = open();
    for (let i = 0; i < 60; i++) {
      s.socket().says(tick);
      await vi.advanceTimersByTimeAsync(1000);
    }
    expect(Socket.made).toHaveLength(1);
    expect(s.states).toEqual([true]);
  });

  test("a socket stuck in connecting is given up after 5 s", async () => {
    open();
    await vi.advanceTimersByTimeAsync(7_000);
    expect(Socket.made.length).toBeGreaterThan(1);
  });

  test("waits longer between tries, with chance in it, and never longer than 8 s", async () => {
    const s = open();
    const at: number[] = [];
    for (let i = 0; i < 12; i++) {
      const before = Socket.made.length;
      s.socket().onclose?.();
      while (Socket.made.length === before) await vi.advanceTimersByTimeAsync(10);
      at.push(Date.now());
    }
    const waits = at.slice(1).map((t, i) => t - (at[i] as number));
    expect(Math.max(...waits)).toBeLessThanOrEqual(8_010);
    expect(waits.at(-1)).toBeGreaterThanOrEqual(4_000);
    expect(waits[0]).toBeLessThanOrEqual(1_010);
  });

  test("after sleep the socket is replaced at once", async () => {
    const s = open();
    s.socket().says(tick);
    vi.setSystemTime(Date.now() + 60_000); // the clock went on, the timers did not
    await vi.advanceTimersByTimeAsync(1_000);
    expect(Socket.made.length).toBe(2);
  });

  test("words of a socket that was given up are not heard", async () => {
    const s = open();
    const old = s.socket();
    const listener = old.onmessage;
    old.onclose?.();
    await vi.advanceTimersByTimeAsync(1_000);
    listener?.({ data: JSON.stringify(tick) });
    expect(s.heard).toEqual([]);
  });

  test("what is no JSON is passed over", () => {
    const s = open();
    s.socket().onmessage?.({ data: "{" });
    s.socket().says(tick);
    expect(s.heard).toEqual([tick]);
  });
});

describe("linkView", () => {
  const link = { connected: true, heardMs: 0, unpaired: false, phones: 1, warning: "" };
  const at = (s: number, over = {}) => linkView({ ...link, ...over }, s * 1000, 0, (ms) => ms);
  test.each([[0, "ok"], [3, "ok"], [3.1, "warn"], [8, "warn"], [8.1, "bad"]])("%s s after the last word it is %s", (s, level) =>
    expect(at(s).level).toBe(level));
  test("grey says how old, red says since when", () => {
    expect(at(5).text).toBe("server silent 5 s");
    expect(at(4000, { connected: false }).text).toBe("alone since 00:00");
  });
});
