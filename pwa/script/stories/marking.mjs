// The press: what has to work whatever else does not.

import { assert, until } from "../stage.mjs";

export const stories = {
  "scenario 1: wet thumb at night, one touch marks, every phone shows it within 2 s, nothing goes white": async (s) => {
    const fake = await s.server();
    const a = await s.phone({ palette: "night" });
    const b = await s.phone({ palette: "night" });
    await Promise.all([a.whole(), b.whole()]);
    await until("both phones are connected", () => fake.clients === 2);
    // A touch anywhere has opened the sound, as in the readiness check.
    for (const p of [a, b]) await p.touch(30, 380);
    await Promise.all([a.says("Turn the volume up"), b.says("Turn the volume up")]);
    const brightest = [await a.brightestPixel()];
    const before = Date.now();
    // A drop of water lies on the glass elsewhere while the thumb lands.
    const cdp = await a.cdp();
    const box = await a.page.locator(".mark").boundingBox();
    const thumb = { x: box.x + box.width / 2, y: box.y + box.height / 2, id: 1 };
    const drop = { x: 30, y: 120, id: 0 };
    await cdp.send("Input.dispatchTouchEvent", { type: "touchStart", touchPoints: [drop] });
    await cdp.send("Input.dispatchTouchEvent", { type: "touchStart", touchPoints: [drop, thumb] });
    const pressed = Date.now();
    await cdp.send("Input.dispatchTouchEvent", { type: "touchEnd", touchPoints: [drop] });
    await cdp.send("Input.dispatchTouchEvent", { type: "touchEnd", touchPoints: [] });
    await a.returning(2000);
    brightest.push(await a.brightestPixel());
    await b.returning(2000);
    const shownMs = Date.now() - pressed;
    for (const p of [a, b]) await p.page.waitForFunction(() => window.toneStarts.length >= 6, null, { timeout: 2000 });
    const soundedMs = Date.now() - pressed;
    assert(soundedMs < 2000, `both sounded after ${soundedMs} ms`);
    assert(shownMs < 2000, `the other phone showed it after ${shownMs} ms`);
    assert.equal(fake.events.length, 1);
    const at = Date.parse(fake.events[0].at);
    // The mark stands on the vessel's clock, which the phone knows by a question
    // and an answer: half of what these took, on a busy machine, is its error.
    const clockMs = 100;
    assert(at >= before - clockMs && at <= pressed + clockMs, `marked at ${at}, touched between ${before} and ${pressed}`);
    for (const v of brightest) assert(v.blue < 100 && v.least < 100, `a pixel of ${JSON.stringify(v)}`);
    s.measured = ` other phone after ${shownMs} ms`;
  },

  "scenario 2: an 80 ms touch marks, a long one makes no second mark, a skip is one": async (s) => {
    const fake = await s.server();
    const a = await s.phone();
    await a.whole();
    await a.mark(".mark", 80);
    await a.returning();
    await until("the mark is stored", () => fake.events.length === 1);
    // Long, on the second person's touch: one more, not two, and the finger that lifts presses nothing else.
    await a.page.waitForSelector(".touch .second");
    await a.settled();
    await a.mark(".touch .second", 1500);
    await until("the second mark is stored", () => fake.events.length === 2);
    await a.settled();
    await a.holds("known", 2);
    assert.deepEqual(fake.events.map((e) => e.kind), ["marked", "marked"]);
  },

  "MARK works within a second of opening, before the page proper is loaded and with no server": async (s) => {
    const fake = await s.server();
    const a = await s.phone({ open: false });
    await a.page.route(/\/assets\/start/, () => {}); // never answered
    await a.page.route("**/api/**", (r) => r.abort());
    const open = async () => {
      await a.page.goto(s.url, { waitUntil: "commit" });
      await a.ready();
      return a.page.evaluate(() => Math.round(performance.now()));
    };
    const usableMs = await open();
    assert(usableMs < 1000, `usable after ${usableMs} ms`);
    // As on a phone several years old.
    const cdp = await a.cdp();
    await cdp.send("Emulation.setCPUThrottlingRate", { rate: 4 });
    const slowMs = await open();
    assert(slowMs < 1500, `usable after ${slowMs} ms on a slow phone`);
    await cdp.send("Emulation.setCPUThrottlingRate", { rate: 1 });
    await a.mark();
    await a.says("Kept on this phone");
    const [event] = await a.holds("outbox", 1);
    assert.equal(event.kind, "marked");
    assert.equal(event.body.source, "phone");
    assert.equal(fake.events.length, 0);
    // The page proper comes up later and knows of it.
    await a.page.unrouteAll({ behavior: "ignoreErrors" });
    await a.page.reload({ waitUntil: "commit" });
    await a.returning();
    await until("it reached the server once", () => fake.events.length === 1);
    await a.holds("outbox", 0);
    s.measured = ` usable after ${usableMs} ms, ${slowMs} ms with the processor slowed four times`;
  },

  "drops and fingers elsewhere mark nothing": async (s) => {
    const fake = await s.server();
    const a = await s.phone();
    await a.whole();
    await a.holds("chain", 1);
    for (const [x, y] of [[30, 300], [200, 350], [10, 10], [195, 838]]) await a.touch(x, y);
    await a.page.keyboard.press("Enter");
    await a.holds("known", 0);
    assert.equal(fake.events.length, 0);
    assert.equal(await a.page.locator(".return").count(), 0);
  },

  "a key and a screen reader mark too": async (s) => {
    const fake = await s.server();
    const a = await s.phone();
    await a.whole();
    await a.page.locator(".mark").focus();
    await a.page.keyboard.press("Enter");
    await a.returning();
    await until("the mark is stored", () => fake.events.length === 1);
  },

  "scenario 9: no position ever: marked at once, said plainly, clock runs": async (s) => {
    const fake = await s.server();
    const a = await s.phone({ geolocation: null });
    await a.whole();
    await a.says("not allowed");
    await a.mark();
    await a.returning();
    await until("the mark is stored", () => fake.events.length === 1);
    assert.deepEqual(fake.events[0].body, { source: "nothing" });
    await a.says("no position");
    await a.says("no fix");
    await a.says("00:00:0");
  },

  "scenario 10: a phone 3 min 12 s fast marks on common time, and the log shows both": async (s) => {
    const fake = await s.server();
    fake.clockAheadMs = -192_000;
    const a = await s.phone();
    await a.whole();
    await a.says("this phone is 3 min fast");
    await a.mark();
    await a.returning();
    await until("the mark is stored", () => fake.events.length === 1);
    const e = fake.events[0];
    const apart = Date.parse(e.device_at) - Date.parse(e.at);
    assert(Math.abs(apart - 192_000) <= e.clock_error_ms + 1, `device and common time are ${apart} ms apart`);
    assert(e.clock_error_ms < 500);
    await a.settled();
    await a.tap("More", ".touch");
    await a.tap("People and log");
    await a.says("phone's clock");
  },

  "a test mark is logged as a test and calls nobody": async (s) => {
    const fake = await s.server();
    const a = await s.phone();
    const b = await s.phone();
    await Promise.all([a.whole(), b.whole()]);
    await a.tap("Set up");
    await a.tap("Test mark");
    await until("it is stored", () => fake.events.length === 1);
    assert.equal(fake.events[0].test, true);
    await a.says("Not a person");
    await b.holds("known", 1);
    assert.equal(await b.page.locator(".return").count(), 0);
    await a.tap("Close");
    assert.equal(await a.page.locator(".return").count(), 0);
  },
};
