// Which frame is shown: the server's while its word is fresh, else this phone's own.

import { QUIET_S } from "../sync/stream";
import type { HeldFrame } from "./model";
import { frameKey, type Selection } from "./select";

export interface Shown {
  held: HeldFrame | null;
  from: "server" | "phone" | "none";
}

/** Picks the frame for a selection. */
export function pickFrame(
  selection: Selection,
  server: ReadonlyMap<string, HeldFrame>,
  own: HeldFrame | null,
  nowMs: number,
): Shown {
  const person = selection.person?.no ?? 1;
  const ids = [selection.state.id, ...(selection.state.joined ?? [])];
  const mine = own && ids.includes(own.frame.incident) && own.frame.person === person ? own : null;
  for (const id of ids) {
    const held = server.get(frameKey(id, person));
    if (held && nowMs - held.gotMs <= QUIET_S * 1000) return { held, from: "server" };
  }
  if (mine) return { held: mine, from: "phone" };
  const last = server.get(frameKey(selection.state.id, person)) ?? null;
  return { held: last, from: last ? "server" : "none" };
}
