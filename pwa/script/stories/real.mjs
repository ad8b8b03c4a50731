// The same page against the real program: wakeback serve --demo.

import { mkdirSync } from "node:fs";
import { built, Program } from "../program.mjs";
import { assert, until } from "../stage.mjs";

/** A story with a program of its own. */
export function withProgram(story) {
  return async (s) => {
    if (!built) return "skipped";
    const program = new Program();
    try {
      s.url = await program.start();
      return await story(s, program);
    } finally {
      await program.stop();
    }
  };
}

/** The events of the server's log. */
async function logOf(url) {
  const { incidents } = await (await fetch(`${url}api/v1/incidents`)).json();
  const lists = await Promise.all(
    incidents.map(async (i) => (await (await fetch(`${url}api/v1/incidents/${i.id}/events`)).json()).events));
  return lists.flat();
}

const rangeOf = (p) => p.page.evaluate(() => Number.parseFloat(document.querySelector(".range")?.innerText ?? "0"));

export const stories = {
  "real: a newcomer marks and sees the way back within a minute of opening": withProgram(async (s) => {
    const began = Date.now();
    const a = await s.phone({ palette: "day" });
    await a.whole();
    await a.says("from the vessel");
    await a.mark();
    await a.returning();
    await a.page.waitForSelector(".return .range");
    const arrowMs = Date.now() - began;
    assert(arrowMs < 60_000);
    const marks = async () => (await logOf(s.url)).filter((e) => e.kind === "marked");
    await until("the mark is on the server", async () => (await marks()).length === 1);
    const [mark] = await marks();
    assert.equal(mark.body.source, "vessel");
    assert(mark.body.fix_age_s < 3, `a fix ${mark.body.fix_age_s} s old`);
    await a.saysNot("only on this phone");
    s.measured = ` arrow ${arrowMs} ms after opening`;
  }),

  "real: the server is killed in mid-incident and comes back: nothing lost, nothing doubled": withProgram(async (s, program) => {
    const a = await s.phone();
    const b = await s.phone();
    await Promise.all([a.whole(), b.whole(), a.engine(), b.engine()]);
    await a.says("from the vessel");
    await a.mark();
    await b.returning();
    await program.kill();
    await a.says("alone since");
    await b.says("alone since");
    assert.ok(await a.page.locator(".range").count(), "steering goes on");
    await a.settled();
    await a.tap("I SEE THEM");
    await b.tap("ALONGSIDE");
    await a.holds("outbox", 1);
    await b.holds("outbox", 1);
    await program.start();
    await a.saysNot("alone since", 20_000);
    await b.saysNot("alone since", 20_000);
    await a.holds("outbox", 0);
    await b.holds("outbox", 0);
    const kinds = (await logOf(s.url)).map((e) => e.kind).filter((k) => /^(marked|seen|alongside)$/.test(k)).sort();
    assert.deepEqual(kinds, ["alongside", "marked", "seen"]);
    await a.says("Alongside is not aboard");
  }),

  "real: what the screen says is what the server's frame says, to the last digit shown": withProgram(async (s) => {
    const a = await s.phone();
    await a.whole();
    await a.says("from the vessel");
    const frames = [];
    a.page.on("websocket", (ws) => ws.on("framereceived", ({ payload }) => {
      const m = JSON.parse(payload);
      if (m.t === "steer") frames.push(m);
    }));
    await a.page.reload({ waitUntil: "commit" });
    await a.whole();
    await a.mark();
    await a.page.waitForSelector(".bearing");
    await until("frames came", () => frames.length > 5);
    await a.holdsTrue("the screen shows a bearing", () => /\d{3} T/.test(document.querySelector(".bearing")?.innerText ?? ""));
    const shown = await a.page.evaluate(() => /(\d{3}) T/.exec(document.querySelector(".bearing").innerText)[1]);
    const said = frames.slice(-10).map((f) => String(Math.round(f.bearing_deg) % 360).padStart(3, "0"));
    assert(said.includes(shown), `shown ${shown}, the newest frames said ${said}`);
  }),

  "tour: pictures for the reader": withProgram(async (s) => {
    const folder = new URL(process.env.WAKEBACK_TOUR ? "../../tour/" : "../../test-results/tour/", import.meta.url).pathname;
    mkdirSync(folder, { recursive: true });
    const shoot = async (p, name) => p.page.screenshot({ path: `${folder}${name}.png` });
    const a = await s.phone({ palette: "day" });
    await a.whole();
    await a.engine();
    await a.touch(30, 380);
    await a.says("from the vessel");
    await shoot(a, "ready");
    await a.mark();
    await a.returning();
    const end = Date.now() + 35_000;
    while ((await rangeOf(a)) < 90 && Date.now() < end) await a.page.evaluate(() => new Promise((ok) => setTimeout(ok, 250)));
    await shoot(a, "return");
    const b = await s.phone({ palette: "night" });
    await b.returning();
    await b.page.waitForSelector(".range");
    await shoot(b, "return-night");
    await b.tap("Fell earlier");
    await shoot(b, "when-night");
    const c = await s.phone({ palette: "dusk", size: "landscape" });
    await c.returning();
    await c.page.waitForSelector(".range");
    await shoot(c, "return-dusk-landscape");
    await a.tap("More", ".touch");
    await a.tap("People and log");
    await shoot(a, "log");
  }),
};
