import { describe, expect, test } from "vitest";
import { headingOf } from "./heading";

const event = (over: object) => ({ alpha: null, beta: 0, gamma: 0, absolute: true, ...over });

describe("headingOf", () => {
  // Alpha runs counter-clockwise: W3C Device Orientation, section 4.1.
  test.each([
    ["flat, top to the north", { alpha: 0 }, 0],
    ["flat, top to the east", { alpha: 270 }, 90],
    ["flat, top to the west", { alpha: 90 }, 270],
    ["upright, back to the north", { alpha: 0, beta: 90 }, 0],
    ["upright, back to the east", { alpha: 270, beta: 90 }, 90],
    ["tilted as one reads it, east", { alpha: 270, beta: 45 }, 90],
    ["leaning back over upright, south", { alpha: 180, beta: 100 }, 180],
  ])("%s", (_what, over, want) => expect(headingOf(event(over), 0)).toBeCloseTo(want, 6));

  test("the way the screen is turned is added", () => {
    expect(headingOf(event({ alpha: 0 }), 90)).toBeCloseTo(90, 6);
  });

  test("a relative angle is no direction", () => {
    expect(headingOf(event({ alpha: 40, absolute: false }), 0)).toBeNull();
    expect(headingOf(event({ alpha: null }), 0)).toBeNull();
  });

  test("a compass that says itself that it is invalid is not believed", () => {
    expect(headingOf(event({ webkitCompassHeading: 40, webkitCompassAccuracy: -1 }), 0)).toBeNull();
    expect(headingOf(event({ webkitCompassHeading: 350, webkitCompassAccuracy: 15 }), 90)).toBe(80);
  });
});
