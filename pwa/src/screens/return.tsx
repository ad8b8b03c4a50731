// Return: one picture, one sentence, a handful of figures, and what a thumb
// needs in the next minutes.

import { Ring, Shape } from "../parts/ring";
import * as act from "../state/actions";
import { linkNow } from "../state/control";
import { pickFrame } from "../state/frames";
import * as m from "../state/model";
import { type ReturnView, type Thing, returnView } from "../state/return_view";
import { nextPerson, type Selection } from "../state/select";
import { commonNow } from "../sync/clock";
import { isKey, type Key, t } from "../text/text";
import { rangeText, utcTime } from "../units/format";
import type { Frame } from "../wire/frame";
import { Sign, Waiting } from "./ready";
import { SearchTouch } from "./search_door";
import { Sheets } from "./sheets";
import { useSenses } from "./senses";

export function Return({ selection }: { selection: Selection }) {
  const now = m.nowMs.value;
  const shown = pickFrame(selection, m.serverFrames.value, m.ownFrame.value, now);
  const view = returnView({
    frame: shown.held?.frame ?? null,
    frameAgeS: shown.held ? Math.max(0, (now - shown.held.gotMs) / 1000) : 0,
    selection,
    nowMs: commonNow(),
    ringUp: m.ringUp.value,
    phoneMagDeg: phonePoints(now),
  });
  useSenses(shown.held?.frame ?? null, view);
  return (
    <main class="return">
      <Top view={view} selection={selection} own={shown.from === "phone"} />
      <div class="picture">
        <Ring
          view={view.ring}
          words={{ north: t("return.north"), wind: t("return.wind"), drift: t("return.drift") }}
        />
        <p class="picture-up">{view.ring.up}</p>
        {selection.person?.status !== "aboard" && (
          <SearchTouch selection={selection} loud={looksFor(selection, shown.held?.frame ?? null)} />
        )}
        {view.ring.disc && (
          <p class="picture-scale">{t("return.ring_scale", { range: rangeText(view.ring.radiusM) })}</p>
        )}
      </div>
      <Words view={view} />
      <Touch selection={selection} />
      <Sheets selection={selection} />
    </main>
  );
}

/** Looking is the thing to do: near enough to see all round, or seen and lost again. */
function looksFor({ person, state }: Selection, frame: Frame | null): boolean {
  const lost = (state.sightings ?? []).some((s) => s.lost && (s.person ?? 1) === person?.no);
  return frame?.do.code === "look_all_round" || (lost && !person?.in_sight);
}

/** A compass that fell silent is not believed for longer: our choice, as for the vessel's. */
const COMPASS_FRESH_MS = 3_000;

function phonePoints(nowMs: number): number | null {
  const heading = m.phoneHeading.value.heading;
  return heading && nowMs - heading.at_ms <= COMPASS_FRESH_MS ? heading.mag_deg : null;
}

function Top({ view, selection, own }: { view: ReturnView; selection: Selection; own: boolean }) {
  const link = linkNow();
  return (
    <header class="top">
      <h1 class="elapsed">
        {view.elapsed} <small>{t("return.since")}</small>
      </h1>
      <div class="chips">
        <p class={`chip ${link.level}`}>
          <Sign level={link.level} /> {link.text}
        </p>
        <p class={view.fix.stale ? "chip warn" : "chip ok"}>
          <Sign level={view.fix.stale ? "warn" : "ok"} /> {view.fix.text}
        </p>
      </div>
      {/* Alone says already whose guidance it is. */}
      {own && link.fresh && <p class="top-more">{t("link.engine")}</p>}
      <Waiting />
      <People selection={selection} />
    </header>
  );
}

/** One touch per person, where there is more than one. */
function People({ selection: { state, person } }: { selection: Selection }) {
  if (state.persons.length < 2) return null;
  return (
    <div class="people">
      {state.persons.map((p) => (
        <button
          type="button"
          key={p.no}
          aria-pressed={p.no === person?.no}
          onClick={() => (m.chosen.value = { incident: state.id, person: p.no })}
        >
          {t(p.no === person?.no ? "return.steering" : "return.person", { n: p.no, status: t(`people.short.${p.status}`) })}
        </button>
      ))}
    </div>
  );
}

function Words({ view }: { view: ReturnView }) {
  return (
    <section class="words">
      <div class="main-figures">
        {view.range && (
          <p class="range">
            {view.range.figure} <small>{view.range.unit}</small>
          </p>
        )}
        {view.direction && <p class="direction">{view.direction}</p>}
      </div>
      <p class="order">{view.order}</p>
      {(view.bearing || view.speed) && (
        <p class="bearing">{[view.bearing, view.speed].filter(Boolean).join(" · ")}</p>
      )}
      <ThingLine kind="disc" thing={view.look} />
      <ThingLine kind="cross" thing={view.happened} />
      {view.cautions.length > 0 && (
        <p class="caution">
          <Sign level="warn" /> {view.cautions[0]}
          {view.cautions.length > 1 && <span class="caution-more"> {view.cautions[1]}</span>}
        </p>
      )}
      <Undo />
      <p class="unseen" role="status">{spoken(view)}</p>
    </section>
  );
}

/** For a screen reader: at most every ten seconds, or it never stops talking. */
let said = { at: 0, text: "" };
function spoken(view: ReturnView): string {
  const now = m.nowMs.value;
  if (now - said.at >= 10_000) {
    const range = view.range ? `${view.range.figure} ${view.range.unit}` : "";
    said = { at: now, text: [view.order, view.direction, range].filter(Boolean).join(". ") };
  }
  return said.text;
}

function ThingLine({ kind, thing }: { kind: "disc" | "cross"; thing: Thing }) {
  return (
    <p class={`thing ${kind}-line`}>
      <Shape kind={kind} />
      <span>
        <b>{thing.word}</b> <span class={thing.typed ? "typed" : ""}>{thing.detail}</span>
      </span>
    </p>
  );
}

/** How long the undo of the last entry stays in reach; it is in the log for ever. Our choice. */
const UNDO_MS = 10_000;

/** The last entry can be taken back, for a while in one touch. */
export function Undo() {
  const last = m.lastAct.value;
  if (!last?.undoable || m.nowMs.value - last.ms > UNDO_MS) return null;
  const what = isKey(last.key) ? t(last.key as Key) : last.key;
  return (
    <div class="undo" role="status">
      <span>{t("act.done", { time: utcTime(commonNow() - (m.nowMs.value - last.ms)), what })}</span>
      <button type="button" onClick={() => void act.undo({ id: last.id })}>
        {t("act.undo", { what })}
      </button>
    </div>
  );
}

function Touch({ selection }: { selection: Selection }) {
  const open = (s: m.Sheet) => () => (m.sheet.value = s);
  return (
    <nav class="touch" aria-label={t("return.title")}>
      <Big selection={selection} />
      <button type="button" onClick={open("when")}>{t(selection.mark?.place ? "act.when" : "act.where")}</button>
      <button type="button" onClick={open("call")}>{t("act.call")}</button>
      <button type="button" class="second" data-mark="person" data-person={nextPerson(selection.state)}>
        {t("mark.button")} <span>{t("mark.second")}</span>
      </button>
      <button type="button" onClick={open("more")}>{t("act.more")}</button>
    </nav>
  );
}

/** The two big touches: what comes next for this person. */
function Big({ selection }: { selection: Selection }) {
  const status = selection.person?.status;
  const all = selection.state.persons.every((p) => p.status === "aboard");
  if (status === "aboard") {
    return (
      <>
        <button type="button" class="big" onClick={() => (m.sheet.value = all ? "down" : "more")}>
          {all ? t("down.first") : t("act.more")}
        </button>
        <button type="button" class="big" onClick={() => (m.sheet.value = "aboard")}>{t("people.how")}</button>
      </>
    );
  }
  if (status === "alongside" || status === "attached") {
    return (
      <>
        <button type="button" class="big saves" onClick={() => (m.sheet.value = "aboard")}>{t("act.aboard")}</button>
        <button type="button" class="big" onClick={() => void act.parted(selection)}>{t("people.parted")}</button>
      </>
    );
  }
  return (
    <>
      {selection.person?.in_sight ? (
        <button type="button" class="big" onClick={() => void act.lostSight(selection)}>{t("act.lost")}</button>
      ) : (
        <button type="button" class="big" onClick={() => void act.seen(selection)}>{t("act.see")}</button>
      )}
      <button type="button" class="big" onClick={() => void act.alongside(selection)}>{t("act.alongside")}</button>
    </>
  );
}
