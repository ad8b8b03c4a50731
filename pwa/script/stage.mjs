// What a story plays on: a server of its own, and phones.

import assert from "node:assert/strict";
import { HERE, phone as newPhone } from "./browser.mjs";
import { Fake } from "./fake.mjs";

export class Stage {
  phones = [];
  /** Figures that a story measured, for the log. */
  measured = "";

  constructor(browser, name) {
    this.browser = browser;
    this.name = name;
  }

  /** Starts the stand-in server. */
  async server(port, settings = {}) {
    this.fake = Object.assign(new Fake(), settings);
    this.url = await this.fake.start(port);
    return this.fake;
  }

  /** Another phone, with the page open unless told otherwise. */
  async phone(options = {}) {
    const made = await newPhone(this.browser, options);
    const p = new Phone(made, options);
    this.phones.push(p);
    if (options.open !== false) await p.open(options.url ?? this.url);
    return p;
  }

  noErrors() {
    for (const p of this.phones) assert.deepEqual(p.errors, [], "errors in the page");
  }

  /** A picture of every phone, for the one who looks for the fault. */
  async evidence() {
    for (const [i, p] of this.phones.entries()) {
      const file = this.name.replace(/\W+/g, "-");
      await p.page.screenshot({ path: new URL(`../test-results/${file}-${i}.png`, import.meta.url).pathname, timeout: 3000 });
    }
  }

  async close() {
    for (const p of this.phones) await Promise.race([p.context.close(), new Promise((ok) => setTimeout(ok, 3000))]);
    await this.fake?.stop();
  }
}

export class Phone {
  constructor({ context, page, errors }, options) {
    this.context = context;
    this.page = page;
    this.errors = errors;
    this.at = options.geolocation ?? HERE;
  }

  async open(url) {
    await this.page.goto(url, { waitUntil: "commit" });
    await this.ready();
  }

  /** MARK works from here on. */
  ready() {
    return this.page.waitForSelector("html[data-ready=mark]");
  }

  /** The page proper has taken over. */
  whole() {
    return this.page.waitForSelector(".lines, .return");
  }

  /** Touches so soon after a mark are not taken; this is when they are again. */
  settled() {
    return this.page.evaluate(() => new Promise((ok) => setTimeout(ok, 700)));
  }

  /** The engine answers. */
  async engine() {
    await this.page.waitForFunction(() => {
      const line = [...document.querySelectorAll(".line")].find((l) => l.textContent.includes("works without the server"));
      return line || document.querySelector(".return .range");
    });
  }

  /** The page can open with no server. */
  async kept() {
    await this.holdsTrue("the page is kept", async () => {
      const lists = (await caches.keys()).map(async (n) => (await (await caches.open(n)).keys()).map((r) => new URL(r.url).pathname));
      const keys = (await Promise.all(lists)).flat();
      return ["/index.html", "/engine.wasm"].every((f) => keys.includes(f)) && !!navigator.serviceWorker.controller;
    });
  }

  /** A thumb lands on MARK for so long. */
  async mark(selector = ".mark", holdMs = 80) {
    const box = await this.page.locator(selector).boundingBox();
    await this.touch(box.x + box.width / 2, box.y + box.height / 2, holdMs);
  }

  /** A real touch through the browser's input, with a beginning and an end. */
  async touch(x, y, holdMs = 50) {
    const cdp = await this.cdp();
    await cdp.send("Input.dispatchTouchEvent", { type: "touchStart", touchPoints: [{ x, y }] });
    if (holdMs > 0) await new Promise((ok) => setTimeout(ok, holdMs)); // the length of the touch, not a wait for anything
    await cdp.send("Input.dispatchTouchEvent", { type: "touchEnd", touchPoints: [] });
  }

  async cdp() {
    this.session ??= await this.context.newCDPSession(this.page);
    return this.session;
  }

  tap(text, scope = "") {
    return this.page.locator(`${scope} button`, { hasText: text }).first().tap();
  }

  /** Waits until the screen says so. */
  says(text, timeout = 10_000) {
    return this.page.waitForFunction((t) => document.body.innerText.includes(t), text, { timeout });
  }

  saysNot(text, timeout = 10_000) {
    return this.page.waitForFunction((t) => !document.body.innerText.includes(t), text, { timeout });
  }

  returning(timeout = 10_000) {
    return this.page.waitForSelector(".return", { timeout });
  }

  /** Waits until a question that takes time in the page is answered with yes. */
  async holdsTrue(what, question, ms = 10_000) {
    const end = Date.now() + ms;
    while (!(await this.page.evaluate(question))) assert(Date.now() < end, `waited ${ms} ms for: ${what}`);
  }

  text() {
    return this.page.evaluate(() => document.body.innerText);
  }

  /** The brightest pixel of the screen: its least colour (white has all), and the most blue. */
  async brightestPixel() {
    // Straight from the debugger: it takes the glass as it is and waits for nothing.
    const cdp = await this.cdp();
    const { data } = await cdp.send("Page.captureScreenshot", { format: "png" });
    return this.brightestOf(data);
  }

  brightestOf(png) {
    return this.page.evaluate(async (data) => {
      const image = new Image();
      image.src = `data:image/png;base64,${data}`;
      await image.decode();
      const canvas = new OffscreenCanvas(image.width, image.height);
      const c = canvas.getContext("2d");
      c.drawImage(image, 0, 0);
      const d = c.getImageData(0, 0, image.width, image.height).data;
      let least = 0;
      let blue = 0;
      for (let i = 0; i < d.length; i += 4) {
        least = Math.max(least, Math.min(d[i], d[i + 1], d[i + 2]));
        blue = Math.max(blue, d[i + 2]);
      }
      return { least, blue };
    }, png);
  }

  /** What lies in a store of the phone's database. */
  stored(store) {
    return this.page.evaluate(
      (name) =>
        new Promise((ok, no) => {
          const open = indexedDB.open("wakeback");
          open.onerror = () => no(open.error);
          open.onsuccess = () => {
            const all = open.result.transaction(name).objectStore(name).getAll();
            all.onsuccess = () => {
              open.result.close();
              ok(all.result);
            };
          };
        }),
      store,
    );
  }

  /** Waits until a store holds so many. */
  async holds(store, n) {
    const end = Date.now() + 10_000;
    for (;;) {
      const held = await this.stored(store);
      if (held.length === n) return held;
      assert(Date.now() < end, `${store} holds ${held.length}, not ${n}`);
    }
  }

  /** Moves the phone, with course and speed. */
  async goes(latitude, longitude, { speed = null, heading = null, accuracy = 6 } = {}) {
    this.at = { latitude, longitude, accuracy };
    const cdp = await this.cdp();
    await cdp.send("Emulation.setGeolocationOverride", { latitude, longitude, accuracy, ...(speed !== null && { speed }), ...(heading !== null && { heading }) });
  }
}

/** Waits until a condition holds here, in this process. */
export async function until(what, condition, ms = 10_000) {
  const end = Date.now() + ms;
  while (!(await condition())) {
    assert(Date.now() < end, `waited ${ms} ms for: ${what}`);
    await new Promise((ok) => setTimeout(ok, 10));
  }
}

export { assert };
