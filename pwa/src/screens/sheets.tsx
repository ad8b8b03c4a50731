// The sheets of the return screen. They lie over the words and the touches,
// never over the picture.

import type { ComponentChildren } from "preact";
import { useState } from "preact/hooks";
import { HoldButton, TwoStep } from "../parts/hold";
import * as act from "../state/actions";
import * as m from "../state/model";
import type { Selection } from "../state/select";
import { commonNow } from "../sync/clock";
import { t } from "../text/text";
import { duration, position, utcTime } from "../units/format";
import type { Mark } from "../wire/frame";
import { Palettes } from "./setup";

export function Sheets({ selection }: { selection: Selection }) {
  const sheet = sheetOf(selection);
  return sheet && <div class="sheet-place">{sheet}</div>;
}

function sheetOf(selection: Selection) {
  switch (m.sheet.value) {
    case "when":
      return <When selection={selection} />;
    case "call":
      return <CallSheet selection={selection} />;
    case "more":
      return <More selection={selection} />;
    case "aboard":
      return <Aboard selection={selection} />;
    case "down":
      return <Down selection={selection} />;
    default:
      return isAsked(selection) ? <Asked selection={selection} /> : null;
  }
}

const close = (): void => {
  m.sheet.value = "";
  act.trouble.value = "";
};

function Sheet({ title, lead, children }: { title: string; lead?: string; children: ComponentChildren }) {
  return (
    <section class="sheet" role="dialog" aria-label={title}>
      <header class="sheet-top">
        <h2>{title}</h2>
        <button type="button" onClick={close}>{t("act.close")}</button>
      </header>
      {lead && <p>{lead}</p>}
      {children}
    </section>
  );
}

const BACK_S = [10, 30, 60, 120];

function When({ selection }: { selection: Selection }) {
  const mark = selection.mark;
  const [time, setTime] = useState("");
  const [where, setWhere] = useState("");
  if (!mark) return null;
  const closeIf = (ok: boolean) => ok && close();
  return (
    <Sheet title={t("when.title")} lead={t("when.lead")}>
      <div class="grid">
        {BACK_S.map((s) => (
          <button type="button" key={s} onClick={() => void act.moveBack(selection, mark, s).then(closeIf)}>
            {t("when.back", { back: s < 60 ? `${s} s` : `${s / 60} min` })}
          </button>
        ))}
      </div>
      {mark.adjusted && (
        <button type="button" onClick={() => void act.moveBack(selection, mark, 0).then(closeIf)}>{t("when.press")}</button>
      )}
      {act.trouble.value && <p class="trouble" role="alert">{act.trouble.value}</p>}
      <form class="field" onSubmit={(e) => { e.preventDefault(); void act.moveToTime(selection, mark, time).then(closeIf); }}>
        <label>
          {t("when.time")}
          <input type="text" inputMode="numeric" placeholder={utcTime(Date.parse(mark.fell_at)).slice(0, 5)} value={time} onInput={(e) => setTime(e.currentTarget.value)} />
        </label>
        <button type="submit">{t("when.set")}</button>
      </form>
      <form class="field" onSubmit={(e) => { e.preventDefault(); void act.moveToPosition(selection, mark, where).then(closeIf); }}>
        <label>
          {t("when.position")}
          <input type="text" placeholder={t("when.position_hint")} value={where} onInput={(e) => setWhere(e.currentTarget.value)} />
        </label>
        <button type="submit">{t("when.set")}</button>
      </form>
    </Sheet>
  );
}

function CallSheet({ selection }: { selection: Selection }) {
  const calls = selection.state.calls ?? [];
  const last = calls.at(-1);
  const age = last ? duration((commonNow() - Date.parse(last.at)) / 1000) : "";
  const done = (p: Promise<unknown>) => void p.then(close);
  return (
    <Sheet title={t("call.title")} lead={t("call.caution")}>
      <p><b>{t("call.lead")}</b> {last ? t(last.answered ? "call.last_answered" : "call.last", { age }) : t("call.none")}</p>
      <div class="grid">
        <button type="button" onClick={() => done(act.callMade(selection, "distress"))}>{t("call.made")}</button>
        <button type="button" onClick={() => done(act.callAnswered(selection))}>{t("call.answered")}</button>
        <button type="button" onClick={() => done(act.callMade(selection, "urgency"))}>{t("call.urgency")}</button>
        <button type="button" onClick={() => done(act.callMade(selection, "cancel"))}>{t("call.cancelled")}</button>
      </div>
      <Positions selection={selection} />
    </Sheet>
  );
}

/** The person first, with its time, then where to look, then the vessel: never one for the other. */
function Positions({ selection }: { selection: Selection }) {
  const frame = m.ownFrame.value?.frame ?? null;
  const mark = selection.mark;
  const fix = m.vesselFix.value ?? m.phoneFix.value;
  return (
    <dl class="positions">
      {mark?.place && (
        <>
          <dt>{t("call.person_at", { time: utcTime(Date.parse(mark.fell_at)) })}</dt>
          <dd class={mark.place.source === "typed" ? "typed" : ""}>{position(mark.place.position)}</dd>
        </>
      )}
      {frame?.datum && (
        <>
          <dt>{t("call.look_at")}</dt>
          <dd>{position(frame.datum.position)}</dd>
        </>
      )}
      {fix && (
        <>
          <dt>{t("call.here")}</dt>
          <dd>{position(fix.position)}</dd>
        </>
      )}
    </dl>
  );
}

const CONDITIONS = ["well", "conscious", "unconscious", "not_breathing", "never_left"] as const;

function Aboard({ selection }: { selection: Selection }) {
  return (
    <Sheet title={`${t("people.title", { n: selection.person?.no ?? 1 })}: ${t("people.how")}`}>
      <div class="grid">
        {CONDITIONS.map((c) => (
          <button type="button" key={c} onClick={() => void act.aboard(selection, c).then(close)}>{t(`cond.${c}`)}</button>
        ))}
      </div>
    </Sheet>
  );
}

const NEXT_UP = { head_up: "north_up", north_up: "phone_up", phone_up: "head_up" } as const;

function More({ selection }: { selection: Selection }) {
  const [text, setText] = useState("");
  const { state, person } = selection;
  const out = person?.status !== "aboard";
  const charge = state.in_charge;
  const go = (s: m.Sheet) => () => (m.sheet.value = s);
  return (
    <Sheet title={t("more.title")}>
      <div class="grid">
        <button type="button" onClick={go("aboard")}>{t("act.aboard")}</button>
        {out && <button type="button" onClick={() => void act.missedPass(selection).then(close)}>{t("people.missed")}</button>}
        <button type="button" data-mark="person" data-person={person?.no ?? 1}>{t("mark.again")}</button>
        <button type="button" onClick={go("log")}>{t("more.log")}</button>
        <button type="button" onClick={() => act.chooseRing(NEXT_UP[m.ringUp.value])}>
          {t(`more.${NEXT_UP[m.ringUp.value]}`)}
        </button>
        <button type="button" aria-pressed={m.speech.value} onClick={() => act.chooseSpeech(!m.speech.value)}>
          {t(m.speech.value ? "more.silence" : "more.speak")}
        </button>
        <button type="button" onClick={() => void act.takeCharge(selection)}>{t("setup.charge")}</button>
        <button type="button" onClick={go("down")}>{t("more.stand_down")}</button>
      </div>
      <p>{charge ? t("setup.charge_is", { name: charge.name || t("down.someone") }) : t("setup.charge_none")}</p>
      <Heads selection={selection} />
      <h3>{t("marks.title")}</h3>
      <Marks selection={selection} />
      <Palettes />
      <form class="field" onSubmit={(e) => { e.preventDefault(); if (text.trim()) void act.note(selection, text.trim()).then(close); }}>
        <label>
          {t("more.note")}
          <input type="text" maxLength={1000} value={text} onInput={(e) => setText(e.currentTarget.value)} />
        </label>
        <button type="submit">{t("more.note_add")}</button>
      </form>
    </Sheet>
  );
}

/** How many are aboard, and how many outside the rail. */
function Heads({ selection }: { selection: Selection }) {
  const { state } = selection;
  const out = state.persons.filter((p) => p.status !== "aboard").length;
  const aboard = state.head_count?.aboard;
  return (
    <>
      <p>{aboard === undefined ? t("heads.none", { out }) : t("heads.count", { aboard, out })}</p>
      <div class="grid">
        <button type="button" onClick={() => void act.headCount(selection, (aboard ?? 0) - 1)}>{t("heads.fewer")}</button>
        <button type="button" onClick={() => void act.headCount(selection, (aboard ?? 0) + 1)}>{t("heads.more")}</button>
      </div>
    </>
  );
}

/** Every press, numbered and timed; one of them is steered by. */
function Marks({ selection }: { selection: Selection }) {
  const { state } = selection;
  const working = new Set(state.persons.map((p) => p.working_mark));
  return (
    <ul class="marks">
      {state.marks.map((mark) => (
        <li key={mark.event} class={mark.dismissed ? "undone" : ""}>
          <p>
            <b>{t("marks.no", { number: mark.number })}</b> {utcTime(Date.parse(mark.at))}{" "}
            {state.persons.length > 1 && t("people.title", { n: mark.person })}{" "}
            {mark.place ? position(mark.place.position) : t("source.nothing")}
            {working.has(mark.event) && `, ${t("marks.working")}`}
            {mark.dismissed && `, ${t("marks.dismissed")}`}
          </p>
          {!mark.dismissed && <MarkTouches selection={selection} mark={mark} working={working.has(mark.event)} />}
        </li>
      ))}
    </ul>
  );
}

function MarkTouches({ selection, mark, working }: { selection: Selection; mark: Mark; working: boolean }) {
  return (
    <div class="grid">
      {!working && (
        <button type="button" onClick={() => void act.workBy(selection, mark)}>{t("marks.choose", { number: mark.number })}</button>
      )}
      <button type="button" onClick={() => void act.dismiss(selection, mark)}>{t("marks.dismiss", { number: mark.number })}</button>
    </div>
  );
}

const REASONS = ["aboard", "false", "authority"] as const;

function Down({ selection }: { selection: Selection }) {
  const { state } = selection;
  const out = state.persons.filter((p) => p.status !== "aboard");
  const [reason, setReason] = useState<(typeof REASONS)[number]>(out.length > 0 ? "false" : "aboard");
  const called = (state.calls ?? []).some((c) => !c.answered && c.call !== "cancel");
  const charge = state.in_charge;
  const done = () => void act.standDown(selection, t(`down.reason.${reason}`)).then(close);
  // "All are aboard" is offered only when the log says so of each.
  const offered = REASONS.filter((r) => r !== "aboard" || out.length === 0);
  return (
    <Sheet title={t("down.title")}>
      {out.map((p) => <p key={p.no}>{t("down.not_yet", { n: p.no })}</p>)}
      {called && <p>{t("call.cancel_hint")}</p>}
      {charge && charge.holder !== m.device.value && <p>{t("down.waits", { name: charge.name || t("down.someone") })}</p>}
      <div class="grid">
        {offered.map((r) => (
          <button type="button" key={r} aria-pressed={reason === r} onClick={() => setReason(r)}>{t(`down.reason.${r}`)}</button>
        ))}
      </div>
      <HoldButton word={t("down.hold")} done={done} />
      <p>{t("down.or")}</p>
      <TwoStep first={t("down.first")} second={t("down.second")} keep={t("down.keep")} done={done} />
    </Sheet>
  );
}

function isAsked({ state }: Selection): boolean {
  return !!state.asked?.length && state.in_charge?.holder === m.device.value;
}

/** A wish that only the one in charge can grant: asked here, with the picture still up. */
function Asked({ selection }: { selection: Selection }) {
  const { state } = selection;
  const asked = state.asked?.[0];
  if (!asked) return null;
  const by = asked.by || t("down.someone");
  const mark = state.marks.find((k) => k.event === asked.mark);
  const text =
    asked.kind === "mark_dismissed" && mark
      ? t("down.asked_dismiss", { by, number: mark.number })
      : t("down.asked", { by, reason: asked.reason ?? "" });
  const grant = () => {
    if (asked.kind === "stood_down") void act.standDown(selection, asked.reason || t("down.reason.false"));
    else if (asked.kind === "mark_dismissed" && mark) void act.dismiss(selection, mark);
    else if (asked.kind === "working_mark" && mark) void act.workBy(selection, mark);
  };
  return (
    <section class="sheet low" role="alertdialog" aria-label={text}>
      <p>{text}</p>
      <TwoStep first={t("down.grant")} second={t("down.grant_yes")} keep={t("down.not_now")} done={grant} />
      <button type="button" onClick={() => void act.undo({ id: asked.event })}>{t("down.refuse")}</button>
    </section>
  );
}
