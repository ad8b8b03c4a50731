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

/**
 * Takes in one exchange with the server: sent and received on this device's
 * clock, the server's time in between. A better one (shorter round trip)
 * replaces a worse; one that disagrees by more than both errors replaces it
 * too, because then a clock was changed.
 */
export function measured(sentMs: number, receivedMs: number, serverMs: number): void {
  if (receivedMs < sentMs || !Number.isFinite(serverMs)) return;
  const next = {
    offset_ms: Math.round(serverMs - (sentMs + receivedMs) / 2),
    error_ms: Math.ceil((receivedMs - sentMs) / 2) + 1,
  };
  const apart = known ? Math.abs(next.offset_ms - known.offset_ms) : 0;
  if (known && next.error_ms > known.error_ms && apart <= next.error_ms + known.error_ms) return;
  known = next;
  try {
    localStorage.setItem(KEY, JSON.stringify(next));
  } catch {
    // A full store only means measuring again after the next start.
  }
}
