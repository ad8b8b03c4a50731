import { describe, expect, test } from "vitest";
import * as f from "./format";

describe("range", () => {
  test.each([
    [0, "0 m"], [7.4, "7 m"], [99.4, "99 m"], [99.6, "100 m"], [217, "220 m"], [370, "370 m"],
    [371, "0.20 nm"], [1852, "1.00 nm"], [18500, "9.99 nm"], [18520, "10.0 nm"], [185200, "100 nm"],
  ])("%s m is %s", (m, text) => expect(f.rangeText(m)).toBe(text));
});

describe("errorText", () => {
  // An error is never rounded to less than it is.
  test.each([[3, "5 m"], [61, "65 m"], [121, "130 m"], [1853, "1.1 nm"]])("%s m is %s", (m, text) =>
    expect(f.errorText(m)).toBe(text));
});

describe("directions", () => {
  test.each([[0, "000"], [7.4, "007"], [359.6, "000"], [-1, "359"]])("%s is %s", (deg, text) =>
    expect(f.bearing(deg)).toBe(text));
  test.each([
    [-40, "port", 40], [42, "starboard", 40], [2.4, "ahead", 0], [-178, "astern", 180], [320, "port", 40],
  ])("%s is to %s", (deg, side, whole) => expect(f.relative(deg)).toEqual({ side, deg: whole }));
});

describe("times", () => {
  test.each([[0, "00:00:00"], [192.9, "00:03:12"], [86_399, "23:59:59"], [90_061, "1 d 01:01:01"], [-3, "00:00:00"]])(
    "%s s is %s", (s, text) => expect(f.elapsed(s)).toBe(text));
  test.each([[0.4, "0 s"], [95, "95 s"], [100, "2 min"], [3_900, "65 min"], [7_500, "2 h 05 min"]])(
    "%s s is %s", (s, text) => expect(f.duration(s)).toBe(text));
});

describe("position", () => {
  test.each([
    [54.1, 7.9, "54°06.000'N 007°54.000'E"],
    [-33.858333, 151.215, "33°51.500'S 151°12.900'E"],
    [59.99999999, -0.0000001, "60°00.000'N 000°00.000'E"],
  ])("%s, %s", (lat, lon, text) => expect(f.position({ lat, lon })).toBe(text));
});
