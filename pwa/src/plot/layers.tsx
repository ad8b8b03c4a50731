// The layers of the plot, from the water up.

import { Cross } from "../parts/ring";
import { bearing } from "../units/format";
import type { Position } from "../wire/event";
import { type Camera, graticuleStep, nice, niceText, project, type Size, unproject } from "./camera";
import type { Plane, XY } from "./plane";
import type { PlotLeg, PlotView } from "./plot_view";

interface Props {
  view: PlotView;
  plane: Plane;
  camera: Camera;
  size: Size;
}

export function Layers({ view, plane, camera, size }: Props) {
  const flat = project(camera, size);
  const on = (p: Position): XY => flat(plane.at(p));
  const px = (m: number): number => m / camera.mPerPx;
  return (
    <>
      <Graticule plane={plane} camera={camera} size={size} />
      {view.runs.length > 0 && <path class="swath" stroke-width={Math.max(3, px(view.widthM))} d={pieces(view.runs, on)} />}
      <CloudLayer view={view} on={on} />
      {view.datum && <circle class="halo" {...at(on(view.datum.at))} r={Math.max(9, px(view.datum.errorM))} />}
      <Rings view={view} on={on} camera={camera} size={size} />
      <Legs legs={view.legs} on={on} />
      <path class="own-track" d={line(view.track.map(on))} />
      {view.sightings.map((s) => <Sighting key={s.word} sighting={s} on={on} px={px} camera={camera} size={size} />)}
      {view.others.map((o) => (
        <g key={o.word} class="other" transform={shift(on(o.at))}>
          <path d="M0 -7 L6 6 H-6 Z" />
          <text x="9" dy="0.35em">{o.word}</text>
        </g>
      ))}
      {view.datum && <circle class="disc" {...at(on(view.datum.at))} r="8" />}
      {view.mark && <Cross {...on(view.mark)} />}
      <RingWords view={view} on={on} camera={camera} size={size} />
      <Own view={view} on={on} px={px} camera={camera} size={size} />
      <Scale camera={camera} size={size} />
      <North camera={camera} size={size} />
    </>
  );
}

const n1 = (x: number): string => x.toFixed(1);
const shift = ({ x, y }: XY): string => `translate(${n1(x)} ${n1(y)})`;
const at = ({ x, y }: XY): { cx: string; cy: string } => ({ cx: n1(x), cy: n1(y) });
const line = (points: XY[]): string => points.map((p, i) => `${i === 0 ? "M" : "L"}${n1(p.x)} ${n1(p.y)}`).join("");
const pieces = (runs: [Position, Position][], on: (p: Position) => XY): string => runs.map(([a, b]) => line([on(a), on(b)])).join("");

/** Where the person may be: half of the cloud inside the inner line, 95 in 100 inside the outer. */
function CloudLayer({ view, on }: { view: PlotView; on: (p: Position) => XY }) {
  if (!view.cloud) return null;
  const dots = (view.cloud.points ?? []).map((p) => {
    const { x, y } = on(p);
    return `M${n1(x)} ${n1(y)}h0`;
  });
  return (
    <g>
      {(view.cloud.regions ?? []).map((r) => (
        <path key={r.share} class={r.share > 0.9 ? "region most" : "region half"} fill-rule="evenodd" d={(r.rings ?? []).map((ring) => `${line(ring.map(on))}Z`).join("")} />
      ))}
      <path class="cloud-dots" d={dots.join("")} />
    </g>
  );
}

/** Three kinds of line and their words: done, being steered, to do; and what was left out. */
function Legs({ legs, on }: { legs: PlotLeg[]; on: (p: Position) => XY }) {
  const of = (style: PlotLeg["style"]): string => legs.filter((l) => l.style === style).map((l) => line([on(l.from), on(l.to)])).join("");
  // Of a plan that has not begun, the first leg has the head: it shows the way.
  const now = legs.findLast((l) => l.style === "now") ?? (legs.every((l) => l.style === "todo") ? legs[0] : undefined);
  return (
    <g>
      <path class="leg left_out" d={of("left_out")} />
      <path class="leg todo" d={of("todo")} />
      <path class="leg done" d={of("done")} />
      <path class="leg done-core" d={of("done")} />
      <path class="leg now" d={of("now")} />
      {now && <Head from={on(now.from)} to={on(now.to)} />}
      {legs.filter((l) => l.style === "todo" || l.style === "now").slice(0, 4).map((l) => {
        const a = on(l.from);
        const b = on(l.to);
        if (Math.hypot(b.x - a.x, b.y - a.y) < 40) return null;
        return <text key={l.leg} class="leg-no" x={n1((a.x + b.x) / 2)} y={n1((a.y + b.y) / 2)} dy="0.35em">{l.leg}</text>;
      })}
    </g>
  );
}

function Head({ from, to }: { from: XY; to: XY }) {
  const deg = (Math.atan2(to.y - from.y, to.x - from.x) * 180) / Math.PI;
  return <path class="leg-head" d="M0 0 L-12 -7 V7 Z" transform={`${shift(to)} rotate(${n1(deg)})`} />;
}

interface RingProps {
  view: PlotView;
  on: (p: Position) => XY;
  camera: Camera;
  size: Size;
}

/** Two rings about the own vessel, of a distance that is said. */
function ringsOf({ view, on, camera, size }: RingProps): { c: XY; radii: { r: number; m: number }[] } | null {
  const middle = view.own?.at ?? view.datum?.at;
  if (!middle) return null;
  const each = nice((Math.min(size.w, size.h) / 2.2) * camera.mPerPx);
  return { c: on(middle), radii: [1, 2].map((k) => ({ r: (each * k) / camera.mPerPx, m: each * k })) };
}

function Rings(props: RingProps) {
  const rings = ringsOf(props);
  return rings && <g class="range-rings">{rings.radii.map(({ r, m }) => <circle key={m} {...at(rings.c)} r={n1(r)} />)}</g>;
}

/** Their words lie over the legs, aslant of the vessel. */
function RingWords(props: RingProps) {
  const rings = ringsOf(props);
  return (
    rings && (
      <g class="range-rings">
        {rings.radii.map(({ r, m }) => (
          <text key={m} x={n1(rings.c.x + r * Math.SQRT1_2)} y={n1(rings.c.y + r * Math.SQRT1_2)} dy="0.35em">{niceText(m)}</text>
        ))}
      </g>
    )
  );
}

/** Own vessel as an outline with its heading line, and the course made good as a broken vector: IMO SN/Circ.243 (from memory). */
function Own({ view, on, px, camera, size }: { view: PlotView; on: (p: Position) => XY; px: (m: number) => number; camera: Camera; size: Size }) {
  const own = view.own;
  if (!own) return null;
  const heading = own.headingDeg ?? own.cogDeg;
  const vectorM = own.sogKn === null ? 0 : own.sogKn * VECTOR_NM_PER_KN * 1852;
  return (
    <g class={own.stale ? "own-ship stale" : "own-ship"} transform={shift(on(own.at))}>
      {own.headingDeg !== null && <line class="heading-line" y1="-14" y2={n1(-Math.hypot(size.w, size.h))} transform={`rotate(${n1(own.headingDeg - camera.upDeg)})`} />}
      {own.cogDeg !== null && px(vectorM) > 16 && <line class="course-line" y2={n1(-px(vectorM))} transform={`rotate(${n1(own.cogDeg - camera.upDeg)})`} />}
      {heading === null ? (
        <><circle r="9" /><circle r="4" /></>
      ) : (
        <path d="M0 -15 C6 -7 7 0 6 12 L-6 12 C-7 0 -6 -7 0 -15 Z" transform={`rotate(${n1(heading - camera.upDeg)})`} />
      )}
    </g>
  );
}

/** The vector reaches as far as two minutes of running: our choice. */
const VECTOR_NM_PER_KN = 2 / 60;

function Sighting({ sighting: s, on, px, camera, size }: { sighting: PlotView["sightings"][number]; on: (p: Position) => XY; px: (m: number) => number; camera: Camera; size: Size }) {
  const a = on(s.at);
  const r = s.rangeM === null ? Math.hypot(size.w, size.h) : px(s.rangeM);
  const rad = ((s.bearingDeg - camera.upDeg) * Math.PI) / 180;
  const at50 = Math.min(r, 70);
  return (
    <g class="sighting">
      <line x1={n1(a.x)} y1={n1(a.y)} x2={n1(a.x + r * Math.sin(rad))} y2={n1(a.y - r * Math.cos(rad))} />
      <text x={n1(a.x + at50 * Math.sin(rad) + 6)} y={n1(a.y - at50 * Math.cos(rad))}>{`${s.word} ${bearing(s.bearingDeg)}`}</text>
    </g>
  );
}

function Scale({ camera, size }: { camera: Camera; size: Size }) {
  const m = nice(110 * camera.mPerPx);
  const w = m / camera.mPerPx;
  const y = size.h - 10;
  return (
    <g class="scale">
      <path d={`M10 ${y - 6}V${y}H${n1(10 + w)}V${y - 6}`} />
      <text x={n1(16 + w)} y={y}>{niceText(m)}</text>
    </g>
  );
}

function North({ camera, size }: { camera: Camera; size: Size }) {
  return (
    <g class="north" transform={`translate(${size.w - 24} 28) rotate(${n1(-camera.upDeg)})`}>
      <path d="M0 -18 L6 -4 H-6 Z" />
      <text y="10" transform={`rotate(${n1(camera.upDeg)} 0 5)`}>N</text>
    </g>
  );
}

/** Light lines of latitude and longitude, named at the left and the bottom edge. */
function Graticule({ plane, camera, size }: { plane: Plane; camera: Camera; size: Size }) {
  const back = unproject(camera, size);
  const corners = [{ x: 0, y: 0 }, { x: size.w, y: 0 }, { x: 0, y: size.h }, { x: size.w, y: size.h }].map((p) => plane.position(back(p)));
  const flat = project(camera, size);
  const o = plane.origin;
  // Longitudes as differences from the origin, so that the antimeridian is no edge.
  const lats = corners.map((p) => p.lat * 60);
  const lons = corners.map((p) => (((p.lon - o.lon + 540) % 360) - 180) * 60);
  const step = graticuleStep(Math.max(spread(lats), spread(lons)));
  const base = o.lon * 60;
  const parallels = multiples(Math.min(...lats), Math.max(...lats), step).filter((l) => Math.abs(l) < 90 * 60);
  const meridians = multiples(Math.min(...lons) + base, Math.max(...lons) + base, step);
  const on = (latMin: number, lonMin: number): XY => flat(plane.at({ lat: latMin / 60, lon: lonMin / 60 }));
  const [s, n, w, e] = [Math.min(...lats), Math.max(...lats), Math.min(...lons) + base, Math.max(...lons) + base];
  return (
    <g class="graticule">
      {parallels.map((l) => (
        <g key={`p${l}`}><path d={line([on(l, w), on(l, e)])} /><Name at={edge(on(l, w), on(l, e), size)} text={name(l, 2, "N", "S", step)} /></g>
      ))}
      {meridians.map((l) => (
        <g key={`m${l}`}><path d={line([on(s, l), on(n, l)])} /><Name at={edge(on(s, l), on(n, l), size)} text={name(wrap(l), 3, "E", "W", step)} /></g>
      ))}
    </g>
  );
}

function Name({ at: p, text }: { at: XY | null; text: string }) {
  return p && <text x={n1(p.x)} y={n1(p.y)}>{text}</text>;
}

const spread = (a: number[]): number => Math.max(...a) - Math.min(...a);
const wrap = (min: number): number => ((((min + 10800) % 21600) + 21600) % 21600) - 10800;

function multiples(from: number, to: number, step: number): number[] {
  const first = Math.ceil(from / step - 1e-9);
  return Array.from({ length: Math.min(12, Math.max(0, Math.floor(to / step + 1e-9) - first + 1)) }, (_, i) => (first + i) * step);
}

/** Where along a line its name stands: the first place inside the picture, clear of the corners' own words. */
function edge(a: XY, b: XY, size: Size): XY | null {
  for (let i = 0; i <= 40; i++) {
    const p = { x: a.x + ((b.x - a.x) * i) / 40, y: a.y + ((b.y - a.y) * i) / 40 };
    if (p.x >= 4 && p.x <= size.w - 90 && p.y >= 60 && p.y <= size.h - 34) return { x: p.x + 2, y: p.y - 3 };
  }
  return null;
}

/** 54°06.05'N, with as many decimals as the step needs. */
function name(min: number, digits: number, plus: string, minus: string, step: number): string {
  const abs = Math.round(Math.abs(min) * 100) / 100;
  const d = Math.floor(abs / 60);
  const decimals = step < 0.1 ? 2 : step < 1 ? 1 : 0;
  const rest = (abs - d * 60).toFixed(decimals).padStart(decimals ? 3 + decimals : 2, "0");
  return `${String(d).padStart(digits, "0")}°${rest}'${min < 0 ? minus : plus}`;
}
