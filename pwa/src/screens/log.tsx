// People and log: everyone, every mark, every entry, oldest at the bottom.

import * as act from "../state/actions";
import * as m from "../state/model";
import type { Selection } from "../state/select";
import { isKey, type Key, t } from "../text/text";
import { position, utcTime } from "../units/format";
import type { LogEvent, Marked } from "../wire/event";

export function Log({ selection }: { selection: Selection | null }) {
  const undone = new Set(m.log.value.filter((e) => e.kind === "undone").map((e) => e.body.event as string));
  return (
    <section class="sheet full" role="dialog" aria-label={t("log.title")}>
      <header class="sheet-top">
        <h2>{t("log.title")}</h2>
        <button type="button" onClick={() => (m.sheet.value = "")}>{t("log.close")}</button>
      </header>
      {selection && <PeopleList selection={selection} />}
      {m.log.value.length === 0 && <p>{t("log.empty")}</p>}
      <ul class="log">
        {m.log.value.map((e) => (
          <Entry key={e.id} event={e} undone={undone.has(e.id)} />
        ))}
      </ul>
    </section>
  );
}

function PeopleList({ selection: { state } }: { selection: Selection }) {
  return (
    <ul class="log">
      {state.persons.map((p) => (
        <li key={p.no}>
          <b>{p.name || t("people.title", { n: p.no })}</b> {t(`people.${p.status}`)} {utcTime(Date.parse(p.status_at))}
          {p.condition && `, ${conditionWords(p.condition)}`}
        </li>
      ))}
    </ul>
  );
}

function conditionWords(c: string): string {
  const key = `cond.${c}`;
  return isKey(key) ? t(key) : c;
}

function Entry({ event: e, undone }: { event: LogEvent; undone: boolean }) {
  const refused = m.refusals.value.get(e.id);
  const canUndo = !undone && e.kind !== "undone" && e.kind !== "marked";
  const off = Math.abs(Date.parse(e.at) - Date.parse(e.device_at)) >= 1000;
  return (
    <li class={undone ? "entry undone" : "entry"}>
      <span class="entry-time">{utcTime(Date.parse(e.at))}</span>
      <span class="entry-what">
        <b>{kindWords(e)}</b>
        {e.test && ` ${t("app.test")}`}
        {e.drill && ` ${t("app.drill")}`}
        {detail(e) && ` ${detail(e)}`}
        {e.by && ` (${e.by})`}
        {off && `, ${t("log.device_clock", { time: utcTime(Date.parse(e.device_at)) })}`}
        {undone && `, ${t("log.undone")}`}
        {refused !== undefined
          ? `, ${t("log.refused", { reason: refused })}`
          : m.pendingIds.value.has(e.id) && `, ${t("log.only_here")}`}
      </span>
      {canUndo && (
        <button type="button" onClick={() => void act.undo(e)} aria-label={t("act.undo", { what: kindWords(e) })}>
          {t("log.undo")}
        </button>
      )}
    </li>
  );
}

function kindWords(e: LogEvent): string {
  const key = `kind.${e.kind}`;
  return isKey(key) ? t(key as Key) : e.kind;
}

/** The part of an entry's body that a reader of the log wants. */
function detail(e: LogEvent): string {
  const b = e.body;
  if (e.kind === "marked") {
    const mk = b as unknown as Marked;
    return mk.position ? `${position(mk.position)} ${t(`source.${mk.source}`)}` : t("source.nothing");
  }
  if (e.kind === "mark_adjusted" && typeof b.fell_at === "string") return utcTime(Date.parse(b.fell_at));
  if (typeof b.condition === "string") return conditionWords(b.condition);
  for (const name of ["text", "reason", "name", "call"]) if (typeof b[name] === "string") return b[name] as string;
  return "";
}
