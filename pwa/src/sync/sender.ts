// Drains the outbox to the server: on opening, when the network or the page
// comes back, when the stream connects, and every 15 s. Sending twice changes
// nothing, so it never waits to be sure.

import type { LogEvent } from "../wire/event";
import type { Outbox } from "./outbox";

/** Pause between tries while something is left: the platform's own retry (background sync) is not everywhere. */
const EVERY_MS = 15_000;
/** A request without an answer counts as lost after this: our choice, several times a bad Wi-Fi round trip. */
const ANSWER_MS = 8_000;
/** Events in one request: our choice, far below any body limit. */
const BATCH = 100;

export type SendResult = "done" | "unreachable" | "unpaired" | "server_error";

type Fetch = (url: string, init: RequestInit) => Promise<Response>;

export class Sender {
  /** Called with the outcome of each round. */
  onResult: (result: SendResult) => void = () => {};
  private running: Promise<SendResult> | null = null;
  private again = false;

  constructor(
    private readonly outbox: Outbox,
    private readonly fetcher: Fetch = (url, init) => fetch(url, init),
  ) {}

  /** Starts the timers and listeners. */
  start(): void {
    const go = () => void this.send();
    addEventListener("online", go);
    addEventListener("pageshow", go);
    document.addEventListener("visibilitychange", () => {
      if (document.visibilityState === "visible") go();
    });
    // A quarter of the pause is chance, so that phones that lost the server together do not return together.
    const later = () => setTimeout(() => { go(); later(); }, EVERY_MS * (0.875 + Math.random() / 4));
    later();
    go();
  }

  /** Sends what there is. Calls while one round runs make one more round. */
  async send(): Promise<SendResult> {
    if (this.running) {
      this.again = true;
      return this.running;
    }
    this.running = this.rounds();
    try {
      const result = await this.running;
      this.onResult(result);
      return result;
    } finally {
      this.running = null;
    }
  }

  private async rounds(): Promise<SendResult> {
    let result: SendResult;
    do {
      this.again = false;
      result = await this.round();
    } while (this.again && result === "done");
    return result;
  }

  private async round(): Promise<SendResult> {
    for (const batch of runs(await this.outbox.pending())) {
      const result = await this.batch(batch);
      if (result !== "done") return result;
    }
    return "done";
  }

  private async batch(events: LogEvent[]): Promise<SendResult> {
    const incident = events[0]?.incident;
    if (!incident) return "done";
    let response: Response;
    try {
      response = await this.fetcher(`/api/v1/incidents/${incident}/events`, {
        method: "POST",
        headers: { "content-type": "application/json" },
        body: JSON.stringify({ events }),
        signal: AbortSignal.timeout(ANSWER_MS),
      });
    } catch {
      return "unreachable";
    }
    if (response.ok) {
      await this.outbox.acknowledged(events.map((e) => e.id));
      return "done";
    }
    if (response.status === 401) return "unpaired";
    if (response.status === 408 || response.status === 429 || response.status >= 500) return "server_error";
    return this.refused(events, response);
  }

  /** All or nothing: a refused batch is sent again one by one, so that one bad event holds up no other. */
  private async refused(events: LogEvent[], response: Response): Promise<SendResult> {
    if (events.length === 1) {
      await this.outbox.refuse((events[0] as LogEvent).id, await reason(response));
      return "done";
    }
    for (const e of events) {
      const result = await this.batch([e]);
      if (result !== "done") return result;
    }
    return "done";
  }
}

/** Splits events into runs of one incident, keeping the device's order. */
export function runs(events: LogEvent[]): LogEvent[][] {
  const out: LogEvent[][] = [];
  for (const e of events) {
    const last = out.at(-1);
    if (last && last[0]?.incident === e.incident && last.length < BATCH) last.push(e);
    else out.push([e]);
  }
  return out;
}

/** The words of an RFC 9457 problem document. */
async function reason(response: Response): Promise<string> {
  try {
    const p = (await response.json()) as { title?: string; detail?: string };
    return p.detail || p.title || `HTTP ${response.status}`;
  } catch {
    return `HTTP ${response.status}`;
  }
}
