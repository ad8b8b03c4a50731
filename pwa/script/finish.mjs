// The last step of the build: tells the service worker which files there are,
// and lays a gzipped copy beside each file that gains from it.

import { createHash } from "node:crypto";
import { readdirSync, readFileSync, statSync, writeFileSync } from "node:fs";
import { join, relative } from "node:path";
import { gzipSync } from "node:zlib";

const dist = new URL("../dist", import.meta.url).pathname;

function walk(folder) {
  return readdirSync(folder).flatMap((name) => {
    const path = join(folder, name);
    return statSync(path).isDirectory() ? walk(path) : [path];
  });
}

const files = walk(dist).filter((f) => !f.endsWith(".gz") && !f.endsWith("/.keep"));
const listed = files
  .filter((f) => !f.endsWith("/sw.js"))
  .map((f) => [
    `/${relative(dist, f)}`,
    createHash("sha256").update(readFileSync(f)).digest("hex").slice(0, 16),
  ])
  .sort(([a], [b]) => (a < b ? -1 : 1));

const list = JSON.stringify(listed);
const version = createHash("sha256").update(list).digest("hex").slice(0, 12);
const worker = join(dist, "sw.js");
const text = readFileSync(worker, "utf8");
const done = text
  .replace(/(["'`])__FILES__\1/, () => `'${list}'`)
  .replace("__VERSION__", () => version);
if (done.includes("__FILES__") || done.includes("__VERSION__")) {
  throw new Error("sw.js still holds a placeholder");
}
writeFileSync(worker, done);

for (const f of [...files, worker]) {
  const raw = readFileSync(f);
  const packed = gzipSync(raw, { level: 9 });
  if (raw.length > 1024 && packed.length < raw.length * 0.9) writeFileSync(`${f}.gz`, packed);
}
writeFileSync(join(dist, ".keep"), "");
console.log(`${listed.length} files, version ${version}`);
