// Gathers what the plot shows from the model.

import { Plane } from "../plot/plane";
import type { PlotLeg, PlotUp, PlotView } from "../plot/plot_view";
import type { Position } from "../wire/event";
import type { Frame } from "../wire/frame";
import type { LegLaid, SearchLaid } from "../wire/search";
import type { Cloud, Searched } from "../engine/search_calls";
import { utcMinute } from "../units/format";
import { legPieces, type LegPiece, rideM, running } from "./search_view";
import type { Selection } from "./select";

export interface PlotSources {
  selection: Selection;
  frame: Frame | null;
  /** A plan that could be begun; shown when nothing runs. */
  proposal: SearchLaid | null;
  cloud: Cloud | null;
  searched: Searched | null;
  track: readonly Position[];
  up: PlotUp;
  /** Common clock. */
  nowMs: number;
}

/** The plot's view. */
export function plotView(s: PlotSources): PlotView {
  const { frame, selection } = s;
  const fix = frame?.fix ?? null;
  const search = running(selection.state);
  const plan = search ?? s.proposal;
  const pieces = search ? legPieces(search) : (s.proposal?.legs ?? []).map((l, i) => whole(l, i));
  const width = plan?.sweep_width_nm ?? selection.state.searches?.at(-1)?.sweep_width_nm ?? 0;
  return {
    own: fix && {
      at: fix.position,
      headingDeg: frame?.heading_source === "course" ? null : (frame?.heading_deg ?? null),
      cogDeg: fix.cog_deg,
      sogKn: fix.sog_kn,
      stale: !!fix.stale,
    },
    track: s.track,
    mark: selection.mark?.place?.position ?? frame?.mark?.position ?? null,
    datum: frame?.datum ? { at: frame.datum.position, errorM: frame.datum.error_m } : null,
    cloud: s.cloud,
    legs: plan ? placed(plan, pieces, s.nowMs) : [],
    runs: s.searched?.runs ?? [],
    widthM: width * 1852,
    sightings: (selection.state.sightings ?? []).flatMap((x) =>
      x.observer && x.bearing_deg != null
        ? [{ at: x.observer, bearingDeg: x.bearing_deg, rangeM: x.range_m ?? null, word: `${x.what ?? ""} ${utcMinute(Date.parse(x.at))}`.trim() }]
        : []),
    others: [],
    up: s.up,
    courseDeg: frame?.leg?.course_deg ?? (search ? null : plan?.legs[0]?.course_deg) ?? fix?.cog_deg ?? null,
  };
}

const whole = (l: LegLaid, i: number): LegPiece => ({ leg: i + 1, style: "todo", from: 0, to: 1, cross: l.kind === "cross" });

/** The legs where they lie now: they ride with the datum. */
function placed(plan: SearchLaid, pieces: LegPiece[], nowMs: number): PlotLeg[] {
  const plane = new Plane(plan.datum);
  const ride = rideM(plan, nowMs);
  return pieces.flatMap((p) => {
    const laid = plan.legs[p.leg - 1];
    if (!laid) return [];
    const at = (share: number): Position =>
      plane.position({
        x: laid.from.east_m + (laid.to.east_m - laid.from.east_m) * share + ride.east_m,
        y: laid.from.north_m + (laid.to.north_m - laid.from.north_m) * share + ride.north_m,
      });
    return [{ leg: p.leg, style: p.style, cross: p.cross, from: at(p.from), to: at(p.to) }];
  });
}
