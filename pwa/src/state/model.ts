// What the page knows, as signals. Only control.ts and actions.ts write here;
// the screens read.

import { signal } from "@preact/signals";
import type { EngineState } from "../engine/engine";
import type { HeadingState, PhoneHeading } from "../sense/heading";
import type { HeldFix, PhoneState } from "../sense/position";
import type { SoundState } from "../sense/sound";
import type { StorageState } from "../sense/storage";
import type { WakeState } from "../sense/wake";
import type { LogEvent } from "../wire/event";
import type { Frame, State } from "../wire/frame";

export type Palette = "day" | "dusk" | "night";
export type RingUp = "head_up" | "north_up" | "phone_up";
export type Sheet = "" | "when" | "call" | "more" | "aboard" | "down" | "log" | "setup";

/** A frame with the moment it reached this page. */
export interface HeldFrame {
  frame: Frame;
  gotMs: number;
}

/** What is known of the link to the server. */
export interface Link {
  connected: boolean;
  /** Date.now() of the last word, or null when there never was one. */
  heardMs: number | null;
  unpaired: boolean;
  phones: number;
  /** What the server says of itself that a person should know, like a store that cannot write. */
  warning: string;
}

/** The device's own clock, in steps of a second: what ages are reckoned from. */
export const nowMs = signal(Date.now());
export const openedMs = Date.now();

export const link = signal<Link>({ connected: false, heardMs: null, unpaired: false, phones: 0, warning: "" });
export const serverFrames = signal<ReadonlyMap<string, HeldFrame>>(new Map());
export const ownFrame = signal<HeldFrame | null>(null);
/** The log on this phone was read; until then nothing is known to be closed. */
export const loaded = signal(false);
export const incidents = signal<State[]>([]);
export const log = signal<LogEvent[]>([]);
export const device = signal("");
export const onlyHere = signal({ only_here: 0, refused: 0 });
export const pendingIds = signal<ReadonlySet<string>>(new Set());
export const refusals = signal<ReadonlyMap<string, string>>(new Map());

export const vesselFix = signal<HeldFix | null>(null);
export const phoneFix = signal<HeldFix | null>(null);
export const phoneState = signal<PhoneState>("asking");
export const sound = signal<SoundState>("locked");
export const wake = signal<WakeState>("asking");
export const storage = signal<StorageState>({ persisted: null, left: null });
export const unsafe = signal("");
export const engine = signal<{ state: EngineState; why: string }>({ state: "loading", why: "" });
export const offline = signal(false);
export const updateWaiting = signal(false);

/** The person steered to on this phone; null is the first who is not aboard. */
export const chosen = signal<{ incident: string; person: number } | null>(null);
export const sheet = signal<Sheet>("");
/** What was logged last from this phone, for the undo. */
export const lastAct = signal<{ id: string; key: string; ms: number; undoable: boolean } | null>(null);
export const notice = signal("");

export const palette = signal<Palette>(readPalette());
/** The phone's compass is not carried over a restart: it has to be started by a touch. */
export const ringUp = signal<RingUp>(stored("wakeback.ring") === "north_up" ? "north_up" : "head_up");
export const phoneHeading = signal<{ state: HeadingState; heading: PhoneHeading | null }>({ state: "off", heading: null });
export const speech = signal(stored("wakeback.speech") !== "off");
export const myName = signal(stored("wakeback.name") ?? "");
export const drill = signal(stored("wakeback.drill") === "on");

function readPalette(): Palette {
  const p = typeof document === "undefined" ? "" : document.documentElement.dataset.palette;
  return p === "day" || p === "dusk" ? p : "night";
}

function stored(key: string): string | null {
  try {
    return localStorage.getItem(key);
  } catch {
    return null;
  }
}

/** Keeps a setting of this phone. */
export function store(key: string, value: string): void {
  try {
    if (value) localStorage.setItem(key, value);
    else localStorage.removeItem(key);
  } catch {
    // The setting then lasts until the page is closed.
  }
}
