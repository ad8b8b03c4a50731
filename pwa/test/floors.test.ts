// The page's folders and which may import which: screens -> state -> engine,
// sync, sense; the leaves import nothing of ours but leaves; boot carries
// nothing heavier than the outbox and the position sensor.

import { readdirSync, readFileSync, statSync } from "node:fs";
import { dirname, join, relative, resolve } from "node:path";
import { describe, expect, test } from "vitest";

const src = new URL("../src", import.meta.url).pathname;

const MAY: Record<string, string[]> = {
  wire: ["wire"],
  units: ["units", "wire"],
  text: ["text"],
  parts: ["parts", "units", "wire"],
  sync: ["sync", "wire"],
  sense: ["sense", "wire"],
  plot: ["plot", "parts", "units", "text", "wire"],
  engine: ["engine", "wire"],
  boot: ["boot", "sync", "sense", "wire", "screens/start"],
  state: ["state", "boot", "engine", "sync", "sense", "plot", "parts", "units", "text", "wire"],
  screens: ["screens", "boot", "state", "engine", "plot", "sense", "sync", "parts", "units", "text", "wire"],
  sw: [],
};

function files(folder: string): string[] {
  return readdirSync(folder).flatMap((f) => {
    const p = join(folder, f);
    return statSync(p).isDirectory() ? files(p) : [p];
  });
}

function imports(file: string): string[] {
  const text = readFileSync(file, "utf8");
  return [...text.matchAll(/(?:from|import\()\s*"(\.[^"]+)"/g)].map((m) => relative(src, resolve(dirname(file), m[1] as string)));
}

const sources = files(src).filter((f) => /\.tsx?$/.test(f) && !f.includes(".test."));

describe("floors", () => {
  test.each(sources.map((f) => relative(src, f)))("%s", (file) => {
    const folder = file.split("/")[0] as string;
    const may = MAY[folder];
    expect(may, `folder ${folder} has no rule`).toBeDefined();
    for (const target of imports(join(src, file))) {
      expect(may?.some((m) => target === m || target.startsWith(`${m}/`)), `${file} imports ${target}`).toBe(true);
    }
  });

  test("what boot loads before the button works is the outbox, the position and nothing heavier", () => {
    const seen = new Set<string>();
    const walk = (file: string): void => {
      if (seen.has(file)) return;
      seen.add(file);
      const text = readFileSync(file, "utf8").replace(/import\("[^"]+"\)/g, "");
      for (const m of text.matchAll(/^import (?!type)[^;]*? from "(\.[^"]+)"/gm)) walk(`${resolve(dirname(file), m[1] as string)}.ts`);
    };
    walk(join(src, "boot/boot.ts"));
    expect([...seen].map((f) => relative(src, f)).sort()).toEqual([
      "boot/boot.ts", "boot/mark.ts", "boot/press.ts", "sense/position.ts", "sync/canonical.ts",
      "sync/clock.ts", "sync/event.ts", "sync/outbox.ts", "sync/sha256.ts",
    ]);
  });
});
