// The state of the link in words: shown on every screen.

import { GONE_S, QUIET_S } from "../sync/stream";
import { t } from "../text/text";
import { duration, utcMinute } from "../units/format";
import type { Link } from "./model";

/** How much a line should worry: never told by colour alone. */
export type Level = "ok" | "warn" | "bad";

export interface LinkView {
  level: Level;
  text: string;
  /** The server's word is fresh enough to steer by. */
  fresh: boolean;
}

/** What to say of the server now. since is when this phone began to be alone, if it is. */
export function linkView(link: Link, nowMs: number, openedMs: number, toCommon: (ms: number) => number): LinkView {
  const silentS = link.heardMs === null ? Number.POSITIVE_INFINITY : (nowMs - link.heardMs) / 1000;
  if (link.connected && silentS <= QUIET_S) return { level: "ok", text: t("link.ok"), fresh: true };
  if (link.connected && silentS <= GONE_S) {
    return { level: "warn", text: t("link.quiet", { age: duration(silentS) }), fresh: false };
  }
  const since = utcMinute(toCommon(link.heardMs ?? openedMs));
  return { level: "bad", text: t("link.alone", { since }), fresh: false };
}
