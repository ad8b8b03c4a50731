// What the picture shows, ready to be drawn.

export interface RingView {
  /** What is up, in words. */
  up: string;
  /** Where on the ring north is, degrees clockwise from up. */
  northDeg: number;
  /** Where the bow points, degrees true; 0 where it is not known. */
  headingDeg: number;
  wedge: { centreDeg: number; halfDeg: number } | null;
  /** Metres from own vessel to the ring. */
  radiusM: number;
  disc: { angleDeg: number; rangeM: number; errorM: number } | null;
  cross: { angleDeg: number; rangeM: number } | null;
  windDeg: number | null;
  driftDeg: number | null;
  stale: boolean;
  text: string;
}
