// First paint and MARK. Nothing heavier than the outbox and the position
// sensor is loaded before the button works; the rest of the page comes after.

import { Outbox } from "../sync/outbox";
import { watchPosition } from "../sense/position";
import { startMarking } from "./mark";

const outbox = new Outbox();
const mark = startMarking(outbox);
resume();

// Until the page proper takes over: say what was marked, in the markup that is already there.
let pressed = 0;
mark.onPress = ({ draft, kept }) => {
  pressed++;
  const said = document.getElementById("boot-said");
  const time = draft.at.slice(11, 19);
  const where = draft.body.position ? "" : " No position yet.";
  if (said) said.textContent = `Marked ${time} UTC, number ${pressed}.${where}`;
  void kept.then(() => {
    if (said && !outbox.unsafe) said.textContent += " Kept on this phone.";
  });
};

document.documentElement.dataset.ready = "mark";
watchPosition();

// The page proper, once the button is painted and works.
requestAnimationFrame(() => {
  setTimeout(() => {
    void import("../screens/start").then((page) => page.start({ outbox, mark }));
  });
});

/** After a restart in the middle of an incident, a mark joins it even before the log is read. */
function resume(): void {
  try {
    const open = JSON.parse(localStorage.getItem("wakeback.open") ?? "null") as { incident: string; drill: boolean } | null;
    mark.context.by = localStorage.getItem("wakeback.name") ?? "";
    mark.context.incident = open?.incident ?? null;
    mark.context.drill = open ? open.drill : localStorage.getItem("wakeback.drill") === "on";
  } catch {
    // Without storage a mark opens an incident of its own, which loses nothing.
  }
}
