// The page proper: loaded after MARK works, takes over the markup in place.

import { render } from "preact";
import type { MarkButton } from "../boot/mark";
import { startControl } from "../state/control";
import * as m from "../state/model";
import type { Outbox } from "../sync/outbox";
import { App } from "./app";
import "./app.css";
import { keepOffline } from "./update";

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
}
