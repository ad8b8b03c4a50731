// Search: the plot, the leg being steered, one order. Before it begins, what
// would be searched and why.

import { signal } from "@preact/signals";
import { useEffect } from "preact/hooks";
import { Plot } from "../plot/plot";
import type { PlotUp } from "../plot/plot_view";
import { linkNow } from "../state/control";
import { pickFrame } from "../state/frames";
import * as m from "../state/model";
import { plotView } from "../state/plot_source";
import * as search from "../state/search";
import { finished, legView, type LegView, percent, proposalView, running } from "../state/search_view";
import type { Selection } from "../state/select";
import { track } from "../state/track";
import { commonNow } from "../sync/clock";
import { t } from "../text/text";
import { elapsed, rangeText } from "../units/format";
import type { Frame } from "../wire/frame";
import type { Search as Laid } from "../wire/search";
import { AssumeSheet } from "./assume";
import { Sign, Waiting } from "./ready";
import { Undo } from "./return";
import { ConditionsSheet, SearchMore } from "./search_sheets";

export type SearchSheet = "" | "conditions" | "assume" | "more";

/** The sheet over the words of this screen. */
export const sheet = signal<SearchSheet>("");
export const plotUp = signal<PlotUp>("north_up");

interface Props {
  selection: Selection;
  close: () => void;
}

export function Search({ selection, close }: Props) {
  const now = m.nowMs.value;
  const { held } = pickFrame(selection, m.serverFrames.value, m.ownFrame.value, now);
  const frame = held?.frame ?? null;
  const laid = running(selection.state);
  const leg = laid ? legOf(frame, laid) : null;
  useEffect(() => search.refresh(selection, frame), [now]);
  useEscape();
  const proposal = search.proposals.value[search.shown.value] ?? null;
  const view = plotView({
    selection, frame, proposal: proposal?.body ?? null, cloud: search.cloud.value, searched: search.searched.value,
    track: track(), up: plotUp.value, nowMs: commonNow(),
  });
  const back = () => {
    sheet.value = "";
    close();
  };
  return (
    <main class="search">
      <Top selection={selection} frame={frame} title={leg?.leg ?? (proposal && !laid ? proposalView(proposal).title : t("search.title"))} />
      <Plot view={view} />
      {sheet.value ? (
        <SheetOf selection={selection} frame={frame} back={back} />
      ) : laid ? (
        <Running selection={selection} frame={frame} laid={laid} leg={leg} back={back} />
      ) : (
        <Before selection={selection} back={back} />
      )}
    </main>
  );
}

function legOf(frame: Frame | null, laid: Laid): LegView | null {
  const leg = frame?.leg;
  if (!leg || leg.search !== laid.event) return null;
  return legView(leg, laid.legs[leg.leg - 1]?.length_m ?? 0, frame.variation_deg);
}

function useEscape(): void {
  useEffect(() => {
    const shut = (e: KeyboardEvent): void => {
      if (e.key === "Escape") sheet.value = "";
    };
    document.addEventListener("keydown", shut);
    return () => document.removeEventListener("keydown", shut);
  }, []);
}

function SheetOf({ selection, frame, back }: { selection: Selection; frame: Frame | null; back: () => void }) {
  const shut = () => (sheet.value = "");
  if (sheet.value === "conditions") return <ConditionsSheet selection={selection} frame={frame} close={shut} />;
  if (sheet.value === "assume") return <AssumeSheet selection={selection} frame={frame} close={shut} />;
  return <SearchMore selection={selection} frame={frame} close={shut} ring={back} open={(s) => (sheet.value = s)} up={plotUp} />;
}

function Top({ selection, frame, title }: { selection: Selection; frame: Frame | null; title: string }) {
  const link = linkNow();
  const fell = Date.parse(selection.mark?.fell_at ?? selection.state.opened_at);
  const stale = !frame?.fix || !!frame.fix.stale;
  return (
    <header class="top">
      <h1 class={title.length > 12 ? "elapsed search-title long" : "elapsed search-title"}>{title}</h1>
      <div class="chips">
        <p>{elapsed((commonNow() - fell) / 1000)} {t("search.since")}</p>
        <p class={`chip ${stale ? "warn" : link.level}`}>
          <Sign level={stale ? "warn" : link.level} /> {stale ? t(frame?.fix ? "search.fix_old" : "fix.none") : link.text}
        </p>
      </div>
      <Waiting />
    </header>
  );
}

/** Before it begins: the best plan and its reason; the other is a tap away. */
function Before({ selection, back }: { selection: Selection; back: () => void }) {
  const all = search.proposals.value;
  const at = search.shown.value;
  const p = all[at];
  const other = all[(at + 1) % Math.max(1, all.length)];
  const view = p ? proposalView(p) : null;
  return (
    <>
      <section class="words search-words">
        {finished(selection.state) && <p class="search-line">{t("search.finished")}</p>}
        {view ? (
          <>
            <p class="order">{view.first}</p>
            <p class="search-line">{view.size}. {view.coverage} {view.pod}</p>
            <p class="search-soft">{t("search.reason", { reason: view.reason })}</p>
            <p class="search-soft search-notes">{[view.width, ...view.notes].filter(Boolean).join(". ")}</p>
          </>
        ) : (
          <p class="order" role="status">{search.trouble.value ? t("search.none", { why: search.trouble.value }) : t("search.laying")}</p>
        )}
        <SearchedLine />
        <Undo />
      </section>
      <nav class="touch" aria-label={t("search.title")}>
        <button type="button" class="big saves" disabled={!p || search.busy.value} onClick={() => p && void search.begin(selection, p)}>{t("search.begin")}</button>
        {other && other !== p ? (
          <button type="button" class="big" onClick={() => (search.shown.value = (at + 1) % all.length)}>{t("search.other", { pattern: t(`search.pattern.${other.body.pattern}`) })}</button>
        ) : (
          <button type="button" class="big" onClick={() => (sheet.value = "conditions")}>{t("search.conditions")}</button>
        )}
        <Foot back={back} selection={selection} />
      </nav>
    </>
  );
}

function Running({ selection, frame, laid, leg, back }: { selection: Selection; frame: Frame | null; laid: Laid; leg: LegView | null; back: () => void }) {
  const seen = frame?.leg ?? null;
  const paused = laid.status === "paused";
  return (
    <>
      <section class="words search-words steady">
        <p class="leg-cross">{leg ? leg.cross : t("return.waiting")}</p>
        <p class={leg?.turnNow ? "leg-turn now" : "leg-turn"}>{leg?.turn}</p>
        {leg?.steer && !paused && (
          <p class="leg-steer">{t("search.steer")} <b>{leg.steer.figure}</b> <small>{leg.steer.unit}</small></p>
        )}
        {leg && !paused && <p class="leg-then">{leg.next}</p>}
        {paused && <p class="order">{t("search.paused_words", { leg: laid.leg })}</p>}
        {leg?.note && <p class="caution"><Sign level="warn" /> {leg.note}</p>}
        <SearchedLine />
        <Undo />
        <p class="unseen" role="status">{leg ? spoken(leg) : ""}</p>
      </section>
      <nav class="touch" aria-label={t("search.title")}>
        <button type="button" class="big" onClick={() => void search.seen(selection, seen).then(back)}>{t("act.see")}</button>
        {paused ? (
          <button type="button" class="big saves" onClick={() => void search.resume(selection)}>{t("search.resume")}</button>
        ) : (
          <button type="button" class="big" onClick={() => void search.pause(selection, seen)}>{t("search.pause")}</button>
        )}
        <Foot back={back} selection={selection} />
      </nav>
    </>
  );
}

function Foot({ back, selection }: { back: () => void; selection: Selection }) {
  const next = Math.max(0, ...selection.state.persons.map((p) => p.no), ...selection.state.marks.map((k) => k.person)) + 1;
  return (
    <>
      <button type="button" onClick={back}>{t("search.ring")}</button>
      <button type="button" onClick={() => (sheet.value = "assume")}>{t("search.assume")}</button>
      <button type="button" class="second" data-mark="person" data-person={next}>
        {t("mark.button")} <span>{t("mark.second")}</span>
      </button>
      <button type="button" onClick={() => (sheet.value = "more")}>{t("act.more")}</button>
    </>
  );
}

/** What was looked at. Never called a success, and never a reason to stop. */
function SearchedLine() {
  const s = search.searched.value;
  if (!s || s.run_m < 1) return null;
  const pod = s.pod === null ? "" : t("search.searched.pod", { pod: percent(s.pod) });
  return (
    <p class="search-soft">
      <b>{t("search.searched", { run: rangeText(s.run_m), area: area(s.swept_m2) })}</b> {pod} {t("search.searched.not_empty")}
    </p>
  );
}

/** Square nautical miles, two decimals below ten. */
const area = (m2: number): string => `${(m2 / 1852 ** 2).toFixed(m2 < 10 * 1852 ** 2 ? 2 : 0)} nm²`;

let said = { at: 0, text: "" };
/** For a screen reader: at most every ten seconds, and at once when it is time to turn. */
function spoken(leg: LegView): string {
  const now = Date.now();
  const text = [leg.leg, leg.steer ? `${t("search.steer")} ${leg.steer.figure} ${leg.steer.unit}` : "", leg.cross, leg.turn].filter(Boolean).join(". ");
  if (leg.turnNow || now - said.at >= 10_000) said = { at: now, text };
  return said.text;
}
