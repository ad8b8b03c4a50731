// What is assumed: one tap changes it. Each value says who or what said it.

import { useEffect, useState } from "preact/hooks";
import type { ColdWater, Moving, Outlook, Wearing } from "../engine/search_calls";
import * as act from "../state/actions";
import { type Assumed, coldView, currentView, lightView, waterView, windView } from "../state/assume_view";
import { FORCES, knotsOf, typed } from "../state/conditions";
import { parts } from "../state/control";
import type { Selection } from "../state/select";
import { commonNow } from "../sync/clock";
import { t } from "../text/text";
import type { Frame } from "../wire/frame";
import { SearchSheetOf } from "./search_sheets";

const WEARING: Wearing[] = ["unknown", "clothes", "buoyancy_vest", "lifejacket", "survival_suit", "diving_suit"];
const MOVING: Moving[] = ["unknown", "yes", "no"];

interface Props {
  selection: Selection;
  frame: Frame | null;
  close: () => void;
}

export function AssumeSheet({ selection, frame, close }: Props) {
  const { state } = selection;
  return (
    <SearchSheetOf title={t("assume.title")} lead={t("assume.lead")} close={close}>
      <Person selection={selection} />
      <h3>{t("assume.wind")}</h3>
      <Line a={windView(state.winds?.at(-1))} />
      <Wind selection={selection} />
      <h3>{t("assume.current")}</h3>
      <Line a={currentView(state.currents?.at(-1))} />
      <Current selection={selection} />
      <h3>{t("assume.water")}</h3>
      <Line a={waterView(state.waters?.at(-1))} />
      <Water selection={selection} />
      <h3>{t("assume.light")}</h3>
      <Light frame={frame} />
    </SearchSheetOf>
  );
}

function Line({ a }: { a: Assumed }) {
  return <p><b class={a.typed ? "typed" : ""}>{a.value}</b> {a.by}</p>;
}

const isWearing = (s: string | undefined): s is Wearing => WEARING.includes(s as Wearing);
const isMoving = (s: string | undefined): s is Moving => MOVING.includes(s as Moving);

/** Two plain questions; not knowing is an answer, and the first. */
function Person({ selection }: { selection: Selection }) {
  const p = selection.person;
  const wearing: Wearing = isWearing(p?.clothing) ? p.clothing : "unknown";
  const moving: Moving = isMoving(p?.moving) ? p.moving : "unknown";
  const [why, setWhy] = useState("");
  const choose = async (w: Wearing, mv: Moving): Promise<void> => {
    const choice = await parts().engine.call("choose_class", { wearing: w, moving: mv }).catch((err: Error) => err);
    if (choice instanceof Error) return setWhy(choice.message);
    setWhy(choice.why);
    await act.log(selection, "person", {
      ...(p && { person: p.no }), object: choice.object, clothing: w, moving: mv,
      life_jacket: w === "unknown" ? "unknown" : w === "lifejacket" ? "worn" : "not_worn",
    });
  };
  return (
    <>
      <h3>{t("assume.wearing")}</h3>
      <div class="grid">
        {WEARING.map((w) => <button type="button" key={w} aria-pressed={w === wearing} onClick={() => void choose(w, moving)}>{t(`wearing.${w}`)}</button>)}
      </div>
      <h3>{t("assume.moving")}</h3>
      <div class="grid three">
        {MOVING.map((mv) => <button type="button" key={mv} aria-pressed={mv === moving} onClick={() => void choose(wearing, mv)}>{t(`moving.${mv}`)}</button>)}
      </div>
      {why && <p role="status">{why}</p>}
    </>
  );
}

/** Fields that are set together; each wrong one is named with what was expected. */
function Fields({ fields, set }: { fields: { word: string; least: number; most: number; hint: string }[]; set: (values: number[]) => Promise<unknown> }) {
  const [texts, setTexts] = useState(fields.map(() => ""));
  const [trouble, setTrouble] = useState("");
  const submit = (e: Event): void => {
    e.preventDefault();
    const values = texts.map((x, i) => typed(x, fields[i]?.least ?? 0, fields[i]?.most ?? 0));
    const wrong = fields[values.indexOf(null)];
    setTrouble(wrong ? t("assume.expected", { field: wrong.word, least: wrong.least, most: wrong.most }) : "");
    if (!wrong) void set(values as number[]).then(() => setTexts(fields.map(() => "")));
  };
  return (
    <form class="field" onSubmit={submit}>
      <div class="grid">
        {fields.map((g, i) => (
          <label key={g.word}>
            {g.word}
            <input type="text" inputMode="decimal" placeholder={t("assume.like", { n: g.hint })} value={texts[i]} onInput={(e) => setTexts(texts.map((x, j) => (j === i ? e.currentTarget.value : x)))} />
          </label>
        ))}
      </div>
      {trouble && <p class="trouble" role="alert">{trouble}</p>}
      <button type="submit">{t("when.set")}</button>
    </form>
  );
}

function Wind({ selection }: { selection: Selection }) {
  const [force, setForce] = useState(true);
  const set = ([from, n]: number[]): Promise<unknown> => {
    const kn = force ? knotsOf(Math.round(n as number)) : (n as number);
    return act.log(selection, "wind", { from_deg: (from as number) % 360, speed_kn: kn, source: "person" });
  };
  const direction = { word: t("assume.wind_from"), least: 0, most: 360, hint: "240" };
  return (
    <>
      <div class="grid">
        <button type="button" aria-pressed={force} onClick={() => setForce(true)}>{t("assume.beaufort")}</button>
        <button type="button" aria-pressed={!force} onClick={() => setForce(false)}>{t("assume.knots")}</button>
      </div>
      <Fields
        key={String(force)}
        fields={[direction, force ? { word: t("assume.beaufort"), least: 0, most: FORCES - 1, hint: "4" } : { word: t("assume.knots"), least: 0, most: 150, hint: "14" }]}
        set={set}
      />
    </>
  );
}

function Current({ selection }: { selection: Selection }) {
  const [source, setSource] = useState<"person" | "tables">("person");
  const fields = [
    { word: t("assume.set"), least: 0, most: 360, hint: "090" },
    { word: t("assume.drift"), least: 0, most: 20, hint: "1.2" },
  ];
  return (
    <>
      <div class="grid">
        <button type="button" aria-pressed={source === "person"} onClick={() => setSource("person")}>{t("assume.seen")}</button>
        <button type="button" aria-pressed={source === "tables"} onClick={() => setSource("tables")}>{t("assume.tables")}</button>
      </div>
      <Fields fields={fields} set={([set, drift]) => act.log(selection, "current", { set_deg: (set as number) % 360, drift_kn: drift, source })} />
    </>
  );
}

/** What is known of what keeps the person afloat, for the tables. */
function flotation(p: Selection["person"]): "unknown" | "none" | "worn" | "suit" {
  if (p?.clothing === "survival_suit" || p?.clothing === "diving_suit") return "suit";
  if (p?.life_jacket === "worn" || p?.clothing === "buoyancy_vest") return "worn";
  return p?.clothing === "clothes" ? "none" : "unknown";
}

function Water({ selection }: { selection: Selection }) {
  const temp = selection.state.waters?.at(-1)?.temp_c;
  const afloat = flotation(selection.person);
  const [cold, setCold] = useState<ColdWater | null>(null);
  useEffect(() => {
    if (temp === undefined) return setCold(null);
    void parts().engine.call("cold_water", { temp_c: temp, flotation: afloat }).then(setCold, () => setCold(null));
  }, [temp, afloat]);
  const view = cold && coldView(cold);
  return (
    <>
      <Fields fields={[{ word: t("assume.celsius"), least: -2.4, most: 40, hint: "12" }]} set={([c]) => act.log(selection, "water", { temp_c: c, source: "person" })} />
      {view && (
        <>
          {view.texts[0] && <p><b>{view.texts[0]}</b></p>}
          {view.lines.map((l) => <p key={l.what}>{l.what}: {l.band}</p>)}
          {view.texts.slice(1).map((x) => <p key={x}>{x}</p>)}
          <details>
            <summary>{t("cold.sources")}</summary>
            {view.figures.map((x) => <p key={x}>{x}</p>)}
          </details>
        </>
      )}
    </>
  );
}

function Light({ frame }: { frame: Frame | null }) {
  const position = frame?.fix?.position ?? frame?.datum?.position ?? null;
  const [outlook, setOutlook] = useState<Outlook | null>(null);
  useEffect(() => {
    if (!position) return;
    void parts().engine.call("daylight", { now: new Date(commonNow()).toISOString(), position }).then(setOutlook, () => setOutlook(null));
  }, [position === null]);
  if (!outlook) return <p>{t("assume.unknown")}</p>;
  return <>{lightView(outlook, commonNow()).map((x) => <p key={x}>{x}</p>)}</>;
}

