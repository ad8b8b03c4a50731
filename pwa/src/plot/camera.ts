// Where the plot looks: a centre, a scale and which way is up.

import { short, type XY } from "./plane";

export interface Camera {
  /** In the middle of the picture. */
  centre: XY;
  /** Metres to a pixel. */
  mPerPx: number;
  /** The direction that is up, degrees true. */
  upDeg: number;
}

export interface Size {
  w: number;
  h: number;
}

/** A metre to 4 px, and 200 m to one: beyond, nothing is told apart. Our choice. */
export const NEAREST = 0.25;
export const WIDEST = 200;

/** Places on the screen, x to the right and y down from the top left corner. */
export function project(c: Camera, size: Size): (p: XY) => XY {
  const rad = (c.upDeg * Math.PI) / 180;
  const [sin, cos] = [Math.sin(rad), Math.cos(rad)];
  return ({ x, y }) => {
    const [e, n] = [x - c.centre.x, y - c.centre.y];
    return { x: size.w / 2 + (e * cos - n * sin) / c.mPerPx, y: size.h / 2 - (e * sin + n * cos) / c.mPerPx };
  };
}

/** The place under a point of the screen. */
export function unproject(c: Camera, size: Size): (p: XY) => XY {
  const rad = (c.upDeg * Math.PI) / 180;
  const [sin, cos] = [Math.sin(rad), Math.cos(rad)];
  return ({ x, y }) => {
    const [right, up] = [(x - size.w / 2) * c.mPerPx, (size.h / 2 - y) * c.mPerPx];
    return { x: c.centre.x + right * cos + up * sin, y: c.centre.y - right * sin + up * cos };
  };
}

/** Two fingers that pinch also twist a little; less than this is no turn. Our choice. */
const TURNS_FROM_DEG = 12;

/** Two fingers, or one: what was under them stays under them. */
export function drag(c: Camera, size: Size, from: XY[], to: XY[]): Camera {
  const [a, b] = [middle(from), middle(to)];
  let next = c;
  if (from.length > 1 && to.length > 1) {
    const [f, t] = [between(from), between(to)];
    const by = short(turn(t.deg - f.deg));
    const turned = Math.abs(by) >= TURNS_FROM_DEG ? by : 0;
    if (f.r > 1 && t.r > 1) next = { ...c, mPerPx: clamp((c.mPerPx * f.r) / t.r), upDeg: turn(c.upDeg - turned) };
  }
  const under = unproject(c, size)(a);
  const now = unproject(next, size)(b);
  return { ...next, centre: { x: next.centre.x + under.x - now.x, y: next.centre.y + under.y - now.y } };
}

/** Nearer (below 1) or wider (above 1), about a point of the screen. */
export function zoom(c: Camera, size: Size, by: number, about: XY = { x: size.w / 2, y: size.h / 2 }): Camera {
  const next = { ...c, mPerPx: clamp(c.mPerPx * by) };
  const under = unproject(c, size)(about);
  const now = unproject(next, size)(about);
  return { ...next, centre: { x: c.centre.x + under.x - now.x, y: c.centre.y + under.y - now.y } };
}

/** The scales that the plot takes by itself, so that it jumps rarely instead of creeping always: our choice. */
const STEP = Math.SQRT2;

/** Everything of interest in sight, with a margin in pixels. */
export function fitted(points: XY[], upDeg: number, size: Size, marginPx = 36): Camera {
  const rad = (upDeg * Math.PI) / 180;
  const turned = points.map(({ x, y }) => ({ x: x * Math.cos(rad) - y * Math.sin(rad), y: x * Math.sin(rad) + y * Math.cos(rad) }));
  const [x0, x1, y0, y1] = [least(turned, "x"), most(turned, "x"), least(turned, "y"), most(turned, "y")];
  const need = Math.max((x1 - x0) / Math.max(1, size.w - 2 * marginPx), (y1 - y0) / Math.max(1, size.h - 2 * marginPx), NEAREST);
  const mPerPx = clamp(NEAREST * STEP ** Math.ceil(Math.log(need / NEAREST) / Math.log(STEP) - 1e-9));
  const [mx, my] = [(x0 + x1) / 2, (y0 + y1) / 2];
  return { centre: { x: mx * Math.cos(rad) + my * Math.sin(rad), y: -mx * Math.sin(rad) + my * Math.cos(rad) }, mPerPx, upDeg };
}

const least = (p: XY[], k: "x" | "y"): number => p.reduce((m, q) => Math.min(m, q[k]), p[0]?.[k] ?? 0);
const most = (p: XY[], k: "x" | "y"): number => p.reduce((m, q) => Math.max(m, q[k]), p[0]?.[k] ?? 0);
const clamp = (m: number): number => Math.min(WIDEST, Math.max(NEAREST, m));
const turn = (deg: number): number => ((deg % 360) + 360) % 360;

function middle(p: XY[]): XY {
  return { x: p.reduce((s, q) => s + q.x, 0) / p.length, y: p.reduce((s, q) => s + q.y, 0) / p.length };
}

function between(p: XY[]): { r: number; deg: number } {
  const [a, b] = [p[0] as XY, p[1] as XY];
  return { r: Math.hypot(b.x - a.x, b.y - a.y), deg: (Math.atan2(b.y - a.y, b.x - a.x) * 180) / Math.PI };
}

const M_PER_NM = 1852; // international nautical mile, 1929

/** Distances that a scale bar or a ring may stand for: metres near, miles from a fifth of a mile on. */
const NICE_M = [5, 10, 20, 50, 100, 200, 0.2 * M_PER_NM, 0.5 * M_PER_NM, M_PER_NM, 2 * M_PER_NM, 5 * M_PER_NM, 10 * M_PER_NM, 20 * M_PER_NM, 50 * M_PER_NM];

/** The largest of them within so many metres. */
export function nice(m: number): number {
  return NICE_M.findLast((n) => n <= m) ?? (NICE_M[0] as number);
}

/** "50 m", "0.5 nm": exact, as these distances are. */
export function niceText(m: number): string {
  return m < 0.2 * M_PER_NM ? `${m} m` : `${Number((m / M_PER_NM).toFixed(1))} nm`;
}

/** Minutes of arc between the lines of the graticule. */
const MINUTES = [0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 30, 60];

export function graticuleStep(spanMin: number): number {
  return MINUTES.find((s) => spanMin / s <= 3.5) ?? 60;
}
