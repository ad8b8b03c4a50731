// The vessel's common clock. Each phone has its own idea of the time; the
// server measures how far off it is, and events carry both.

const KEY = "wakeback.clock";

interface Offset {
  /** Common clock minus this device's clock, milliseconds. */
  offset_ms: number;
  /** How far the offset may be off: half the round trip of the best exchange. */
  error_ms: number;
}

let known: Offset | null = read();

/** Forgets the offset, as for a test. */
export function forgetClock(): void {
  known = null;
}

function read(): Offset | null {
  try {
    const o = JSON.parse(localStorage.getItem(KEY) ?? "null") as Offset | null;
    return o && Number.isFinite(o.offset_ms) && Number.isFinite(o.error_ms) ? o : null;
  } catch {
    return null;
  }
}

/** The offset, or null while no server was ever asked. */
export function clockOffset(): Offset | null {
  return known;
}

/** The common time of a moment on this device's clock. */
export function common(deviceMs: number): number {
  return deviceMs + (known?.offset_ms ?? 0);
}

/** The common time now, in Unix milliseconds. */
export function commonNow(): number {
  return common(Date.now());
}

/** One question for the time: t1 and t4 on this device's clock, t2 and t3 on the server's (RFC 5905, section 8). */
export interface Exchange {
  t1: number;
  t2: number;
  t3: number;
  t4: number;
}

/** Offset and error of an exchange; one more millisecond for the rounding at both ends. */
export function offsetOf({ t1, t2, t3, t4 }: Exchange): Offset {
  return {
    offset_ms: Math.round((t2 - t1 + (t3 - t4)) / 2),
    error_ms: Math.ceil((t4 - t1 - (t3 - t2)) / 2) + 1,
  };
}

/**
 * Takes in one exchange. A better one (shorter round trip) replaces a worse;
 * one that disagrees by more than both errors replaces it too, because then a
 * clock was changed.
 */
export function measured(exchange: Exchange): void {
  const next = offsetOf(exchange);
  if (!Number.isFinite(next.offset_ms) || next.error_ms < 0) return;
  const apart = known ? Math.abs(next.offset_ms - known.offset_ms) : 0;
  if (known && next.error_ms > known.error_ms && apart <= next.error_ms + known.error_ms) return;
  known = next;
  try {
    localStorage.setItem(KEY, JSON.stringify(next));
  } catch {
    // A full store only means measuring again after the next start.
  }
}
