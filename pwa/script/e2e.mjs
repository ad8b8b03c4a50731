// Runs the stories in Debian's Chromium: node script/e2e.mjs [part of a name].
// Each has its own server and its own phones. A hard timer ends a run that hangs.

import { existsSync, mkdirSync } from "node:fs";
import { launch } from "./browser.mjs";
import { stories as alone } from "./stories/alone.mjs";
import { stories as looks } from "./stories/looks.mjs";
import { stories as marking } from "./stories/marking.mjs";
import { stories as real } from "./stories/real.mjs";
import { stories as searching } from "./stories/searching.mjs";
import { stories as together } from "./stories/together.mjs";
import { Stage } from "./stage.mjs";

const LIMIT_MS = 15 * 60_000;
const STORY_MS = 120_000;
setTimeout(() => {
  console.error("the stories took too long");
  process.exit(3);
}, LIMIT_MS).unref();

if (!existsSync(new URL("../dist/index.html", import.meta.url))) {
  console.error("the page is not built: npm run build");
  process.exit(2);
}
mkdirSync(new URL("../test-results", import.meta.url), { recursive: true });

const wanted = process.argv[2] ?? "";
const all = { ...marking, ...together, ...alone, ...looks, ...real, ...searching };
const names = Object.keys(all).filter((n) => n.includes(wanted));
let failed = 0;
const browser = await launch();

/** Tells a story; returns why it failed, or "". */
async function tell(name) {
  const stage = new Stage(browser, name);
  const began = Date.now();
  let timer;
  try {
    const late = new Promise((_, no) => {
      timer = setTimeout(() => no(new Error(`not done after ${STORY_MS} ms`)), STORY_MS);
    });
    const outcome = await Promise.race([all[name](stage), late]);
    stage.noErrors();
    console.log(`${outcome === "skipped" ? "skip" : "ok  "} ${name} (${Date.now() - began} ms)${stage.measured}`);
    return "";
  } catch (err) {
    await stage.evidence().catch(() => {});
    return String(err.stack ?? err);
  } finally {
    clearTimeout(timer);
    await stage.close();
  }
}

// A story of two phones, a server and a deadline can miss it on a busy machine:
// it is told once more, and the run says so.
for (const name of names) {
  const first = await tell(name);
  if (!first) continue;
  console.error(`once more: ${name}: ${first}`);
  const second = await tell(name);
  if (!second) continue;
  failed++;
  console.error(`FAIL ${name}: ${second}`);
}
await browser.close();
console.log(`${names.length - failed} of ${names.length} stories`);
process.exit(failed > 0 || names.length === 0 ? 1 : 0);
