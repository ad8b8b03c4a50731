import { describe, expect, test } from "vitest";
import { type Camera, drag, fitted, graticuleStep, nice, niceText, project, unproject, zoom } from "./camera";
import { Plane } from "./plane";

const size = { w: 390, h: 340 };

describe("camera", () => {
  const c: Camera = { centre: { x: 120, y: -40 }, mPerPx: 2.5, upDeg: 283 };

  test("a place and back", () => {
    for (const p of [{ x: 0, y: 0 }, { x: 500, y: -300 }, { x: -7, y: 900 }]) {
      const q = unproject(c, size)(project(c, size)(p));
      expect(q.x).toBeCloseTo(p.x, 6);
      expect(q.y).toBeCloseTo(p.y, 6);
    }
  });

  test("what lies in the up direction is above the middle", () => {
    const rad = (283 * Math.PI) / 180;
    const p = project(c, size)({ x: 120 + 250 * Math.sin(rad), y: -40 + 250 * Math.cos(rad) });
    expect(p.x).toBeCloseTo(size.w / 2, 6);
    expect(p.y).toBeCloseTo(size.h / 2 - 100, 6);
  });

  test("what was under two fingers stays under them, turned and pinched", () => {
    const from = [{ x: 100, y: 100 }, { x: 200, y: 120 }];
    const to = [{ x: 90, y: 150 }, { x: 150, y: 330 }];
    const next = drag(c, size, from, to);
    // Two points fix a turn, a scale and a shift: both are met.
  const places = from.map(unproject(c, size));
    const seen = places.map(project(next, size));
    for (const [i, p] of seen.entries()) {
      expect(p.x).toBeCloseTo(to[i]?.x ?? 0, 6);
      expect(p.y).toBeCloseTo(to[i]?.y ?? 0, 6);
    }
  });

  test("a pinch that twists a little does not turn the plot", () => {
    const next = drag(c, size, [{ x: 100, y: 100 }, { x: 200, y: 100 }], [{ x: 80, y: 95 }, { x: 220, y: 105 }]);
    expect(next.upDeg).toBe(283);
    expect(next.mPerPx).toBeLessThan(2.5);
  });

  test("zoom about a point leaves the point", () => {
    const about = { x: 40, y: 300 };
    const before = unproject(c, size)(about);
    const after = unproject(zoom(c, size, 0.5, about), size)(about);
    expect(after.x).toBeCloseTo(before.x, 6);
    expect(after.y).toBeCloseTo(before.y, 6);
  });

  test.each([0, 45, 283])("everything of interest is in sight with %d up", (up) => {
    const points = [{ x: 0, y: 0 }, { x: 1500, y: -900 }, { x: -200, y: 300 }];
    const f = fitted(points, up, size);
    for (const p of points.map(project(f, size))) {
      expect(p.x).toBeGreaterThanOrEqual(35);
      expect(p.x).toBeLessThanOrEqual(size.w - 35);
      expect(p.y).toBeGreaterThanOrEqual(35);
      expect(p.y).toBeLessThanOrEqual(size.h - 35);
    }
  });

  test("one point, or none, is shown near and not at no scale at all", () => {
    expect(fitted([{ x: 5, y: 5 }], 0, size).mPerPx).toBe(0.25);
    expect(fitted([], 0, size).centre).toEqual({ x: 0, y: 0 });
  });

  test("distances that are named are exact", () => {
    expect(niceText(nice(270))).toBe("200 m");
    expect(niceText(nice(371))).toBe("0.2 nm");
    expect(niceText(nice(1852))).toBe("1 nm");
    expect(niceText(nice(1))).toBe("5 m");
    expect(graticuleStep(1.4)).toBe(0.5);
  });
});

/** Distance on the WGS 84 ellipsoid by Vincenty's inverse formula (Survey Review XXIII, 1975), metres. */
function vincenty(lat1: number, lon1: number, lat2: number, lon2: number): number {
  const [a, f] = [6378137, 1 / 298.257223563];
  const b = a * (1 - f);
  const R = Math.PI / 180;
  const L = (lon2 - lon1) * R;
  const [u1, u2] = [Math.atan((1 - f) * Math.tan(lat1 * R)), Math.atan((1 - f) * Math.tan(lat2 * R))];
  const [s1, c1, s2, c2] = [Math.sin(u1), Math.cos(u1), Math.sin(u2), Math.cos(u2)];
  let l = L;
  let [ss, cs, sg, ca2, c2m] = [0, 0, 0, 0, 0];
  for (let i = 0; i < 50; i++) {
    ss = Math.hypot(c2 * Math.sin(l), c1 * s2 - s1 * c2 * Math.cos(l));
    cs = s1 * s2 + c1 * c2 * Math.cos(l);
    sg = Math.atan2(ss, cs);
    const sa = (c1 * c2 * Math.sin(l)) / ss;
    ca2 = 1 - sa * sa;
    c2m = ca2 === 0 ? 0 : cs - (2 * s1 * s2) / ca2;
    const C = (f / 16) * ca2 * (4 + f * (4 - 3 * ca2));
    l = L + (1 - C) * f * sa * (sg + C * ss * (c2m + C * cs * (-1 + 2 * c2m * c2m)));
  }
  const k2 = (ca2 * (a * a - b * b)) / (b * b);
  const A = 1 + (k2 / 16384) * (4096 + k2 * (-768 + k2 * (320 - 175 * k2)));
  const B = (k2 / 1024) * (256 + k2 * (-128 + k2 * (74 - 47 * k2)));
  const ds = B * ss * (c2m + (B / 4) * (cs * (-1 + 2 * c2m * c2m) - (B / 6) * c2m * (-3 + 4 * ss * ss) * (-3 + 4 * c2m * c2m)));
  return b * A * (sg - ds);
}

describe("plane", () => {
  test.each([0, 54.1, -35, 70])("distances from the origin at latitude %d are true to a thousandth within 60 nm", (lat) => {
    const plane = new Plane({ lat, lon: 7.9 });
    for (const [dLat, dLon] of [[1, 0], [0, 1], [0.7, 0.7], [-0.5, 0.9], [0.002, -0.001]] as const) {
      const lon = 7.9 + dLon / Math.cos((lat * Math.PI) / 180);
      const p = plane.at({ lat: lat + dLat, lon });
      const true_ = vincenty(lat, 7.9, lat + dLat, lon);
      expect(Math.abs(Math.hypot(p.x, p.y) - true_) / true_).toBeLessThan(0.001);
    }
  });

  test("a position and back, also over the antimeridian", () => {
    for (const origin of [{ lat: 54, lon: 8 }, { lat: -17, lon: 179.99 }]) {
      const plane = new Plane(origin);
      const p = plane.position({ x: 5000, y: -3000 });
      const back = plane.at(p);
      expect(back.x).toBeCloseTo(5000, 3);
      expect(back.y).toBeCloseTo(-3000, 3);
      expect(Math.abs(p.lon)).toBeLessThanOrEqual(180);
    }
  });
});
