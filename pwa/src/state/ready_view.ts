// What works on this phone, what does not, and how to mend it.

import { ageS, type HeldFix, type PhoneState } from "../sense/position";
import { type Key, t } from "../text/text";
import { duration, errorText, utcMinute } from "../units/format";
import type { SoundState } from "../sense/sound";
import type { StorageState } from "../sense/storage";
import type { WakeState } from "../sense/wake";
import type { EngineState } from "../engine/engine";
import type { Level, LinkView } from "./link_view";
import type { Link } from "./model";

export interface Line {
  id: string;
  name: string;
  text: string;
  level: Level;
}

export interface ReadyInput {
  nowMs: number;
  monoMs: number;
  vessel: HeldFix | null;
  phone: HeldFix | null;
  phoneState: PhoneState;
  link: Link;
  linkView: LinkView;
  clock: { offset_ms: number; error_ms: number } | null;
  sound: SoundState;
  storage: StorageState;
  unsafe: string;
  engine: { state: EngineState; why: string };
  wake: WakeState;
  offline: boolean;
}

/** A fix older than this is not one to mark by without a word: our choice, as for the vessel's. */
const OLD_FIX_S = 10;
/** A clock so far off would be noticed in a log: our choice. */
const CLOCK_OFF_MS = 2_000;
/** Less room than this is worth a word: our choice, thousands of events. */
const ROOM = 20e6;

/** The lines, the worst first. */
export function readyLines(input: ReadyInput): Line[] {
  const lines = [
    position(input), server(input), sound(input), storage(input),
    engine(input), clock(input), screen(input), offline(input),
  ];
  const order = { bad: 0, warn: 1, ok: 2 };
  return lines.sort((a, b) => order[a.level] - order[b.level]);
}

function line(id: string, level: Level, key: Key, args?: Record<string, string | number>): Line {
  return { id, name: t(`ready.${id}` as Key), text: t(key, args), level };
}

function position({ vessel, phone, phoneState, nowMs, monoMs }: ReadyInput): Line {
  const vesselAge = vessel ? ageS(vessel, nowMs, monoMs) : Number.POSITIVE_INFINITY;
  const phoneAge = phone ? ageS(phone, nowMs, monoMs) : Number.POSITIVE_INFINITY;
  if (vesselAge <= OLD_FIX_S) return line("position", "ok", "ready.position.vessel", { age: duration(vesselAge) });
  if (phoneAge <= OLD_FIX_S) {
    const error = phone?.error_m != null ? errorText(phone.error_m) : "?";
    return line("position", "ok", "ready.position.phone", { error, age: duration(phoneAge) });
  }
  if (phoneState === "ok") return line("position", "warn", "ready.position.phone_old", { age: duration(phoneAge) });
  return line("position", phoneState === "asking" ? "warn" : "bad", `ready.position.${phoneState}`);
}

function server({ link, linkView, nowMs }: ReadyInput): Line {
  if (link.unpaired) return line("server", "bad", "ready.server.unpaired");
  if (link.warning) return line("server", "bad", "ready.server.notices", { text: link.warning });
  if (linkView.level === "ok") {
    const phones = link.phones > 1 ? t("ready.server.phones", { n: link.phones }) : t("ready.server.phones.one");
    return line("server", "ok", "ready.server.ok", { phones });
  }
  if (link.heardMs === null) return line("server", "bad", "ready.server.never");
  if (linkView.level === "warn") {
    return line("server", "warn", "ready.server.quiet", { age: duration((nowMs - link.heardMs) / 1000) });
  }
  return line("server", "bad", "ready.server.gone", { since: utcMinute(link.heardMs) });
}

function sound({ sound }: ReadyInput): Line {
  const level = { ok: "ok", locked: "warn", none: "bad" } as const;
  return line("sound", level[sound], `ready.sound.${sound}`);
}

function storage({ storage, unsafe }: ReadyInput): Line {
  if (unsafe) return line("storage", "bad", "ready.storage.unsafe", { why: unsafe });
  if (storage.left !== null && storage.left < ROOM) {
    return line("storage", "bad", "ready.storage.full", { left: `${Math.floor(storage.left / 1e6)} MB` });
  }
  return storage.persisted === false ? line("storage", "warn", "ready.storage.may_go") : line("storage", "ok", "ready.storage.ok");
}

function engine({ engine }: ReadyInput): Line {
  const level = { ready: "ok", loading: "warn", failed: "bad" } as const;
  return line("engine", level[engine.state], `ready.engine.${engine.state}`, { why: engine.why });
}

function clock({ clock }: ReadyInput): Line {
  if (!clock) return line("clock", "warn", "ready.clock.unknown");
  if (Math.abs(clock.offset_ms) < CLOCK_OFF_MS) {
    return line("clock", "ok", "ready.clock.ok", { error: duration(Math.ceil((Math.abs(clock.offset_ms) + clock.error_ms) / 1000)) });
  }
  const way = t(clock.offset_ms < 0 ? "ready.clock.fast" : "ready.clock.slow");
  return line("clock", "warn", "ready.clock.off", { off: duration(Math.abs(clock.offset_ms) / 1000), way });
}

function screen({ wake }: ReadyInput): Line {
  if (wake === "ok") return line("screen", "ok", "ready.screen.ok");
  return line("screen", "warn", wake === "none" ? "ready.screen.none" : "ready.screen.refused");
}

function offline({ offline }: ReadyInput): Line {
  return offline ? line("offline", "ok", "ready.offline.ok") : line("offline", "warn", "ready.offline.not");
}
