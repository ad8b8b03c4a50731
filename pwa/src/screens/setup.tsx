// Set up: name, pairing, palette, the four sounds, a test mark, a drill.

import { useState } from "preact/hooks";
import { play, type Sound } from "../sense/sound";
import * as act from "../state/actions";
import { parts } from "../state/control";
import * as m from "../state/model";
import type { Selection } from "../state/select";
import { t } from "../text/text";
import { utcTime } from "../units/format";
import { Instruments } from "./instruments";

const SOUNDS: Sound[] = ["marked", "turn", "closing", "lost"];
const PALETTES: m.Palette[] = ["day", "dusk", "night"];

export function SetUp({ selection }: { selection: Selection | null }) {
  return (
    <section class="sheet full" role="dialog" aria-label={t("setup.title")}>
      <header class="sheet-top">
        <h2>{t("setup.title")}</h2>
        <button type="button" onClick={() => (m.sheet.value = "")}>{t("log.close")}</button>
      </header>
      <Palettes />
      <h3>{t("setup.sounds")}</h3>
      <div class="grid">
        {SOUNDS.map((s) => (
          <button type="button" key={s} onClick={() => play(s)}>{t(`sound.${s}`)}</button>
        ))}
      </div>
      {!selection && (
        <div class="grid">
          <button type="button" onClick={testMark}>{t("mark.test")}</button>
          <button type="button" aria-pressed={m.drill.value} onClick={() => act.chooseDrill(!m.drill.value)}>
            {m.drill.value ? t("setup.drill_off") : t("setup.drill_on")}
          </button>
        </div>
      )}
      {m.notice.value && <p role="status">{m.notice.value}</p>}
      <Name />
      <Pairing />
      <Instruments />
    </section>
  );
}

/** A mark that is clearly a test, is logged as one, and calls nobody. */
function testMark(): void {
  const { draft } = parts().mark.press({ test: true });
  play("marked");
  m.notice.value = t("mark.test.done", { time: utcTime(Date.parse(draft.at)) });
}

export function Palettes() {
  return (
    <div class="grid three">
      {PALETTES.map((p) => (
        <button type="button" key={p} aria-pressed={m.palette.value === p} onClick={() => act.choosePalette(p)}>
          {t(`palette.${p}`)}
        </button>
      ))}
    </div>
  );
}

function Name() {
  return (
    <label class="field">
      {t("setup.name")}
      <input
        type="text"
        autocomplete="nickname"
        maxLength={60}
        value={m.myName.value}
        onChange={(e) => act.chooseName(e.currentTarget.value)}
      />
    </label>
  );
}

function Pairing() {
  const [code, setCode] = useState("");
  const [said, setSaid] = useState("");
  const send = async (e: Event) => {
    e.preventDefault();
    const why = await act.pair(code);
    setSaid(why ? t("setup.pair_bad", { why }) : t("setup.pair_ok"));
  };
  return (
    <form class="field" onSubmit={(e) => void send(e)}>
      <label>
        {t("setup.pair")}
        <input type="text" autocapitalize="characters" autocomplete="one-time-code" value={code} onInput={(e) => setCode(e.currentTarget.value)} />
      </label>
      <button type="submit">{t("setup.pair_do")}</button>
      {said && <p role="status">{said}</p>}
    </form>
  );
}
