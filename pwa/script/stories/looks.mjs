// What the screens look like, and what can be said of that by a machine:
// nothing cut off, targets large enough, axe finds nothing, nothing inline.
// Each screen in each palette and size is left in test-results/screens.

import { mkdirSync, readdirSync, readFileSync, statSync } from "node:fs";
import { join } from "node:path";
import { gzipSync } from "node:zlib";
import { assert } from "../stage.mjs";

const shots = new URL("../../test-results/screens/", import.meta.url).pathname;
const axe = readFileSync(new URL("../../node_modules/axe-core/axe.min.js", import.meta.url), "utf8");
/** Every palette at phone size; the other sizes once each by light and by dark. */
const LOOKS = [["phone", "day"], ["phone", "dusk"], ["phone", "night"], ["landscape", "day"], ["landscape", "night"], ["tablet", "dusk"]];

/** A moment on the way back, as the server would stream it. */
function frame(incident, over = {}) {
  const now = new Date().toISOString();
  const position = { lat: 54.1, lon: 7.9 };
  return {
    t: "steer", incident, at: now, status: "open", person: 1, persons: [], elapsed_s: 192, mark: null,
    fix: { position, at: now, age_s: 0.8, sog_kn: 5, cog_deg: 320, source: "vessel", error_m: 8 },
    datum: {
      position, error_m: 60, age_s: 190, moved_m: 85, moved_towards_deg: 75, drift_kn: 0.9, drift_towards_deg: 75,
      wind_from_deg: 240, wind_kn: 14, wind_at: now, current_set_deg: 90, current_drift_kn: 1, current_at: now, basis: "mark",
    },
    heading_deg: 323, heading_source: "compass", range_m: 222, bearing_deg: 283, bearing_mag_deg: 281, variation_deg: 2,
    relative_deg: -40, wedge_deg: 15.7, closing_kn: 4.1, eta_s: 105,
    do: { code: "steer_to", bearing_deg: 283, relative_deg: -40, way: "port" },
    cautions: ["call_first", "no_current"], ...over,
  };
}

const fix = () => ({
  t: "fix", position: { lat: 54.1, lon: 7.9 }, at: new Date().toISOString(), age_s: 0.4, sog_kn: 6, cog_deg: 320,
  heading_deg: 323, source: "vessel", error_m: 8, stale: false,
});

/** Screens by name: how to get there, and what the server says meanwhile. */
const SCREENS = {
  ready: { start: async () => {} },
  return: { start: press },
  "return-near": { start: press, frame: { range_m: 34, wedge_deg: 180, relative_deg: 12, closing_kn: 2, eta_s: 33, do: { code: "look_all_round", range_m: 34 }, cautions: ["call_again", "engine_neutral"] } },
  "return-stale": { start: press, frame: { fix: { position: { lat: 54.1, lon: 7.9 }, at: "", age_s: 48, sog_kn: 5, cog_deg: 320, source: "vessel", error_m: 8, stale: true }, wedge_deg: 32, heading_deg: null, relative_deg: null, do: { code: "steer_to", bearing_deg: 283 }, cautions: ["call_first", "fix_old"] } },
  "two-alone": { start: async (p, fake) => {
    await press(p);
    await p.mark(".touch .second");
    await p.says("person 2");
    await p.settled();
    fake.answerWith = 503;
    await p.tap("ALONGSIDE");
    await p.says("only on this phone");
  }, frame: { person: 2, do: { code: "recover" } } },
  when: { start: async (p) => { await press(p); await p.tap("Fell earlier"); } },
  call: { start: async (p) => { await press(p); await p.tap("Radio call"); } },
  more: { start: async (p) => { await press(p); await p.tap("More", ".touch"); } },
  down: { start: async (p) => { await press(p); await p.tap("More", ".touch"); await p.tap("Stand down", ".sheet"); } },
  log: { start: async (p) => { await press(p); await p.tap("I SEE THEM"); await p.tap("More", ".touch"); await p.tap("People and log"); } },
  setup: { start: (p) => p.tap("Set up") },
  drill: { start: async (p) => { await p.tap("Set up"); await p.tap("Begin a drill"); await p.tap("Close"); await press(p); } },
};

async function press(p) {
  await p.mark();
  await p.returning();
  await p.settled();
}

/** Every screen in one size and palette. */
async function look(s, size, palette) {
  mkdirSync(shots, { recursive: true });
  const wanted = size === "phone" ? Object.keys(SCREENS) : ["ready", "return", "when", "drill"];
  const faults = [];
  for (const name of wanted) {
    const fake = await s.server();
    const p = await s.phone({ size, palette, scale: 1 });
    await Promise.all([p.whole(), p.engine()]);
    const telling = setInterval(() => {
      fake.send(fix());
      const first = fake.events[0];
      if (first) fake.send(frame(first.incident, { drill: !!first.drill, ...SCREENS[name].frame }));
    }, 200);
    try {
      await SCREENS[name].start(p, fake);
      if (name !== "ready" && name !== "setup") await p.says(/near/.test(name) ? "34" : "220");
      await p.page.evaluate(() => new Promise((ok) => requestAnimationFrame(() => requestAnimationFrame(ok))));
      await p.page.screenshot({ path: join(shots, `${name}-${palette}-${size}.png`) });
      for (const f of [...(await fits(p)), ...(await accessible(p))]) faults.push(`${name}: ${f}`);
    } finally {
      clearInterval(telling);
      await p.context.close();
      await fake.stop();
      s.fake = undefined;
    }
  }
  assert.deepEqual(faults, []);
}

/** Nothing sticks out sideways; what is touched is large enough; what is read is not too small. */
export function fits(p) {
  return p.page.evaluate(() => {
    const out = [];
    const wide = document.documentElement.clientWidth;
    const shown = (el) => el.checkVisibility() && el.getBoundingClientRect().width > 1;
    for (const el of document.querySelectorAll("#app *")) {
      if (!shown(el) || el.closest("svg")) continue;
      const r = el.getBoundingClientRect();
      if (r.left < -1 || r.right > wide + 1) out.push(`${el.className || el.tagName} sticks out: ${r.left} to ${r.right}`);
      const own = [...el.childNodes].some((n) => n.nodeType === 3 && n.data.trim());
      if (own && Number.parseFloat(getComputedStyle(el).fontSize) < 16) out.push(`${el.textContent} is smaller than 16 px`);
      if (own && el.scrollWidth > el.clientWidth + 1 && el.clientWidth > 0 && getComputedStyle(el).display !== "inline") out.push(`${el.textContent} is cut off`);
    }
    for (const b of document.querySelectorAll("button")) {
      if (!shown(b)) continue;
      const r = b.getBoundingClientRect();
      const least = b.matches(".mark, .big") && innerHeight > 500 ? 128 : 72;
      if (r.height < least - 0.5 || r.width < 72) out.push(`${b.textContent} is ${r.width} x ${r.height}`);
    }
    const main = document.querySelector("main");
    if (main && main.scrollHeight > main.clientHeight + 1) out.push(`the screen is ${main.scrollHeight - main.clientHeight} px too high`);
    const sheet = document.querySelector(".sheet");
    if (sheet) {
      const r = sheet.getBoundingClientRect();
      if (r.height < 300) out.push(`the sheet is only ${r.height} px high`);
      for (const y of [r.top + 4, (r.top + r.bottom) / 2, r.bottom - 4]) {
        if (!sheet.contains(document.elementFromPoint(r.left + r.width / 2, y))) out.push(`the sheet is covered at ${y}`);
      }
      const ring = document.querySelector(".ring")?.getBoundingClientRect();
      if (ring && !sheet.matches(".full") && r.top < ring.bottom - 1 && r.left < ring.right - 1) out.push("the sheet covers the picture");
    }
    // Everything at once (two persons, alone, entries waiting) leaves the least room for it.
    const least = document.querySelector(".people") ? 140 : 190;
    const rim = document.querySelector(".rim")?.getBoundingClientRect();
    if (rim && rim.width < Math.min(least, innerHeight / 2)) out.push(`the ring is only ${rim.width} px wide`);
    const words = document.querySelector(".words");
    if (words && words.scrollHeight > words.clientHeight + 1) out.push("words are cut off");
    return out;
  });
}

/** WCAG 2.2 A and AA, as far as axe can see. */
export async function accessible(p) {
  // The policy of the page allows no script but its own files; the debugger's evaluate is not the page's.
  await p.page.evaluate(axe);
  return p.page.evaluate(() =>
    window.axe.run(document, { runOnly: ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa"] }).then((r) =>
      r.violations.map((v) => `${v.id}: ${v.nodes.map((n) => n.html.slice(0, 80)).join(" | ")}`)));
}

export const stories = {
  "the first load is under 60 kB gzipped, without engine and plot": async (s) => {
    const dist = new URL("../../dist", import.meta.url).pathname;
    const walk = (f) => readdirSync(f).flatMap((n) => (statSync(join(f, n)).isDirectory() ? walk(join(f, n)) : [join(f, n)]));
    const files = walk(dist).filter((f) => !/engine\.wasm|wasm_exec|plot|\.gz$|\.keep$/.test(f));
    const total = files.reduce((sum, f) => sum + gzipSync(readFileSync(f), { level: 9 }).length, 0);
    const boot = files.filter((f) => /index[-.]|palette/.test(f)).reduce((sum, f) => sum + gzipSync(readFileSync(f), { level: 9 }).length, 0);
    assert(total < 60_000, `${total} bytes`);
    s.measured = ` ${(total / 1000).toFixed(1)} kB all told, ${(boot / 1000).toFixed(1)} kB until MARK works`;
  },

  ...Object.fromEntries(
    LOOKS.map(([size, palette]) => [`looks: ${size}, ${palette}`, (s) => look(s, size, palette)]),
  ),

  "no flash while loading: every frame that is painted at night is dark": async (s) => {
    await s.server();
    const p = await s.phone({ palette: "night" });
    await p.whole();
    const cdp = await p.cdp();
    const frames = [];
    cdp.on("Page.screencastFrame", ({ data, sessionId }) => {
      frames.push(data);
      cdp.send("Page.screencastFrameAck", { sessionId }).catch(() => {});
    });
    await cdp.send("Page.startScreencast", { format: "png", everyNthFrame: 1 });
    for (let i = 0; i < 3; i++) {
      await p.page.reload({ waitUntil: "commit" });
      await p.whole();
    }
    await p.mark();
    await p.returning();
    await cdp.send("Page.stopScreencast");
    assert(frames.length > 3, `${frames.length} frames`);
    for (const f of frames) {
      const { least } = await p.brightestOf(f);
      assert(least < 100, `a frame with a pixel whose least colour is ${least}`);
    }
    s.measured = ` ${frames.length} frames`;
  },
};
