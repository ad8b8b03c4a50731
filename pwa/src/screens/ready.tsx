// Ready: MARK, and what works on this phone and what does not.

import { clockOffset, common } from "../sync/clock";
import { chooseDrill } from "../state/actions";
import { linkNow } from "../state/control";
import * as m from "../state/model";
import { type Line, readyLines } from "../state/ready_view";
import { t } from "../text/text";
import { utcTime } from "../units/format";
import { takeUpdate } from "./update";

export function Ready() {
  const now = m.nowMs.value;
  const lines = readyLines({
    nowMs: now,
    monoMs: performance.now(),
    vessel: m.vesselFix.value,
    phone: m.phoneFix.value,
    phoneState: m.phoneState.value,
    link: m.link.value,
    linkView: linkNow(),
    clock: clockOffset(),
    sound: m.sound.value,
    storage: m.storage.value,
    unsafe: m.unsafe.value,
    engine: m.engine.value,
    wake: m.wake.value,
    offline: m.offline.value,
  });
  return (
    <main class="ready">
      <header class="ready-top">
        <h1 class="clock">
          {utcTime(common(now))} <small>UTC</small>
        </h1>
        <Waiting />
        <button type="button" class="small" onClick={() => (m.sheet.value = "log")}>{t("ready.log")}</button>
        <button type="button" class="small" onClick={() => (m.sheet.value = "setup")}>{t("ready.more")}</button>
      </header>
      {/* biome-ignore lint/a11y/noNoninteractiveTabindex: it may scroll, and then a keyboard has to reach it */}
      <section class="ready-lines" tabIndex={0} aria-label={t("ready.title")}>
        <Lines lines={lines} />
        <div class="ready-foot">
          {m.notice.value && <p role="status">{m.notice.value}</p>}
          {m.drill.value && (
            <button type="button" onClick={() => chooseDrill(false)}>{t("setup.drill_off")}</button>
          )}
          {m.updateWaiting.value && (
            <button type="button" onClick={takeUpdate}>{t("ready.update")}</button>
          )}
        </div>
      </section>
      <p class="no-call">{t("call.caution")}</p>
      <button type="button" class="mark" data-mark="person">
        <span class="mark-word">{t("mark.button")}</span>
        <span class="mark-hint">{t("mark.hint")}</span>
      </button>
    </main>
  );
}

function Lines({ lines }: { lines: Line[] }) {
  return (
    <ul class="lines">
      {lines.map((l) => (
        <li key={l.id} class={`line ${l.level}`}>
          <Sign level={l.level} />
          <span>
            <b>{l.name}</b> {l.text}
          </span>
        </li>
      ))}
    </ul>
  );
}

/** A shape for each level, so that colour is never the only sign. */
export function Sign({ level }: { level: "ok" | "warn" | "bad" }) {
  return (
    <svg class="sign" viewBox="0 0 24 24" aria-hidden="true">
      {level === "ok" && <path class="sign-line" d="M4 13 L10 19 L20 5" />}
      {level === "warn" && <path class="sign-line" d="M12 3 L22 21 H2 Z M12 10 V15 M12 17.5 V18.5" />}
      {level === "bad" && <path class="sign-line" d="M5 5 L19 19 M19 5 L5 19" />}
    </svg>
  );
}

/** How much is only on this phone. */
export function Waiting() {
  const { only_here, refused } = m.onlyHere.value;
  if (only_here === 0) return null;
  const text = only_here === 1 ? t("only_here.one") : t("only_here", { n: only_here });
  return (
    <p class="waiting" role="status">
      <Sign level="warn" /> {text}
      {refused > 0 && `, ${t("refused", { n: refused })}`}
    </p>
  );
}
