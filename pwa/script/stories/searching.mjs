// The search: from a mark to the first leg in three touches, legs that move on
// by themselves, breaking off, and what is said of the water that was looked at.

import { mkdirSync } from "node:fs";
import { copyFile } from "node:fs/promises";
import { join } from "node:path";
import { assert, until } from "../stage.mjs";
import { accessible, fits } from "./looks.mjs";
import { withProgram } from "./real.mjs";

const shots = new URL("../../test-results/screens/", import.meta.url).pathname;

/** A phone with a mark and the engine, its touches counted. */
export async function marked(s, options = {}) {
  const fake = await s.server();
  const p = await s.phone({ scale: 1, ...options });
  await Promise.all([p.whole(), p.engine()]);
  await p.mark();
  await p.returning();
  await p.settled();
  return { fake, p };
}

export async function begun(s, options) {
  const { fake, p } = await marked(s, options);
  await p.page.locator(".search-touch").tap();
  await p.page.locator("button:not([disabled])", { hasText: "BEGIN" }).tap({ timeout: 10_000 });
  await p.says("Leg 1 of");
  return { fake, p };
}

const kinds = (fake) => fake.events.map((e) => e.kind);
const of = (fake, kind) => fake.events.filter((e) => e.kind === kind);

/** Puts the phone so far along a leg of a plan, and so far off it to the right. */
export async function onLeg(p, laid, no, share, offM = 0) {
  const leg = laid.legs[no - 1];
  const rad = Math.PI / 180;
  const rides = laid.datum_drift.drift_kn * (1852 / 3600) * ((Date.now() - Date.parse(laid.begin)) / 1000);
  const east = leg.from.east_m + (leg.to.east_m - leg.from.east_m) * share + offM * Math.cos(leg.course_deg * rad) + rides * Math.sin(laid.datum_drift.set_deg * rad);
  const north = leg.from.north_m + (leg.to.north_m - leg.from.north_m) * share - offM * Math.sin(leg.course_deg * rad) + rides * Math.cos(laid.datum_drift.set_deg * rad);
  // A minute of latitude here is 1855 m (WGS 84), close enough to be on a leg.
  const lat = laid.datum.lat + north / 111_300;
  await p.goes(lat, laid.datum.lon + east / (111_600 * Math.cos(lat * rad)));
}

/** Pictures that the reader's tour shows, by what they are called there. */
const tour = { "search-leg-day-phone": "search", "search-assumed-day-phone": "assumed" };

const picture = async (p, name) => {
  mkdirSync(shots, { recursive: true });
  await p.page.screenshot({ path: join(shots, `${name}.png`) });
  const kept = tour[name];
  if (kept && process.env.WAKEBACK_TOUR) {
    const file = new URL(`../../tour/${kept}.png`, import.meta.url);
    await copyFile(join(shots, `${name}.png`), file);
  }
};

async function sound(p, what) {
  const faults = [...(await fits(p)), ...(await accessible(p))];
  assert.deepEqual(faults, [], what);
}

export const stories = {
  "search: mark, Search, Begin, and the first leg is steered": async (s) => {
    const { fake, p } = await begun(s);
    await p.page.waitForSelector(".leg-steer");
    await until("the log has it", () => kinds(fake).includes("leg_begun"));
    const laid = of(fake, "search_laid")[0];
    assert.deepEqual(of(fake, "leg_begun")[0].body, { search: laid.id, leg: 1 });
    assert.match(await p.text(), /STEER\s+\d{3}\s+[MT]/);
    assert.match(await p.text(), /then (starboard|port) \d+/);
  },

  "search: a leg that is run moves on by itself, is counted, and no more than was run": async (s) => {
    const { fake, p } = await begun(s);
    await until("the log has it", () => kinds(fake).includes("leg_begun"));
    const laid = of(fake, "search_laid")[0].body;
    await onLeg(p, laid, 1, 0.5, 40);
    await p.says("right of leg");
    const before = await p.page.evaluate(() => window.toneStarts.length);
    await onLeg(p, laid, 1, 1.02);
    await until("the leg ended", () => kinds(fake).includes("leg_ended"));
    await p.says("Leg 2 of");
    const [ended] = of(fake, "leg_ended");
    assert.equal(ended.body.leg, 1);
    assert.equal(ended.body.how, "run");
    assert.equal(ended.body.part, 1);
    assert.equal(of(fake, "leg_ended").length, 1);
    await until("the next began", () => of(fake, "leg_begun").length === 2);
    // Two tones are the one sound of a turn.
    const tones = await p.page.evaluate(() => window.toneStarts.length);
    assert.equal(tones - before, 2, "turn now was heard, once");
    await onLeg(p, laid, 2, 0.4);
    await p.says("turn in");
    await p.page.waitForFunction(() => document.querySelector(".leg.done")?.getAttribute("d"));
    await p.tap("I SEE THEM");
    await until("it was broken off", () => of(fake, "leg_ended").length === 2);
    const broken = of(fake, "leg_ended")[1].body;
    assert.equal(broken.how, "broken_off");
    assert(Math.abs(broken.part - 0.4) < 0.05, `part ${broken.part}`);
    await until("and paused", () => kinds(fake).includes("search_paused"));
    const order = kinds(fake).filter((k) => /seen|leg_ended|search_paused/.test(k)).slice(-3);
    assert.deepEqual(order, ["seen", "leg_ended", "search_paused"]);
    await p.returning();
  },

  "search: paused legs are not searched, and going on begins the leg anew": async (s) => {
    const { fake, p } = await begun(s);
    await p.page.waitForSelector(".leg-steer");
    await p.tap("PAUSE");
    await p.says("broken off where you left it");
    await p.tap("GO ON");
    await p.page.waitForSelector(".leg-steer");
    await until("it is logged", () => of(fake, "leg_begun").length === 2);
    const order = kinds(fake).filter((k) => /^(leg|search)_/.test(k));
    assert.deepEqual(order, ["search_laid", "leg_begun", "leg_ended", "search_paused", "search_resumed", "leg_begun"]);
  },

  "search: a pause that is taken back leaves a leg that is counted again": async (s) => {
    const { fake, p } = await begun(s);
    await p.page.waitForSelector(".leg-steer");
    await p.tap("PAUSE");
    await p.says("broken off where you left it");
    await p.tap("Undo");
    await p.page.waitForSelector(".leg-steer");
    await until("the leg is begun anew", () => of(fake, "leg_begun").length === 2, 15_000);
    assert.equal(of(fake, "leg_begun")[1].body.leg, 1);
  },

  "search: a leg left out after a part counts that part alone, and the rest is drawn as a gap": async (s) => {
    const { fake, p } = await begun(s);
    await until("the log has it", () => kinds(fake).includes("leg_begun"));
    const laid = of(fake, "search_laid")[0].body;
    await onLeg(p, laid, 1, 0.4);
    // Six tenths of the first leg's 0.4 nm take 2 min 53 at 5 kn, and the whole of it nearly 5.
    await p.says("turn in 2 min");
    await p.tap("More", ".touch");
    await p.tap("Leave out");
    await until("it is logged", () => of(fake, "leg_begun").length === 2);
    const body = of(fake, "leg_ended")[0].body;
    assert.equal(body.how, "skipped");
    assert(Math.abs(body.part - 0.4) < 0.05, `part ${body.part}`);
    await p.page.waitForFunction(() => document.querySelector(".leg.left_out")?.getAttribute("d"));
  },

  "search: a mark made meanwhile shows the ring on every phone": async (s) => {
    const { p } = await begun(s);
    const q = await s.phone({ scale: 1 });
    await Promise.all([q.whole(), q.engine()]);
    await q.returning();
    await q.settled();
    await q.mark(".touch .second");
    await p.returning();
    await p.says("Person 2");
  },

  "search: of two phones one moves on": async (s) => {
    const { fake, p } = await begun(s);
    await until("the log has it", () => kinds(fake).includes("leg_begun"));
    const laid = of(fake, "search_laid")[0].body;
    const q = await s.phone({ scale: 1 });
    await Promise.all([q.whole(), q.engine()]);
    await q.returning();
    await Promise.all([onLeg(p, laid, 1, 1.02), onLeg(q, laid, 1, 1.02)]);
    await until("the leg ended", () => kinds(fake).includes("leg_ended"));
    await q.page.locator(".search-touch").tap();
    await q.says("Leg 2 of");
    assert.equal(of(fake, "leg_ended").length, 1);
    assert.equal(of(fake, "leg_ended")[0].device, of(fake, "search_laid")[0].device);
  },

  "search: what is assumed is changed by one touch, and says who said it": async (s) => {
    const { fake, p } = await begun(s);
    await p.tap("Drift", ".touch");
    await p.tap("Lifejacket");
    await until("it is logged", () => kinds(fake).includes("person"));
    assert.deepEqual(of(fake, "person")[0].body, { person: 1, object: "person-sitting", clothing: "lifejacket", moving: "unknown", life_jacket: "worn" });
    await p.page.getByLabel("From, deg true").fill("240");
    await p.page.getByLabel("Beaufort", { exact: true }).and(p.page.locator("input")).fill("4");
    await p.page.locator("form", { has: p.page.getByLabel("From, deg true") }).locator("button").tap();
    await until("wind", () => kinds(fake).includes("wind"));
    assert.deepEqual(of(fake, "wind")[0].body, { from_deg: 240, speed_kn: 13, source: "person" });
    await p.says("from 240, 13.0 kn");
    await p.page.getByLabel("Degrees Celsius").fill("12");
    await p.page.locator("form", { has: p.page.getByLabel("Degrees Celsius") }).locator("button").tap();
    await p.says("Keep searching");
    await p.says("Hands and legs of use");
    await p.page.getByLabel("Degrees Celsius").fill("warm");
    await p.page.locator("form", { has: p.page.getByLabel("Degrees Celsius") }).locator("button").tap();
    await p.says("expected a number from -2.4 to 40");
  },

  "search: the plot is moved by fingers, wheel and keys, and comes back": async (s) => {
    const { p } = await begun(s);
    const scale = () => p.page.evaluate(() => document.querySelector(".scale path").getBoundingClientRect().width + document.querySelector(".scale text").textContent);
    await p.page.locator(".plot").focus();
    await p.page.keyboard.press("-");
    await p.says("Moved by hand");
    const wide = await scale();
    await p.page.locator("button", { hasText: "Fit" }).tap();
    await p.saysNot("Moved by hand");
    const before = await scale();
    assert.notEqual(before, wide);
    const box = await p.page.locator(".plot").boundingBox();
    const [x, y] = [box.x + box.width / 2, box.y + box.height / 2];
    const cdp = await p.cdp();
    const fingers = (d, turn = 0) => [0, 1].map((id) => ({ id, x: x + (id ? 1 : -1) * d * Math.cos(turn), y: y + (id ? 1 : -1) * d * Math.sin(turn) }));
    await cdp.send("Input.dispatchTouchEvent", { type: "touchStart", touchPoints: fingers(30) });
    for (let i = 1; i <= 5; i++) await cdp.send("Input.dispatchTouchEvent", { type: "touchMove", touchPoints: fingers(30 + 12 * i, i * 0.15) });
    await cdp.send("Input.dispatchTouchEvent", { type: "touchEnd", touchPoints: [] });
    await p.says("Moved by hand");
    assert.notEqual(await scale(), before);
    await p.page.evaluate(() => new Promise((ok) => requestAnimationFrame(ok)));
    const north = await p.page.evaluate(() => document.querySelector(".north").getAttribute("transform"));
    assert.match(north, /rotate\(-31\d/, `turned with the two fingers, 43 degrees: ${north}`);
  },

  ...Object.fromEntries(
    [["phone", "day"], ["phone", "dusk"], ["phone", "night"], ["landscape", "night"], ["tablet", "dusk"]].map(([size, palette]) => [
      `looks: search, ${size}, ${palette}`,
      async (s) => {
        const { fake, p } = await marked(s, { size, palette });
        const shot = (name) => picture(p, `search-${name}-${palette}-${size}`);
        await p.page.locator(".search-touch").tap();
        await p.page.waitForSelector("button.saves:not([disabled])");
        await p.page.waitForSelector(".region.half");
        await shot("plan");
        await sound(p, "plan");
        await p.tap("BEGIN");
        await until("the log has it", () => kinds(fake).includes("leg_begun"));
        const laid = of(fake, "search_laid")[0].body;
        for (const share of [0.1, 0.4, 0.8, 1.02]) await onLeg(p, laid, 1, share, 12);
        await p.says("Leg 2 of");
        await onLeg(p, laid, 2, 0.3, 18);
        await p.says("right of leg");
        await shot("leg");
        await sound(p, "leg");
        if (palette === "night") {
          const { least, blue } = await p.brightestPixel();
          assert(least < 100 && blue < 120, `least ${least}, blue ${blue}`);
        }
        await p.tap("Drift", ".touch");
        await shot("assumed");
        await sound(p, "assumed");
        await p.tap("Back to the plot");
        await p.tap("More", ".touch");
        await shot("more");
        await sound(p, "more");
      },
    ]),
  ),

  "real: mark, Search, Begin against the program": withProgram(async (s) => {
    const p = await s.phone({ palette: "day" });
    await Promise.all([p.whole(), p.engine()]);
    await p.says("from the vessel");
    await p.mark();
    await p.returning();
    await p.settled();
    await p.page.locator(".search-touch").tap();
    await p.page.locator("button:not([disabled])", { hasText: "BEGIN" }).tap({ timeout: 10_000 });
    await p.page.waitForSelector(".leg-steer");
    await p.says("Leg 1 of");
    await picture(p, "search-real-day-phone");
    await p.saysNot("only on this phone");
  }),
};

