// The picture: own vessel in the middle of a plain compass ring, the wedge of
// directions in which the person lies, where it happened (hollow cross, still)
// and where to look now (filled disc with its halo). To scale, so the wedge
// touches the halo.

import type { RingView } from "./ring_view";

/** Radius of the rim in drawing units; the drawing is 226 wide. */
const R = 100;

interface Props {
  view: RingView;
  words: { north: string; wind: string; drift: string };
}

export function Ring({ view, words }: Props) {
  const scale = R / view.radiusM;
  return (
    <svg class={view.stale ? "ring stale" : "ring"} viewBox="-113 -113 226 226" role="img" aria-label={view.text}>
      <defs>
        <pattern id="hatch" width="7" height="7" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">
          <rect class="hatch-line" width="3" height="7" />
        </pattern>
        <clipPath id="rim">
          <circle r={R} />
        </clipPath>
      </defs>
      <circle class="rim" r={R} />
      <g clip-path="url(#rim)">
        {view.wedge && <path class="wedge" d={wedgePath(view.wedge.centreDeg, view.wedge.halfDeg, R)} />}
        {view.disc && (
          <circle class="halo" {...at(view.disc.angleDeg, view.disc.rangeM * scale)} r={Math.max(9, view.disc.errorM * scale)} />
        )}
        {view.stale && view.wedge && (
          <path fill="url(#hatch)" d={wedgePath(view.wedge.centreDeg, view.wedge.halfDeg, R)} />
        )}
      </g>
      <Ticks northDeg={view.northDeg} word={words.north} />
      {view.driftDeg !== null && <RimMark deg={view.driftDeg} kind="drift" word={words.drift} />}
      {view.windDeg !== null && <RimMark deg={view.windDeg} kind="wind" word={words.wind} />}
      <path class="own" d="M0 -13 C5 -6 6 0 5 10 L-5 10 C-6 0 -5 -6 0 -13 Z" transform={`rotate(${view.northDeg + view.headingDeg})`} />
      {view.disc && <circle class="disc" {...at(view.disc.angleDeg, view.disc.rangeM * scale)} r="10" />}
      {/* The cross is hollow, so that the disc is seen through it where both are in one place. */}
      {view.cross && <Cross {...xy(view.cross.angleDeg, view.cross.rangeM * scale)} />}
    </svg>
  );
}

/** Ticks each 30 degrees, a longer one and its letter at north. */
function Ticks({ northDeg, word }: { northDeg: number; word: string }) {
  const north = xy(northDeg, R - 15);
  return (
    <g class="ticks">
      {Array.from({ length: 12 }, (_, i) => i * 30).map((deg) => (
        <line key={deg} x1="0" x2="0" y1={-R} y2={deg === 0 ? -R + 7 : -R + 4} transform={`rotate(${northDeg + deg})`} />
      ))}
      <text x={north.x} y={north.y} dy="0.35em">{word}</text>
    </g>
  );
}

/** A small mark on the rim: wind blows in from it, drift goes out to it. */
function RimMark({ deg, kind, word }: { deg: number; kind: "wind" | "drift"; word: string }) {
  const label = xy(deg, R + 12);
  // Beside the mark, never under it.
  const anchor = label.x > 30 ? "start" : label.x < -30 ? "end" : "middle";
  // Pointing inward for what comes, outward for what goes.
  const d = kind === "wind" ? `M-6 ${-R - 7} L6 ${-R - 7} L0 ${-R + 5} Z` : `M-6 ${-R + 3} L6 ${-R + 3} L0 ${-R - 8} Z`;
  return (
    <g class={`rim-mark ${kind}`}>
      <path d={d} transform={`rotate(${deg})`} />
      <text x={label.x} y={label.y} dy="0.35em" style={{ textAnchor: anchor }}>{word}</text>
    </g>
  );
}

/** The hollow cross of where it happened. */
export function Cross({ x, y }: { x: number; y: number }) {
  const d = "M-3.5 -11 H3.5 V-3.5 H11 V3.5 H3.5 V11 H-3.5 V3.5 H-11 V-3.5 H-3.5 Z";
  return (
    <g transform={`translate(${x.toFixed(1)} ${y.toFixed(1)})`}>
      <path class="cross-case" d={d} />
      <path class="cross" d={d} />
    </g>
  );
}

/** The two shapes beside their words. */
export function Shape({ kind }: { kind: "disc" | "cross" }) {
  return (
    <svg class="shape" viewBox="-13 -13 26 26" aria-hidden="true">
      {kind === "disc" ? (
        <>
          <circle class="halo" r="11" />
          <circle class="disc" r="7" />
        </>
      ) : (
        <Cross x={0} y={0} />
      )}
    </svg>
  );
}

/** Screen place of a direction (clockwise from up) and a distance. */
export function xy(deg: number, r: number): { x: number; y: number } {
  const rad = (deg * Math.PI) / 180;
  return { x: r * Math.sin(rad), y: -r * Math.cos(rad) };
}

const at = (deg: number, r: number): { cx: number; cy: number } => {
  const { x, y } = xy(deg, r);
  return { cx: x, cy: y };
};

/** The outline of a wedge about a direction; half an angle of 180 is the whole disc. */
export function wedgePath(centreDeg: number, halfDeg: number, r: number): string {
  if (halfDeg >= 179.9) return `M0 ${-r} A${r} ${r} 0 1 1 0 ${r} A${r} ${r} 0 1 1 0 ${-r} Z`;
  // A sliver thinner than a line would not be seen.
  const half = Math.max(1.5, halfDeg);
  const a = xy(centreDeg - half, r);
  const b = xy(centreDeg + half, r);
  const large = half > 90 ? 1 : 0;
  return `M0 0 L${a.x.toFixed(2)} ${a.y.toFixed(2)} A${r} ${r} 0 ${large} 1 ${b.x.toFixed(2)} ${b.y.toFixed(2)} Z`;
}
