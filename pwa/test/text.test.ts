import { readdirSync, readFileSync, statSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { en } from "../src/text/en";

const src = new URL("../src", import.meta.url).pathname;
const go = (path: string) => readFileSync(new URL(`../../${path}`, import.meta.url), "utf8");

function files(folder: string): string[] {
  return readdirSync(folder).flatMap((f) => {
    const p = join(folder, f);
    return statSync(p).isDirectory() ? files(p) : [p];
  });
}

const sources = files(src).filter((f) => /\.tsx?$/.test(f) && !f.includes(".test.") && !f.includes("/text/"));
const all = sources.map((f) => readFileSync(f, "utf8")).join("\n");

describe("the catalogue", () => {
  const words = Object.entries(en);

  test("has words for every instruction of the engine", () => {
    const codes = [...go("search/advice/do.go").matchAll(/\bCode\s+= "(\w+)"/g)].map((m) => m[1]);
    expect(codes.length).toBeGreaterThan(5);
    for (const c of codes) expect(Object.keys(en), c).toContain(`do.${c}`);
  });

  test("has words for every caution of the engine", () => {
    const codes = [...go("search/advice/do.go").matchAll(/Caution\w+\s+= "(\w+)"/g)].map((m) => m[1]);
    expect(codes.length).toBeGreaterThan(10);
    for (const c of codes) expect(Object.keys(en), c).toContain(`caution.${c}`);
  });

  test("has words for every kind of event", () => {
    const kinds = [...go("search/incident/event.go").matchAll(/Kind\w+\s+Kind = "(\w+)"/g)].map((m) => m[1]);
    expect(kinds.length).toBeGreaterThan(20);
    for (const k of kinds) expect(Object.keys(en), k).toContain(`kind.${k}`);
  });

  test("holds no exclamation mark and no empty words", () => {
    for (const [key, text] of words) expect(text, key).toMatch(/^[^!]+$/);
  });

  test("holds no words that nobody shows", () => {
    // Keys built from parts (`do.${code}`) are reached by their prefix.
    const built = new Set([...all.matchAll(/`([a-z_.]+)\.\$\{/g)].map((m) => m[1]));
    const unused = words
      .map(([key]) => key)
      .filter((key) => !all.includes(`"${key}"`) && ![...built].some((p) => key.startsWith(`${p}.`)));
    expect(unused).toEqual([]);
  });
});
