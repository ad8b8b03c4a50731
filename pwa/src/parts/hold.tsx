// Ending is dear: a hold that fills, and beside it the same in two touches,
// for wet glass and for hands that cannot hold.

import { useEffect, useRef, useState } from "preact/hooks";

/** How long to hold: our choice, to be tuned in trials; long enough not to be a brush of the hand. */
export const HOLD_MS = 1500;

interface Props {
  word: string;
  done: () => void;
}

export function HoldButton({ word, done }: Props) {
  const [held, setHeld] = useState(false);
  const timer = useRef<ReturnType<typeof setTimeout> | null>(null);
  const stop = () => {
    if (timer.current) clearTimeout(timer.current);
    timer.current = null;
    setHeld(false);
  };
  const start = (e: PointerEvent) => {
    if (e.button !== 0 || timer.current) return;
    setHeld(true);
    timer.current = setTimeout(() => {
      stop();
      done();
    }, HOLD_MS);
  };
  useEffect(() => stop, []);
  return (
    <button
      type="button"
      class={held ? "big hold held" : "big hold"}
      onPointerDown={start}
      onPointerUp={stop}
      onPointerLeave={stop}
      onPointerCancel={stop}
      onContextMenu={(e) => e.preventDefault()}
    >
      <span class="hold-fill" aria-hidden="true" />
      <span class="hold-word">{word}</span>
    </button>
  );
}

interface TwoStepProps {
  first: string;
  second: string;
  keep: string;
  done: () => void;
}

/** Two touches in two places. */
export function TwoStep({ first, second, keep, done }: TwoStepProps) {
  const [asked, setAsked] = useState(false);
  if (!asked) {
    return (
      <button type="button" onClick={() => setAsked(true)}>
        {first}
      </button>
    );
  }
  return (
    <div class="pair">
      <button type="button" onClick={() => setAsked(false)}>
        {keep}
      </button>
      <button type="button" class="ends" onClick={done}>
        {second}
      </button>
    </div>
  );
}
