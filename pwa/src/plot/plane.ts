// A flat plane about an origin (equirectangular metres), for drawing only:
// nothing that is steered by is worked out on it. The earth's radii are taken
// at the middle latitude of each point and the origin, so that within 60 nm and
// up to 70 degrees of latitude a place is off by less than a thousandth of its
// distance.

import type { Position } from "../wire/event";

export interface XY {
  /** Metres east of the origin. */
  x: number;
  /** Metres north of the origin. */
  y: number;
}

const RAD = Math.PI / 180;
const A_M = 6378137; // WGS 84 semi-major axis (NIMA TR8350.2)
const E2 = 0.00669437999014; // WGS 84 first eccentricity squared (NIMA TR8350.2)

export class Plane {
  constructor(readonly origin: Position) {}

  /** Where a position lies. East is the short way round, also over the antimeridian. */
  at(p: Position): XY {
    const mid = ((p.lat + this.origin.lat) / 2) * RAD;
    const w = 1 - E2 * Math.sin(mid) ** 2;
    const north = (A_M * (1 - E2)) / w ** 1.5; // metres per radian along the meridian
    const east = (A_M / Math.sqrt(w)) * Math.cos(mid);
    return { x: short(p.lon - this.origin.lon) * RAD * east, y: (p.lat - this.origin.lat) * RAD * north };
  }

  /** The position of a place, for the graticule and for moving the plot. */
  position({ x, y }: XY): Position {
    // Two rounds settle the middle latitude to less than a millimetre within 60 nm.
    let lat = this.origin.lat;
    let lon = this.origin.lon;
    for (let i = 0; i < 3; i++) {
      const mid = ((lat + this.origin.lat) / 2) * RAD;
      const w = 1 - E2 * Math.sin(mid) ** 2;
      lat = this.origin.lat + y / ((A_M * (1 - E2)) / w ** 1.5) / RAD;
      lon = this.origin.lon + x / ((A_M / Math.sqrt(w)) * Math.cos(mid)) / RAD;
    }
    return { lat, lon: short(lon) };
  }
}

/** A difference of longitude, or a longitude, in -180 to 180. */
export function short(deg: number): number {
  return deg > 180 ? deg - 360 : deg < -180 ? deg + 360 : deg;
}
