// The plot: a chart of nothing but what this search knows, drawn here, with no
// tiles and no network. It moves by fingers, wheel and keys.

import { useEffect, useMemo, useRef, useState } from "preact/hooks";
import { Cross } from "../parts/ring";
import { t } from "../text/text";
import { type Camera, drag, fitted, type Size, zoom } from "./camera";
import { Layers } from "./layers";
import { Plane, type XY } from "./plane";
import { anchor, ofInterest, type PlotView, plotText, upOf } from "./plot_view";
import type { Position } from "../wire/event";

/** A plane is left for another this far out: within it the picture is true to a line's width. */
const REACH_M = 60 * 1852;

/** The plane stays while it serves, so that a hand-moved plot does not jump. */
function usePlane(origin: Position | null): Plane | null {
  const kept = useRef<Plane | null>(null);
  if (!origin) return kept.current;
  const far = kept.current?.at(origin);
  if (!far || Math.hypot(far.x, far.y) > REACH_M) kept.current = new Plane(origin);
  return kept.current;
}

export function Plot({ view }: { view: PlotView }) {
  const box = useRef<HTMLDivElement>(null);
  const size = useSize(box);
  const plane = usePlane(anchor(view));
  const [hand, setHand] = useState<Camera | null>(null);
  const up = upOf(view);
  const camera = useMemo(() => (plane ? (hand ?? settle(fitted(ofInterest(view, plane), up.deg, size))) : null), [plane, hand, view, up.deg, size]);
  const current = useRef(camera);
  current.current = camera;
  useGestures(box, size, current, setHand);
  const by = (factor: number) => () => camera && setHand(zoom(camera, size, factor));
  return (
    // biome-ignore lint/a11y/noNoninteractiveTabindex: the plot is moved by keys, so it takes the focus.
    // biome-ignore lint/a11y/useSemanticElements: a fieldset is for a form; this is a picture with its touches.
    <div class="plot" ref={box} tabIndex={0} role="group" aria-label={t("plot.title")} onKeyDown={(e) => keys(e, camera, size, setHand)}>
      <svg class="plot-picture" viewBox={`0 0 ${size.w} ${size.h}`} width={size.w} height={size.h} role="img" aria-label={plotText(view)}>
        {plane && camera && <Layers view={view} plane={plane} camera={camera} size={size} />}
      </svg>
      <p class="plot-up">{hand ? t("plot.by_hand") : up.words}</p>
      <div class="plot-touch">
        <button type="button" class="plot-key" onClick={by(1 / 1.5)}>{t("plot.nearer")}</button>
        <button type="button" class="plot-key" onClick={by(1.5)}>{t("plot.wider")}</button>
        {hand && <button type="button" onClick={() => setHand(null)}>{t("plot.fit")}</button>}
      </div>
    </div>
  );
}

/** The centre in steps of pixels, so that the picture rests between them. */
const REST_PX = 32;

function settle(c: Camera): Camera {
  const by = REST_PX * c.mPerPx;
  return { ...c, centre: { x: Math.round(c.centre.x / by) * by, y: Math.round(c.centre.y / by) * by } };
}

function useSize(box: { current: HTMLDivElement | null }): Size {
  const [size, setSize] = useState<Size>({ w: 340, h: 340 });
  useEffect(() => {
    if (!box.current) return;
    const seen = new ResizeObserver(([e]) => {
      const r = e?.contentRect;
      if (r && r.width > 0 && r.height > 0) setSize({ w: Math.round(r.width), h: Math.round(r.height) });
    });
    seen.observe(box.current);
    return () => seen.disconnect();
  }, []);
  return size;
}

type SetHand = (c: Camera) => void;

function useGestures(box: { current: HTMLDivElement | null }, size: Size, camera: { current: Camera | null }, set: SetHand): void {
  const sizeNow = useRef(size);
  sizeNow.current = size;
  useEffect(() => {
    const el = box.current;
    if (!el) return;
    const down = new Map<number, { from: XY; now: XY }>();
    let began: Camera | null = null;
    const place = (e: MouseEvent): XY => {
      const r = el.getBoundingClientRect();
      return { x: e.clientX - r.left, y: e.clientY - r.top };
    };
    /** Each finger that comes or goes begins the gesture anew. */
    const begin = (): void => {
      began = camera.current;
      for (const p of down.values()) p.from = p.now;
    };
    const pressed = (e: PointerEvent): void => {
      if ((e.target as Element).closest("button")) return;
      el.setPointerCapture(e.pointerId);
      down.set(e.pointerId, { from: place(e), now: place(e) });
      begin();
    };
    const moved = (e: PointerEvent): void => {
      const p = down.get(e.pointerId);
      if (!p || !began) return;
      p.now = place(e);
      const all = [...down.values()].slice(0, 2);
      const far = all.some((q) => Math.hypot(q.now.x - q.from.x, q.now.y - q.from.y) > 4);
      if (far) set(drag(began, sizeNow.current, all.map((q) => q.from), all.map((q) => q.now)));
    };
    const lifted = (e: PointerEvent): void => {
      if (down.delete(e.pointerId)) begin();
    };
    const wheel = (e: WheelEvent): void => {
      e.preventDefault();
      if (camera.current) set(zoom(camera.current, sizeNow.current, 1.0015 ** e.deltaY, place(e)));
    };
    el.addEventListener("pointerdown", pressed);
    el.addEventListener("pointermove", moved);
    el.addEventListener("pointerup", lifted);
    el.addEventListener("pointercancel", lifted);
    el.addEventListener("wheel", wheel, { passive: false });
    return () => {
      el.removeEventListener("pointerdown", pressed);
      el.removeEventListener("pointermove", moved);
      el.removeEventListener("pointerup", lifted);
      el.removeEventListener("pointercancel", lifted);
      el.removeEventListener("wheel", wheel);
    };
  }, []);
}

/** Pixels and degrees to one key. */
const KEY_PX = 40;
const KEY_DEG = 15;

function keys(e: KeyboardEvent, c: Camera | null, size: Size, set: SetHand): void {
  if (!c || e.ctrlKey || e.metaKey || e.altKey) return;
  const move = (x: number, y: number) => drag(c, size, [{ x: 0, y: 0 }], [{ x, y }]);
  const next: Record<string, () => Camera> = {
    ArrowUp: () => move(0, KEY_PX),
    ArrowDown: () => move(0, -KEY_PX),
    ArrowLeft: () => move(KEY_PX, 0),
    ArrowRight: () => move(-KEY_PX, 0),
    "+": () => zoom(c, size, 1 / 1.5),
    "-": () => zoom(c, size, 1.5),
    "[": () => ({ ...c, upDeg: (c.upDeg + 360 - KEY_DEG) % 360 }),
    "]": () => ({ ...c, upDeg: (c.upDeg + KEY_DEG) % 360 }),
  };
  const make = next[e.key];
  if (!make) return;
  e.preventDefault();
  set(make());
}

/** The styles, each with its word. */
export function Legend() {
  const lines = ["now", "done", "todo", "left_out"] as const;
  return (
    <ul class="legend">
      {lines.map((style) => (
        <li key={style}>
          <svg viewBox="0 0 44 24" aria-hidden="true">
            <path class={`leg ${style}`} d="M2 12 H42" />
            {style === "done" && <path class="leg done-core" d="M2 12 H42" />}
            {style === "now" && <path class="leg-head" d="M42 12 L31 5 V19 Z" />}
          </svg>
          {t(`plot.legend.${style}`)}
        </li>
      ))}
      <li><svg viewBox="0 0 44 24" aria-hidden="true"><path class="own-track" d="M2 18 C14 2 28 22 42 6" /></svg>{t("plot.legend.track")}</li>
      <li><svg viewBox="0 0 44 24" aria-hidden="true"><path class="swath" stroke-width="18" d="M2 12 H42" /></svg>{t("plot.legend.swath")}</li>
      <li><svg viewBox="-22 -12 44 24" aria-hidden="true"><circle class="halo" r="11" /><circle class="disc" r="6" /></svg>{t("return.look")}</li>
      <li><svg viewBox="-22 -12 44 24" aria-hidden="true"><Cross x={0} y={0} /></svg>{t("return.happened")}</li>
      <li><svg viewBox="0 0 44 24" aria-hidden="true"><rect class="region most" x="2" y="2" width="40" height="20" rx="9" /><rect class="region half" x="12" y="6" width="20" height="12" rx="6" /></svg>{t("plot.legend.cloud")}</li>
    </ul>
  );
}
