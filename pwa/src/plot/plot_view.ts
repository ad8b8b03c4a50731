// What the plot shows, and the same in words for whoever cannot see it.

import { t } from "../text/text";
import * as f from "../units/format";
import type { Position } from "../wire/event";
import { Plane, type XY } from "./plane";

/** How a leg is drawn, one style and one word each. */
export type LegStyle = "done" | "now" | "todo" | "left_out";

/** Where the person may be. */
export interface PlotCloud {
  r50_m: number;
  r95_m: number;
  regions: { share: number; rings: Position[][] | null }[] | null;
  points: Position[] | null;
}

export type PlotUp = "north_up" | "course_up" | "head_up";

export interface PlotLeg {
  leg: number;
  style: LegStyle;
  cross: boolean;
  from: Position;
  to: Position;
}

export interface PlotView {
  own: { at: Position; headingDeg: number | null; cogDeg: number | null; sogKn: number | null; stale: boolean } | null;
  track: readonly Position[];
  mark: Position | null;
  datum: { at: Position; errorM: number } | null;
  cloud: PlotCloud | null;
  legs: PlotLeg[];
  /** Water that was looked at: pieces of track and how wide was looked. */
  runs: [Position, Position][];
  widthM: number;
  /** Lines along which something was seen. */
  sightings: { at: Position; bearingDeg: number; rangeM: number | null; word: string }[];
  others: { at: Position; word: string }[];
  up: PlotUp;
  /** What course-up turns by: the leg's course, else the course made good. */
  courseDeg: number | null;
}

/** The direction that is up and its words; north where the chosen one is not known. */
export function upOf(v: PlotView): { deg: number; words: string } {
  if (v.up === "course_up" && v.courseDeg !== null) return { deg: v.courseDeg, words: t("plot.course_up") };
  const heading = v.own?.headingDeg ?? null;
  if (v.up === "head_up" && heading !== null) return { deg: heading, words: t("return.head_up") };
  if (v.up === "head_up") return { deg: 0, words: t("return.no_heading") };
  return { deg: 0, words: v.up === "north_up" ? t("return.north_up") : t("plot.no_course") };
}

/** What has to be in sight: the leg being steered and the next, or all of a plan; the person; the vessel. */
export function ofInterest(v: PlotView, plane: Plane): XY[] {
  const now = v.legs.find((l) => l.style === "now")?.leg;
  const legs = now === undefined ? v.legs : v.legs.filter((l) => l.leg === now || l.leg === now + 1);
  const points = legs.flatMap((l) => [plane.at(l.from), plane.at(l.to)]);
  if (v.own) points.push(plane.at(v.own.at));
  if (v.datum) {
    const { x, y } = plane.at(v.datum.at);
    // With legs to steer the halo may reach out of sight; alone it is what there is to see.
    const r = legs.length > 0 ? 0 : v.datum.errorM;
    points.push({ x: x - r, y: y - r }, { x: x + r, y: y + r });
  }
  if (v.mark && legs.length === 0) points.push(plane.at(v.mark));
  return points;
}

/** The origin of the plane: anything that is known, the person's place first. */
export function anchor(v: PlotView): Position | null {
  return v.datum?.at ?? v.mark ?? v.legs[0]?.from ?? v.own?.at ?? null;
}

/** Bearing and distance on the plane, for words only. */
function from(a: XY, b: XY): { deg: number; m: number } {
  return { deg: (Math.atan2(b.x - a.x, b.y - a.y) * 180) / Math.PI, m: Math.hypot(b.x - a.x, b.y - a.y) };
}

/** The plot in words. */
export function plotText(v: PlotView): string {
  const origin = anchor(v);
  if (!origin) return t("plot.nothing");
  const plane = new Plane(origin);
  const said = [upOf(v).words];
  if (v.own) {
    const own = plane.at(v.own.at);
    const to = (key: "plot.text.look" | "plot.text.mark", p: Position): void => {
      const { deg, m } = from(own, plane.at(p));
      said.push(t(key, { range: f.rangeText(m), bearing: f.bearing(deg) }));
    };
    if (v.datum) to("plot.text.look", v.datum.at);
    if (v.mark) to("plot.text.mark", v.mark);
  } else said.push(t("plot.text.no_own"));
  if (v.datum) said.push(t("plot.text.within", { error: f.errorText(v.datum.errorM) }));
  if (v.cloud) said.push(t("plot.text.cloud", { half: f.rangeText(v.cloud.r50_m), most: f.rangeText(v.cloud.r95_m) }));
  said.push(...legWords(v.legs));
  return `${said.join(". ")}.`;
}

function legWords(legs: PlotLeg[]): string[] {
  const count = (style: LegStyle): number => new Set(legs.filter((l) => l.style === style).map((l) => l.leg)).size;
  const styles = ["done", "now", "todo", "left_out"] as const;
  return styles.filter((s) => count(s) > 0).map((s) => t(`plot.text.${s}`, { n: count(s) }));
}
