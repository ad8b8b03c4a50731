// Debian's Chromium, driven with playwright-core.

import { chromium } from "playwright-core";

export const SIZES = {
  phone: { width: 390, height: 844 },
  landscape: { width: 844, height: 390 },
  tablet: { width: 820, height: 1180 },
};

/** Where the phone is unless a story says otherwise: open water, invented. */
export const HERE = { latitude: 54.1, longitude: 7.9, accuracy: 6 };

/** Starts the browser. */
export function launch() {
  return chromium.launch({
    executablePath: "/usr/bin/chromium",
    args: [
      "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
      "--disable-background-networking", "--disable-component-update", "--disable-sync",
    ],
  });
}

/** A phone of its own: own storage, own permissions, page errors collected. */
export async function phone(browser, options = {}) {
  const { size = "phone", geolocation = HERE, palette, colorScheme = "dark" } = options;
  const context = await browser.newContext({
    viewport: SIZES[size],
    deviceScaleFactor: options.scale ?? 1,
    hasTouch: true,
    isMobile: size !== "tablet",
    colorScheme,
    serviceWorkers: options.worker === false ? "block" : "allow",
    ...(geolocation && { geolocation, permissions: ["geolocation"] }),
  });
  await context.addInitScript((p) => {
    // What is sounded can be read by a story: the first tone's pitch tells which sound it is.
    window.toneStarts = [];
    const start = OscillatorNode.prototype.start;
    OscillatorNode.prototype.start = function (when) {
      window.toneStarts.push(Math.round(this.frequency.value));
      return start.call(this, when);
    };
    if (p) localStorage.setItem("wakeback.palette", p);
  }, palette ?? "");
  const page = await context.newPage();
  const errors = [];
  page.on("pageerror", (e) => errors.push(String(e)));
  page.on("console", (msg) => {
    // Failures to reach the server are part of the stories; anything else is a fault.
    if (msg.type() === "error" && !/ERR_|WebSocket|Failed to load resource/.test(msg.text())) errors.push(msg.text());
  });
  return { context, page, errors };
}
