// Sound and speech that follow the return screen: turn now, closing, lost.

import { useEffect, useRef } from "preact/hooks";
import { play } from "../sense/sound";
import { say } from "../sense/voice";
import * as m from "../state/model";
import type { ReturnView } from "../state/return_view";
import type { Frame } from "../wire/frame";

/** Closing is heard within this range, so often: our choice, inside the ring a head may be seen in. */
const CLOSING_WITHIN_M = 300;
const CLOSING_EVERY_MS = 3_000;

/** Plays what changed since the last look. */
export function useSenses(frame: Frame | null, view: ReturnView): void {
  const order = `${frame?.do.code ?? ""}/${frame?.do.way ?? ""}`;
  const before = useRef(order);
  useEffect(() => {
    if (before.current !== order && frame && before.current !== "/") play("turn");
    before.current = order;
  }, [order]);

  const hadFix = useRef(false);
  const fix = !!frame?.fix && !frame.fix.stale;
  useEffect(() => {
    if (hadFix.current && !fix) play("lost");
    hadFix.current = fix;
  }, [fix]);

  const closed = useRef(0);
  const now = m.nowMs.value;
  useEffect(() => {
    const near = frame?.range_m != null && frame.range_m <= CLOSING_WITHIN_M && (frame.closing_kn ?? 0) > 0.3;
    if (!near || now - closed.current < CLOSING_EVERY_MS) return;
    closed.current = now;
    play("closing", frame?.range_m ?? undefined);
  }, [now]);

  const words = [view.order, view.range ? `${view.range.figure} ${view.range.unit === "nm" ? "miles" : "metres"}` : ""].join(". ");
  useEffect(() => {
    if (m.speech.value && frame) say(words);
  }, [order, Math.floor(now / 15_000)]);
}
