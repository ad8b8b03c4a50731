// The page proper: loaded after MARK works, takes over the markup in place.

import { render } from "preact";
import type { MarkButton } from "../boot/mark";
import { pair } from "../state/actions";
import { startControl } from "../state/control";
import * as m from "../state/model";
import type { Outbox } from "../sync/outbox";
import { t } from "../text/text";
import { App } from "./app";
import "./app.css";
import { keepOffline } from "./update";

/** A pairing link ends in #pair=CODE: what comes after # never leaves the phone unasked. */
async function pairByLink(): Promise<void> {
  const code = /^#pair=([\w-]{4,40})$/.exec(location.hash)?.[1];
  if (!code) return;
  history.replaceState(null, "", location.pathname);
  const why = await pair(code);
  m.notice.value = why ? t("setup.pair_bad", { why }) : t("setup.pair_ok");
}

/** Starts the page. */
export function start({ outbox, mark }: { outbox: Outbox; mark: MarkButton }): void {
  startControl(outbox, mark);
  const root = document.getElementById("app");
  if (!root) throw new Error("the page has no #app");
  root.replaceChildren();
  render(<App />, root);
  document.addEventListener("keydown", (e) => {
    if (e.key === "Escape") m.sheet.value = "";
  });
  void keepOffline();
  void pairByLink();
}
