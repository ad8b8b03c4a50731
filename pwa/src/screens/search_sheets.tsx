// The sheets of the search screen: conditions, and more. They lie over the
// words and the touches, never over the plot.

import type { Signal } from "@preact/signals";
import type { ComponentChildren } from "preact";
import { useState } from "preact/hooks";
import { HoldButton, TwoStep } from "../parts/hold";
import { Legend } from "../plot/plot";
import type { PlotUp } from "../plot/plot_view";
import { conditions, type Stated, typed } from "../state/conditions";
import * as search from "../state/search";
import { proposalView, running } from "../state/search_view";
import type { Selection } from "../state/select";
import { t } from "../text/text";
import { speed } from "../units/format";
import type { Frame } from "../wire/frame";
import type { SearchSheet } from "./search";

export function SearchSheetOf({ title, lead, close, children }: { title: string; lead?: string; close: () => void; children: ComponentChildren }) {
  return (
    <div class="sheet-place search-sheet">
      <section class="sheet" role="dialog" aria-label={title}>
        <header class="sheet-top">
          <h2>{title}</h2>
          <button type="button" onClick={close}>{t("search.close")}</button>
        </header>
        {lead && <p>{lead}</p>}
        {children}
      </section>
    </div>
  );
}

interface SheetProps {
  selection: Selection;
  frame: Frame | null;
  close: () => void;
}

/** Stated is underlined, as everything that a person typed; assumed says so. */
function Value({ word, value, said }: { word: string; value: string; said: boolean }) {
  return <p>{word}: <b class={said ? "typed" : ""}>{value}</b> {!said && t("search.assumed")}</p>;
}

const VISIBILITY = [1, 3, 5, 10] as const;
const SEA = [0.5, 1, 2, 3] as const;

export function ConditionsSheet({ selection, frame, close }: SheetProps) {
  const said = search.stated.value;
  const now = conditions(said, { windKn: frame?.datum?.wind_kn ?? null, light: search.light.value });
  const set = (change: Stated) => () => search.state(selection, frame, change);
  const choice = <K extends keyof Stated>(key: K, value: Stated[K], word: string) => (
    <button type="button" key={word} aria-pressed={now[key as keyof typeof now] === value || said[key] === value} onClick={set({ [key]: value })}>{word}</button>
  );
  return (
    <SearchSheetOf title={t("search.conditions")} lead={t("search.conditions.lead")} close={close}>
      <Value word={t("search.speed")} value={speed(now.speed_kn)} said={said.speed_kn !== undefined} />
      <div class="grid three">
        <button type="button" onClick={set({ speed_kn: Math.max(1, now.speed_kn - 1) })}>{t("search.slower")}</button>
        <button type="button" onClick={set({ speed_kn: Math.min(40, now.speed_kn + 1) })}>{t("search.faster")}</button>
      </div>
      <Notes />
      <Value word={t("search.visibility")} value={`${now.visibility_nm} nm`} said={said.visibility_nm !== undefined} />
      <div class="grid four">{VISIBILITY.map((v) => choice("visibility_nm", v, `${v} nm`))}</div>
      <Value word={t("search.sea")} value={`${now.sea_m} m`} said={said.sea_m !== undefined} />
      <div class="grid four">{SEA.map((v) => choice("sea_m", v, `${v} m`))}</div>
      <Value word={t("search.light")} value={t(now.night ? "search.night" : "search.day")} said={said.night !== undefined} />
      <div class="grid">{choice("night", false, t("search.day"))}{choice("night", true, t("search.night"))}</div>
      <Value word={t("search.crew")} value={t(now.tired ? "search.tired" : "search.rested")} said={said.tired !== undefined} />
      <div class="grid">{choice("tired", false, t("search.rested"))}{choice("tired", true, t("search.tired"))}</div>
      <Lookouts n={said.lookouts} set={(n) => search.state(selection, frame, { lookouts: n })} />
      <p>{t("search.first_into")}</p>
      <div class="grid">{choice("first_into", "into_wind", t("search.into_wind"))}{choice("first_into", "down_drift", t("search.down_drift"))}</div>
    </SearchSheetOf>
  );
}

/** What the plan rests on, for whom the words of the screen have no room. */
function Notes() {
  const p = search.proposals.value[search.shown.value];
  if (!p) return null;
  const { size, width, notes } = proposalView(p);
  return <>{[size, width, ...notes].filter(Boolean).map((x) => <p key={x}>{x}</p>)}</>;
}

function Lookouts({ n, set }: { n: number | undefined; set: (n: number) => void }) {
  const [text, setText] = useState(n === undefined ? "" : String(n));
  return (
    <form class="field" onSubmit={(e) => { e.preventDefault(); const v = typed(text, 0, 99); if (v !== null) set(Math.round(v)); }}>
      <label>
        {t("search.lookouts")}
        <input type="text" inputMode="numeric" value={text} onInput={(e) => setText(e.currentTarget.value)} />
      </label>
      <button type="submit">{t("when.set")}</button>
    </form>
  );
}

const UPS = ["north_up", "course_up", "head_up"] as const;

export function SearchMore({ selection, frame, close, ring, open, up }: SheetProps & { ring: () => void; open: (s: SearchSheet) => void; up: Signal<PlotUp> }) {
  const laid = running(selection.state);
  const leg = frame?.leg ?? null;
  const last = laid && laid.leg === laid.legs.length;
  return (
    <SearchSheetOf title={t("act.more")} close={close}>
      {laid && (
        <div class="grid">
          <button type="button" onClick={() => void search.advance(selection, leg, "run").then(close)}>{t(last ? "search.ran_last" : "search.next")}</button>
          <button type="button" onClick={() => void search.advance(selection, leg, "skipped").then(close)}>{t("search.skip")}</button>
        </div>
      )}
      <div class="grid">
        <button type="button" onClick={() => open("conditions")}>{t("search.conditions")}</button>
        <button type="button" onClick={ring}>{t("search.ring")}</button>
      </div>
      <h3>{t("plot.title")}</h3>
      <div class="grid three">
        {UPS.map((u) => <button type="button" key={u} aria-pressed={up.value === u} onClick={() => (up.value = u)}>{t(`plot.${u}`)}</button>)}
      </div>
      <Legend />
      <p class="search-soft">{t("plot.flat")}</p>
      {laid && (
        <>
          <h3>{t("search.drop")}</h3>
          <p>{t("search.drop_lead")}</p>
          <HoldButton word={t("search.drop_hold")} done={() => void search.drop(selection, leg).then(close)} />
          <TwoStep first={t("search.drop")} second={t("search.drop_yes")} keep={t("down.keep")} done={() => void search.drop(selection, leg).then(close)} />
        </>
      )}
    </SearchSheetOf>
  );
}
