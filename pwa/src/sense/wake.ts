// Keeps the screen on. Only a visible page may, and the phone may refuse.

export type WakeState = "asking" | "ok" | "refused" | "none";

let state: WakeState = "asking";
let lock: WakeLockSentinel | null = null;
let changed: () => void = () => {};

export const wakeState = (): WakeState => state;

/** Asks now, whenever the page comes back, and whenever the lock is let go. */
export function keepAwake(onChange: () => void): void {
  changed = onChange;
  document.addEventListener("visibilitychange", () => void ask());
  // Some phones grant it only after a touch.
  document.addEventListener("pointerup", () => void ask(), { passive: true });
  void ask();
}

async function ask(): Promise<void> {
  if (!("wakeLock" in navigator)) return set("none");
  if (document.visibilityState !== "visible" || (lock && !lock.released)) return;
  try {
    lock = await navigator.wakeLock.request("screen");
    lock.addEventListener("release", () => set("refused"));
    set("ok");
  } catch {
    set("refused");
  }
}

function set(s: WakeState): void {
  if (s === state) return;
  state = s;
  changed();
}
