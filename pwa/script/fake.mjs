// A stand-in for the server, for the stories in which the server has to
// misbehave on order: refuse, fall silent, be another store. It keeps events
// in memory, acknowledges them, and streams what it is told to.

import { readFileSync } from "node:fs";
import { createServer } from "node:http";
import { extname, join } from "node:path";
import { WebSocketServer } from "ws";

export const CSP =
  "default-src 'none'; script-src 'self' 'wasm-unsafe-eval'; style-src 'self'; connect-src 'self'; " +
  "worker-src 'self'; img-src 'self' data: blob:; manifest-src 'self'; media-src 'self'";

const TYPES = {
  ".html": "text/html; charset=utf-8",
  ".js": "text/javascript; charset=utf-8",
  ".css": "text/css; charset=utf-8",
  ".svg": "image/svg+xml",
  ".png": "image/png",
  ".wasm": "application/wasm",
  ".webmanifest": "application/manifest+json",
};

const dist = new URL("../dist", import.meta.url).pathname;

export class Fake {
  /** Events in the order in which they were acknowledged. */
  events = [];
  /** Status to answer event batches with; 200 is the usual. */
  answerWith = 200;
  /** Milliseconds by which the server's clock is ahead of this machine's. */
  clockAheadMs = 0;
  /** Ticks are sent while true. */
  ticking = true;
  epoch = "fake-1";
  /** Changes a file of the page on its way out. */
  change = (_path, data) => data;
  /** Last fix to send to who connects. */
  fix = null;
  #http;
  #ws;
  #timer;

  async start(port = 0) {
    this.#http = createServer((req, res) => this.#serve(req, res));
    this.#ws = new WebSocketServer({ server: this.#http, path: "/api/v1/stream" });
    this.#ws.on("connection", (socket, req) => this.#joined(socket, req));
    await new Promise((done) => this.#http.listen(port, "127.0.0.1", done));
    this.port = this.#http.address().port;
    this.#timer = setInterval(() => {
      if (this.ticking) this.send({ t: "tick", at: this.#now(), seq: this.events.length, clients: this.clients });
    }, 1000);
    return `http://localhost:${this.port}/`;
  }

  async stop() {
    clearInterval(this.#timer);
    for (const s of this.#ws.clients) s.terminate();
    this.#http.closeAllConnections();
    await new Promise((done) => this.#http.close(done));
  }

  /** How many phones are connected. */
  get clients() {
    return this.#ws.clients.size;
  }

  send(message) {
    for (const s of this.#ws.clients) s.send(JSON.stringify(message));
  }

  /** Stores an event as if another phone had sent it. */
  store(event) {
    const had = this.events.find((e) => e.id === event.id);
    if (had) return had;
    const kept = { ...event, seq: this.events.length + 1, received_at: this.#now() };
    this.events.push(kept);
    this.send({ t: "event", event: kept });
    return kept;
  }

  #ms() {
    return Date.now() + this.clockAheadMs;
  }

  #now() {
    return new Date(this.#ms()).toISOString();
  }

  #joined(socket, req) {
    const after = Number(new URL(req.url, "http://x").searchParams.get("after") ?? 0);
    const say = (m) => socket.send(JSON.stringify(m));
    const reset = req.url.includes("epoch=") && !req.url.includes(`epoch=${this.epoch}`);
    const from = reset ? 0 : after;
    say({ t: "hello", protocol: 1, epoch: this.epoch, last_seq: this.events.length, server_time: this.#now(), after: from, reset });
    for (const e of this.events.filter((e) => e.seq > from)) say({ t: "event", event: e });
    if (this.fix) say(this.fix);
    socket.on("message", (data) => {
      const m = JSON.parse(String(data));
      if (m.t === "time") say({ t: "time", client_ms: m.client_ms, received_ms: this.#ms(), server_ms: this.#ms() });
    });
  }

  #serve(req, res) {
    const path = new URL(req.url, "http://x").pathname;
    res.setHeader("content-security-policy", CSP);
    const post = /^\/api\/v1\/incidents\/[^/]+\/events$/.test(path) && req.method === "POST";
    if (post) return this.#take(req, res);
    if (path.startsWith("/api/")) return void res.writeHead(404).end();
    this.#file(path === "/" ? "/index.html" : path, res);
  }

  #take(req, res) {
    let body = "";
    req.on("data", (d) => {
      body += d;
    });
    req.on("end", () => {
      const json = { "content-type": "application/json" };
      if (this.answerWith !== 200) {
        res.writeHead(this.answerWith, json).end(JSON.stringify({ title: "no", detail: "told to refuse" }));
        return;
      }
      const kept = JSON.parse(body).events.map((e) => this.store(e));
      res.writeHead(200, json).end(JSON.stringify({ events: kept }));
    });
  }

  #file(path, res) {
    try {
      const data = this.change(path, readFileSync(join(dist, path)));
      res.writeHead(200, { "content-type": TYPES[extname(path)] ?? "application/octet-stream" }).end(data);
    } catch {
      res.writeHead(404).end();
    }
  }
}
