// Contrast of the palettes, from the style sheet itself. WCAG 2.2, success
// criteria 1.4.3 (AA text 4.5:1), 1.4.6 (AAA 7:1) and 1.4.11 (shapes 3:1).

import { readFileSync } from "node:fs";
import { describe, expect, test } from "vitest";

const css = readFileSync(new URL("../src/boot/boot.css", import.meta.url), "utf8");

type Palette = Record<string, string>;

function block(selector: string): Palette {
  const at = css.indexOf(`${selector} {`);
  const body = css.slice(at, css.indexOf("}", at));
  return Object.fromEntries([...body.matchAll(/--([\w-]+): (#[0-9a-f]{6});/g)].map((m) => [m[1], m[2]]));
}

const palettes: Record<string, Palette> = {
  night: block(":root"),
  dusk: { ...block(":root"), ...block(':root[data-palette="dusk"]') },
  day: { ...block(":root"), ...block(':root[data-palette="day"]') },
};

const channels = (hex: string): [number, number, number] =>
  [1, 3, 5].map((i) => Number.parseInt(hex.slice(i, i + 2), 16)) as [number, number, number];

/** Relative luminance and contrast ratio as WCAG 2.2 defines them. */
function luminance(hex: string): number {
  const [r, g, b] = channels(hex).map((c) => {
    const s = c / 255;
    return s <= 0.04045 ? s / 12.92 : ((s + 0.055) / 1.055) ** 2.4;
  }) as [number, number, number];
  return 0.2126 * r + 0.7152 * g + 0.0722 * b;
}

function contrast(a: string, b: string): number {
  const [hi, lo] = [luminance(a), luminance(b)].sort((x, y) => y - x) as [number, number];
  return (hi + 0.05) / (lo + 0.05);
}

describe.each(Object.entries(palettes))("%s", (name, p) => {
  const pair = (a: string, b: string): number => contrast(p[a] as string, p[b] as string);

  test.each([["ink", "ground"], ["ink", "raised"], ["soft", "ground"], ["on-mark", "mark"], ["on-person", "person"], ["ink", "pressed"]])(
    "text %s on %s reaches AA", (a, b) => expect(pair(a, b)).toBeGreaterThanOrEqual(4.5));

  test.each([["person", "ground"], ["person", "raised"], ["sea", "ground"], ["done", "ground"], ["alarm", "ground"], ["mark-line", "ground"], ["line", "ground"]])(
    "shape %s on %s reaches 3:1", (a, b) => {
      // The lines of ordinary touches at night are kept dim on purpose: their words carry them.
      const wanted = name === "night" && a === "line" ? 2 : 3;
      expect(pair(a, b)).toBeGreaterThanOrEqual(wanted);
    });

  if (name === "day") test("the sentence and the figures reach AAA", () => expect(pair("ink", "ground")).toBeGreaterThanOrEqual(7));

  if (name === "night") {
    test("nothing is white and nothing is blue", () => {
      for (const [key, hex] of Object.entries(p)) {
        const [r, g, b] = channels(hex);
        expect(b, key).toBeLessThanOrEqual(Math.max(70, r / 2));
        expect(Math.min(r, g, b), key).toBeLessThan(128);
      }
    });
  }
});
