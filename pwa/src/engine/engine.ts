// The engine's typed face. The same Go code that the server runs, in a worker
// of this page: what a phone shows alone is what the server would have shown.

import type { LogEvent, Position, PositionSource } from "../wire/event";
import type { Frame, State } from "../wire/frame";
import type { SearchMethods } from "./search_calls";

/** An error that the engine answered, naming the field at fault. */
export class EngineError extends Error {
  constructor(readonly code: string, readonly field: string, message: string) {
    super(message);
  }
}

export interface OwnFix {
  at: string;
  position: Position;
  sog_kn?: number | null;
  cog_deg?: number | null;
  error_m?: number | null;
}

export interface Own {
  source: "vessel" | "dr" | "phone";
  fix?: OwnFix;
  heading_deg?: number;
  heading_at?: string;
  stw_kn?: number;
}

export interface Back {
  fell_at: string;
  position?: Position | null;
  source: PositionSource;
  error_m?: number | null;
}

interface Methods extends SearchMethods {
  add_events: { args: { events: LogEvent[] }; answer: unknown };
  states: { args: Record<string, never>; answer: { incidents: State[] } };
  clear: { args: Record<string, never>; answer: unknown };
  own: { args: Own; answer: unknown };
  steer: { args: { now: string; incident?: string; person?: number }; answer: Frame | null };
  back: { args: { mark: string; back_s: number } | { mark: string; fell_at: string }; answer: Back };
  parse_position: { args: { text: string }; answer: Position };
  format_position: { args: { position: Position }; answer: { text: string; spoken: string } };
}

export type EngineState = "loading" | "ready" | "failed";

interface Waiting {
  resolve: (value: never) => void;
  reject: (err: Error) => void;
}

/** After a failure the engine is started again, after this pause: our choice. */
const RESTART_MS = 5_000;

export class Engine {
  state: EngineState = "loading";
  why = "";
  /** Called when the engine is ready, also after a restart: it then knows nothing. */
  onReady: () => void = () => {};
  onState: () => void = () => {};
  private worker: Worker | null = null;
  private readonly waiting = new Map<number, Waiting>();
  private next = 1;

  constructor(
    private readonly make: () => Worker = () =>
      new Worker(new URL("./worker.ts", import.meta.url), { type: "module", name: "engine" }),
  ) {}

  /** Starts the worker. */
  start(): void {
    this.set("loading", "");
    try {
      this.worker = this.make();
    } catch (err) {
      this.died(String(err));
      return;
    }
    this.worker.onmessage = (e) => this.took(e.data);
    this.worker.onerror = (e) => {
      e.preventDefault();
      this.died(e.message || "the worker could not be loaded");
    };
  }

  /** Asks the engine; rejects with an {@link EngineError} where it answers one. */
  call<N extends keyof Methods>(name: N, args: Methods[N]["args"]): Promise<Methods[N]["answer"]> {
    const worker = this.worker;
    if (!worker || this.state !== "ready") {
      return Promise.reject(new EngineError("not_ready", "", "the engine is not loaded"));
    }
    const id = this.next++;
    return new Promise((resolve, reject) => {
      this.waiting.set(id, { resolve: resolve as (v: never) => void, reject });
      worker.postMessage({ id, name, json: JSON.stringify(args) });
    });
  }

  private took(m: { ready?: true; id?: number; json?: string; died?: string }): void {
    if (m.died !== undefined) {
      this.died(m.died);
      return;
    }
    if (m.ready) {
      this.set("ready", "");
      this.onReady();
      return;
    }
    const waiting = this.waiting.get(m.id as number);
    this.waiting.delete(m.id as number);
    const answer = JSON.parse(m.json as string) as {
      ok?: never;
      error?: { code: string; field?: string; message: string };
    };
    if (answer.error) {
      waiting?.reject(new EngineError(answer.error.code, answer.error.field ?? "", answer.error.message));
    } else {
      waiting?.resolve((answer.ok ?? null) as never);
    }
  }

  private died(why: string): void {
    this.worker?.terminate();
    this.worker = null;
    for (const w of this.waiting.values()) w.reject(new EngineError("died", "", why));
    this.waiting.clear();
    this.set("failed", why);
    setTimeout(() => this.start(), RESTART_MS);
  }

  private set(state: EngineState, why: string): void {
    this.state = state;
    this.why = why;
    this.onState();
  }
}
