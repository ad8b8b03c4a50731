// Which touches of the MARK target are a press. Wet glass makes false
// contacts: a thumb that skips, drops beside it, a second finger. A press is
// the first contact, whatever comes after it.

/** Contacts closer than this are one thumb that skipped: platform practice for wet glass. */
export const SKIP_MS = 300;

/** A contact that never ended (its end was lost) stops counting after this: our choice. */
const LOST_MS = 10_000;

export class PressFilter {
  private down: { pointer: number; at: number } | null = null;
  private lastContact = Number.NEGATIVE_INFINITY;

  /** A contact began on the target. Returns true when it is a press. */
  begin(pointer: number, atMs: number): boolean {
    if (this.down && atMs - this.down.at < LOST_MS) return false;
    if (atMs - this.lastContact < SKIP_MS) return false;
    this.down = { pointer, at: atMs };
    this.lastContact = atMs;
    return true;
  }

  /** A contact ended, anywhere. Returns true when it was the one that pressed. */
  end(pointer: number, atMs: number): boolean {
    if (this.down?.pointer !== pointer) return false;
    this.down = null;
    this.lastContact = atMs;
    return true;
  }

  /** Whether the pressing finger is still on the glass. */
  get held(): boolean {
    return this.down !== null;
  }
}
