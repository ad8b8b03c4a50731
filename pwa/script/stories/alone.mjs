// The server is gone, or lies, or was never there.

import { assert, until } from "../stage.mjs";


export const stories = {
  "opened with no server and no network: mark, arrow, drift; then everything arrives once": async (s) => {
    const fake = await s.server();
    const port = fake.port;
    const a = await s.phone();
    await a.whole();
    await a.kept();
    await fake.stop();
    await a.context.setOffline(true);
    await a.page.reload({ waitUntil: "commit" });
    await a.ready();
    const usableMs = await a.page.evaluate(() => Math.round(performance.now()));
    await a.whole();
    await a.engine();
    await a.mark();
    await a.returning();
    await a.goes(54.103, 7.9, { speed: 3, heading: 0 });
    await a.page.waitForSelector(".return .range");
    await a.says("alone since");
    await a.says("only on this phone");
    await a.page.waitForFunction(() => /0\.18 nm|330 m/.test(document.querySelector(".range").innerText));
    await a.settled();
    await a.tap("I SEE THEM");
    await a.holds("outbox", 2);
    const kept = await a.stored("outbox");

    await a.context.setOffline(false);
    const back = await s.server(port);
    await until("both entries arrived", () => back.events.length === 2, 25_000);
    await a.saysNot("only on this phone");
    assert.deepEqual(back.events.map((e) => e.hash).sort(), kept.map((e) => e.hash).sort());
    assert.deepEqual(back.events.map((e) => e.device_seq), [1, 2]);
    s.measured = ` from the cache usable after ${usableMs} ms`;
  },

  "scenario 35: the server dies in mid-incident: grey, then alone, steering goes on; nothing lost or doubled": async (s) => {
    const fake = await s.server();
    const port = fake.port;
    const a = await s.phone();
    await a.whole();
    await a.engine();
    await a.mark();
    await a.returning();
    await until("the mark is stored", () => fake.events.length === 1);
    const first = fake.events[0];
    // Half open: the socket stays, no word comes.
    fake.ticking = false;
    const quiet = Date.now();
    await a.says("server silent", 6000);
    const greyMs = Date.now() - quiet;
    await fake.stop();
    await a.says("alone since");
    await a.goes(54.102, 7.9, { speed: 3, heading: 0 });
    await a.page.waitForFunction(() => document.querySelector(".range")?.innerText.includes("220"));
    await a.tap("ALONGSIDE");
    await a.holds("outbox", 1);
    const back = await s.server(port);
    back.store(first);
    await until("the entry arrived", () => back.events.length === 2, 25_000);
    await a.saysNot("alone since", 15_000);
    await a.holds("outbox", 0);
    assert.deepEqual(back.events.map((e) => e.kind), ["marked", "alongside"]);
    s.measured = ` grey after ${greyMs} ms`;
  },

  "a server that cannot write: the phone keeps its copy and says so": async (s) => {
    const fake = await s.server();
    fake.answerWith = 503;
    const a = await s.phone();
    await a.whole();
    await a.mark();
    await a.returning();
    await a.says("1 entry only on this phone");
    await a.holds("outbox", 1);
    fake.answerWith = 200;
    await a.page.evaluate(() => dispatchEvent(new Event("online")));
    await until("it arrived", () => fake.events.length === 1);
    await a.saysNot("only on this phone");
  },

  "an entry that the server refuses stays, and the log says why": async (s) => {
    const fake = await s.server();
    fake.answerWith = 422;
    const a = await s.phone();
    await a.whole();
    await a.mark();
    await a.returning();
    await a.says("1 refused by the server");
    await a.settled();
    await a.tap("More", ".touch");
    await a.tap("People and log");
    await a.says("told to refuse");
    await a.holds("outbox", 1);
  },

  "reloaded in mid-incident: return at once, and a mark in the first moment joins it": async (s) => {
    const fake = await s.server();
    const a = await s.phone({ worker: false });
    await a.whole();
    await a.mark();
    await a.returning();
    await until("the mark is stored", () => fake.events.length === 1);
    await a.page.route(/\/assets\/start/, () => {});
    await a.page.reload({ waitUntil: "commit" });
    await a.ready();
    await a.mark();
    await a.says("Kept on this phone");
    await a.page.unrouteAll({ behavior: "ignoreErrors" });
    await a.page.reload({ waitUntil: "commit" });
    await a.returning();
    await until("both are stored", () => fake.events.length === 2);
    assert.equal(fake.events[1].incident, fake.events[0].incident);
  },

  "another store on the server: the page takes its log from the start and loses nothing of its own": async (s) => {
    const fake = await s.server();
    const port = fake.port;
    const a = await s.phone();
    await a.whole();
    await a.mark();
    await a.returning();
    await until("the mark is stored", () => fake.events.length === 1);
    const held = await a.holds("known", 1);
    await fake.stop();
    await a.says("alone since");
    const other = await s.server(port, { epoch: "fake-2" });
    await until("the new store has the log", () => other.events.length === 1, 25_000);
    assert.equal(other.events[0].hash, held[0].hash);
    assert.equal(await a.page.locator(".return").count(), 1);
  },

  "a new version waits until nobody is in the water and a person asks": async (s) => {
    const fake = await s.server();
    const a = await s.phone();
    await a.whole();
    await a.kept();
    fake.change = (path, data) => (path === "/sw.js" ? Buffer.concat([data, Buffer.from("\n// newer")]) : data);
    await a.mark();
    await a.returning();
    await a.page.evaluate(async () => (await navigator.serviceWorker.getRegistration()).update());
    await a.holdsTrue("a new version waits", async () => !!(await navigator.serviceWorker.getRegistration()).waiting);
    assert.equal(await a.page.locator(".return").count(), 1);
    assert(!(await a.text()).includes("new version"));
    await a.settled();
    await a.tap("More", ".touch");
    await a.tap("Mark 1: not a person");
    await a.says("A new version is here");
    const gone = a.page.waitForEvent("load");
    await a.tap("A new version is here");
    await gone;
    await a.whole();
    await a.holdsTrue("it took over", async () => !(await navigator.serviceWorker.getRegistration()).waiting);
  },
};
