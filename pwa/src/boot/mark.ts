// MARK: the one thing that must work within a second of opening the page,
// before anything else has loaded and with no server. Time and position are
// taken at the first contact and committed at once; there is nothing to hold
// and nothing to confirm.

import { clockOffset, common } from "../sync/clock";
import { uuidv7 } from "../sync/event";
import type { Outbox } from "../sync/outbox";
import { markedNow } from "../sense/position";
import type { Draft, LogEvent } from "../wire/event";
import { PressFilter } from "./press";

/** What a press means right now; the page sets it as the incident goes on. */
export interface MarkContext {
  /** The open incident, or null to open a new one. */
  incident: string | null;
  by: string;
  drill: boolean;
  /** Heading of the vessel, degrees true, if known. */
  heading_deg: number | null;
}

export interface Pressed {
  draft: Draft;
  /** Resolves when the event is on this phone's disk. */
  kept: Promise<LogEvent>;
}

export interface MarkButton {
  context: MarkContext;
  /** Called at the press, before anything is awaited. */
  onPress: (pressed: Pressed) => void;
  /** Marks now, from a key or the page's own code. */
  press: (options?: PressOptions) => Pressed;
  /** Whether the marking finger is still on the glass, or was until just now. */
  settling: () => boolean;
}

export interface PressOptions {
  /** performance.now() of the contact. */
  atMono?: number;
  person?: number;
  test?: boolean;
}

/** After a mark the screen changes under the finger: touches so soon after it are not meant for it. */
const SETTLE_MS = 600;

/** Listens for presses on every element that carries data-mark, now and later. */
export function startMarking(outbox: Outbox): MarkButton {
  const filter = new PressFilter();
  /** The press, and then the moment its finger lifted. */
  let lastPress = Number.NEGATIVE_INFINITY;

  const button: MarkButton = {
    context: { incident: null, by: "", drill: false, heading_deg: null },
    onPress: () => {},
    press(options = {}) {
      const atMono = options.atMono ?? performance.now();
      lastPress = performance.now();
      const draft = draftOf(button.context, atMono, options);
      // A mark opens the incident that the next mark joins; a test stands alone.
      if (!options.test) button.context.incident = draft.incident;
      outbox.trip(draft);
      const pressed = { draft, kept: outbox.add(draft) };
      button.onPress(pressed);
      return pressed;
    },
    settling: () => filter.held || performance.now() - lastPress < SETTLE_MS,
  };

  document.addEventListener(
    "pointerdown",
    (e) => {
      const target = markTarget(e);
      if (target && e.button === 0 && filter.begin(e.pointerId, e.timeStamp)) {
        button.press({ atMono: e.timeStamp, ...optionsOf(target) });
      }
    },
    { capture: true, passive: true },
  );
  const ended = (e: PointerEvent) => {
    if (filter.end(e.pointerId, e.timeStamp)) lastPress = performance.now();
  };
  document.addEventListener("pointerup", ended, { capture: true, passive: true });
  document.addEventListener("pointercancel", ended, { capture: true, passive: true });
  // A long press is a press, not a wish for the browser's menu.
  document.addEventListener("contextmenu", (e) => markTarget(e) && e.preventDefault(), { capture: true });
  document.addEventListener("click", (e) => clicked(e, button), { capture: true });
  return button;
}

/**
 * A click with no contact before it comes from a key or from a screen reader:
 * it is a press too. Any other click so soon after a mark was meant for MARK,
 * and must not reach what has taken its place on the screen.
 */
function clicked(e: MouseEvent, button: MarkButton): void {
  const target = markTarget(e);
  const byTouch = e.detail > 0;
  if (target && !byTouch && !button.settling()) {
    button.press(optionsOf(target));
  } else if (target || (byTouch && button.settling())) {
    e.preventDefault();
    e.stopPropagation();
  }
}

function markTarget(e: Event): HTMLElement | null {
  return e.target instanceof Element ? e.target.closest<HTMLElement>("[data-mark]") : null;
}

function optionsOf(target: HTMLElement): PressOptions {
  const person = Number(target.dataset.person);
  return {
    ...(person > 0 && { person }),
    ...(target.dataset.mark === "test" && { test: true }),
  };
}

function draftOf(context: MarkContext, atMono: number, options: PressOptions): Draft {
  const mono = performance.now();
  // The contact was this long ago even if the page was busy since.
  const deviceMs = Math.round(Date.now() - Math.max(0, mono - atMono));
  const offset = clockOffset();
  const body = markedNow(deviceMs, Math.min(atMono, mono));
  if (body.heading_deg === undefined && context.heading_deg !== null) body.heading_deg = context.heading_deg;
  if (options.person) body.person = options.person;
  return {
    id: uuidv7(deviceMs),
    incident: options.test || !context.incident ? uuidv7(deviceMs) : context.incident,
    kind: "marked",
    at: new Date(common(deviceMs)).toISOString(),
    device_at: new Date(deviceMs).toISOString(),
    ...(offset && { clock_error_ms: offset.error_ms }),
    ...(context.by && { by: context.by }),
    ...(context.drill && { drill: true }),
    ...(options.test && { test: true }),
    body: body as unknown as Record<string, unknown>,
  };
}
