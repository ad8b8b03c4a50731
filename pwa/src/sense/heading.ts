// Where the phone points, from its own compass: one adapter over what browsers
// call by three names. It is magnetic, iron and engines upset it, and the helm
// is never steered by it: it only turns the picture for someone who points the
// phone.

export interface PhoneHeading {
  /** Degrees magnetic, where the top of the screen points (or its back, held upright). */
  mag_deg: number;
  /** As the phone itself says, 1 standard deviation or so; null when it does not. */
  accuracy_deg: number | null;
  at_ms: number;
}

export type HeadingState = "off" | "asking" | "ok" | "denied" | "none";

let state: HeadingState = "off";
let last: PhoneHeading | null = null;
let changed: () => void = () => {};

export const headingState = (): HeadingState => state;
export const phoneHeading = (): PhoneHeading | null => last;

interface WebkitEvent extends DeviceOrientationEvent {
  webkitCompassHeading?: number;
  webkitCompassAccuracy?: number;
}

/** Starts the compass. Called in a touch, because some phones only then may ask. */
export async function startHeading(onChange: () => void): Promise<void> {
  changed = onChange;
  if (!("DeviceOrientationEvent" in window)) return set("none");
  if (state === "ok") return;
  set("asking");
  const ask = (DeviceOrientationEvent as unknown as { requestPermission?: () => Promise<string> }).requestPermission;
  try {
    if (ask && (await ask.call(DeviceOrientationEvent)) !== "granted") return set("denied");
  } catch {
    return set("denied");
  }
  const absolute = "ondeviceorientationabsolute" in window;
  addEventListener(absolute ? "deviceorientationabsolute" : "deviceorientation", (e) => took(e as WebkitEvent));
}

function took(e: WebkitEvent): void {
  const screenDeg = screen.orientation?.angle ?? 0;
  const mag = headingOf(e, screenDeg);
  if (mag === null) return;
  const accuracy = e.webkitCompassAccuracy;
  last = { mag_deg: mag, accuracy_deg: accuracy !== undefined && accuracy >= 0 ? accuracy : null, at_ms: Date.now() };
  if (state === "ok") changed();
  else set("ok");
}

/** The heading in an event, or null where it holds none that means a direction. */
export function headingOf(
  e: Pick<WebkitEvent, "alpha" | "beta" | "gamma" | "absolute" | "webkitCompassHeading" | "webkitCompassAccuracy">,
  screenDeg: number,
): number | null {
  if (e.webkitCompassHeading !== undefined) {
    const valid = (e.webkitCompassAccuracy ?? 0) >= 0;
    return valid ? norm(e.webkitCompassHeading + screenDeg) : null;
  }
  // Relative angles start wherever the phone woke up: no direction.
  if (!e.absolute || e.alpha === null) return null;
  return norm(compass(e.alpha, e.beta ?? 0, e.gamma ?? 0) + screenDeg);
}

/**
 * Flat, the direction of the top edge; upright, that of the back: the
 * horizontal part of their sum, from the rotation Z-X'-Y'' by alpha, beta,
 * gamma of the W3C Device Orientation specification (section 4.1; alpha runs
 * counter-clockwise).
 */
function compass(alpha: number, beta: number, gamma: number): number {
  const [a, b, g] = [alpha, beta, gamma].map((d) => (d * Math.PI) / 180) as [number, number, number];
  // Top edge (device y) and back (device -z) in earth's frame, x east and y north.
  const top = { x: -Math.cos(b) * Math.sin(a), y: Math.cos(a) * Math.cos(b) };
  const back = {
    x: -(Math.cos(a) * Math.sin(g) + Math.cos(g) * Math.sin(a) * Math.sin(b)),
    y: -(Math.sin(a) * Math.sin(g) - Math.cos(a) * Math.cos(g) * Math.sin(b)),
  };
  return (Math.atan2(top.x + back.x, top.y + back.y) * 180) / Math.PI;
}

const norm = (deg: number): number => ((deg % 360) + 360) % 360;

function set(s: HeadingState): void {
  state = s;
  changed();
}
