// Four sounds, each with one meaning, made here so that nothing has to load.
// Browsers keep audio locked until a touch; phones lock it again after a call
// or sleep, so every touch tries to open it again.

export type Sound = "marked" | "turn" | "closing" | "lost";
export type SoundState = "locked" | "ok" | "none";

interface Tone {
  hz: number;
  /** Seconds from the start of the sound. */
  at: number;
  for: number;
  type?: OscillatorType;
  /** Glides to this frequency. */
  to?: number;
}

let context: AudioContext | null = null;
let state: SoundState = "locked";
let changed: () => void = () => {};

export const soundState = (): SoundState => state;

/** Listens for touches for ever; calls back when the state changes. */
export function unlockSound(onChange: () => void): void {
  changed = onChange;
  if (!("AudioContext" in window)) {
    set("none");
    return;
  }
  for (const event of ["pointerup", "touchend", "keydown"]) {
    document.addEventListener(event, () => void open(), { capture: true, passive: true });
  }
  document.addEventListener("visibilitychange", () => {
    if (context && context.state !== "running") set("locked");
  });
}

async function open(): Promise<void> {
  if (context?.state === "running") return;
  // Safari: play even when the ring switch is silent.
  const session = (navigator as { audioSession?: { type: string } }).audioSession;
  if (session) session.type = "playback";
  try {
    if (!context || context.state === "closed") {
      context = new AudioContext();
      context.onstatechange = () => set(context?.state === "running" ? "ok" : "locked");
    }
    await context.resume();
    set(context.state === "running" ? "ok" : "locked");
  } catch {
    context = null;
    set("locked");
  }
}

function set(s: SoundState): void {
  if (s === state) return;
  state = s;
  changed();
}

/**
 * The tones. 500 Hz to 3 kHz is what carries through wind and is heard by old
 * ears (common practice for alarm tones); rising is a mark, even is an order,
 * a single blip is closing, falling is a loss. Lengths are our choice.
 */
export function tonesOf(sound: Sound, rangeM = 100): Tone[] {
  switch (sound) {
    case "marked":
      return [0, 1, 2].flatMap((n) => [
        { hz: 880, at: n * 0.5, for: 0.2, type: "square" as const },
        { hz: 1760, at: n * 0.5 + 0.2, for: 0.2, type: "square" as const },
      ]);
    case "turn":
      return [0, 1].map((n) => ({ hz: 1175, at: n * 0.25, for: 0.15, type: "triangle" as const }));
    case "closing":
      return [{ hz: closingHz(rangeM), at: 0, for: 0.12, type: "sine" }];
    case "lost":
      return [0, 1].map((n) => ({ hz: 1400, to: 520, at: n * 0.7, for: 0.5, type: "sawtooth" as const }));
  }
}

/** From 600 Hz at 500 m and beyond to 2400 Hz at nothing: our choice, two octaves. */
export function closingHz(rangeM: number): number {
  return 600 * 4 ** (1 - Math.min(Math.max(rangeM, 0), 500) / 500);
}

/** Plays a sound; says whether it could. */
export function play(sound: Sound, rangeM?: number): boolean {
  if (sound === "marked") navigator.vibrate?.([200, 100, 200, 100, 400]);
  if (sound === "lost") navigator.vibrate?.([600]);
  if (context?.state !== "running") return false;
  for (const tone of tonesOf(sound, rangeM)) sing(context, tone);
  return true;
}

function sing(c: AudioContext, tone: Tone): void {
  const start = c.currentTime + tone.at;
  const end = start + tone.for;
  const oscillator = c.createOscillator();
  const gain = c.createGain();
  oscillator.type = tone.type ?? "sine";
  oscillator.frequency.setValueAtTime(tone.hz, start);
  if (tone.to) oscillator.frequency.exponentialRampToValueAtTime(tone.to, end);
  // 10 ms of rise and fall, so that nothing clicks.
  gain.gain.setValueAtTime(0, start);
  gain.gain.linearRampToValueAtTime(0.6, start + 0.01);
  gain.gain.setValueAtTime(0.6, end - 0.01);
  gain.gain.linearRampToValueAtTime(0, end);
  oscillator.connect(gain).connect(c.destination);
  oscillator.start(start);
  oscillator.stop(end);
}
