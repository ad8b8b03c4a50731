// The stream from the server: one websocket that is never trusted to be alive
// because it says it is open. The server ticks every second; a page that has
// heard nothing for 3 s says so, and one that has heard nothing for 8 s drops
// the socket and connects again.

import type { Message } from "../wire/frame";

/** Without a word for so long, what is shown may be old. */
export const QUIET_S = 3;
/** Without a word for so long, the server counts as gone. */
export const GONE_S = 8;

const CONNECT_MS = 5_000;
const RETRY_MIN_MS = 500;
const RETRY_MAX_MS = 8_000;
/** A gap between two looks at the clock that no timer of a running page makes: it was asleep. */
const SLEPT_MS = 5_000;

export interface StreamOptions {
  url: () => string;
  onMessage: (message: Message) => void;
  /** Connected, or not any more. */
  onState: (connected: boolean) => void;
  /** Makes a socket; a test gives its own. */
  socket?: (url: string) => WebSocket;
}

export class Stream {
  /** Date.now() of the last word from the server, or null. */
  heardMs: number | null = null;
  private socket: WebSocket | null = null;
  private timer: ReturnType<typeof setTimeout> | null = null;
  private tries = 0;
  private lookedMs = Date.now();
  private openedMs = 0;

  constructor(private readonly options: StreamOptions) {}

  /** Connects, and stays connected from now on. */
  start(): void {
    const wake = () => {
      if (document.visibilityState === "visible") this.revive();
    };
    document.addEventListener("visibilitychange", wake);
    addEventListener("pageshow", wake);
    addEventListener("online", wake);
    setInterval(() => this.watch(), 1000);
    this.connect();
  }

  /** Sends a message if the socket is open; says whether it was. */
  send(message: unknown): boolean {
    if (this.socket?.readyState !== WebSocket.OPEN) return false;
    this.socket.send(JSON.stringify(message));
    return true;
  }

  /** Drops the socket and connects at once: what it says of itself is not believed. */
  revive(): void {
    if (this.heardMs !== null && Date.now() - this.heardMs < QUIET_S * 1000 && this.socket) return;
    this.tries = 0;
    this.connect();
  }

  private connect(): void {
    if (this.timer) clearTimeout(this.timer);
    this.timer = null;
    this.drop();
    let socket: WebSocket;
    try {
      const make = this.options.socket ?? ((url: string) => new WebSocket(url));
      socket = make(this.options.url());
    } catch {
      this.later();
      return;
    }
    this.socket = socket;
    this.openedMs = Date.now();
    socket.onmessage = (e) => this.took(socket, e.data);
    socket.onclose = () => this.lost(socket);
    socket.onerror = () => this.lost(socket);
  }

  private took(socket: WebSocket, data: unknown): void {
    if (socket !== this.socket || typeof data !== "string") return;
    let message: Message;
    try {
      message = JSON.parse(data) as Message;
    } catch {
      return;
    }
    const first = this.heardMs === null;
    this.heardMs = Date.now();
    this.tries = 0;
    if (first) this.options.onState(true);
    this.options.onMessage(message);
  }

  private lost(socket: WebSocket): void {
    if (socket !== this.socket) return;
    this.drop();
    this.later();
  }

  private drop(): void {
    const socket = this.socket;
    this.socket = null;
    if (socket) {
      socket.onmessage = socket.onclose = socket.onerror = null;
      socket.close();
    }
    if (this.heardMs !== null) {
      this.heardMs = null;
      this.options.onState(false);
    }
  }

  private later(): void {
    const wait = Math.min(RETRY_MAX_MS, RETRY_MIN_MS * 2 ** this.tries++);
    this.timer = setTimeout(() => this.connect(), wait * (0.5 + Math.random() / 2));
  }

  private watch(): void {
    const now = Date.now();
    const slept = now - this.lookedMs > SLEPT_MS;
    this.lookedMs = now;
    if (slept) {
      this.connect();
      return;
    }
    if (!this.socket) return;
    const silent = this.heardMs !== null && now - this.heardMs > GONE_S * 1000;
    const neverCame = this.heardMs === null && now - this.openedMs > CONNECT_MS;
    if (silent || neverCame) {
      this.drop();
      this.later();
    }
  }
}
