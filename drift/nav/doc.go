// Package nav holds the quantities a navigator works with: positions,
// directions, velocities, tracks, and the one Earth they live on.
//
// Nouns:
//
//   - [Position]: a point on the WGS 84 ellipsoid, on golang/geo's angles.
//   - [TrueDeg], [MagneticDeg]: directions, clockwise from true or magnetic
//     north. They do not convert into one another without a variation.
//   - [Velocity], [Offset]: east and north components, of motion and of shift.
//   - [Plane]: a local flat map around one point, for work over a few miles.
//   - [Fix], [Track]: where something was, and when.
//   - [Opt]: a value that may be absent. Absent is never zero.
//
// Geodesics ([Inverse], [Direct], [CrossTrack]) are solved on the ellipsoid
// after Karney (2013). golang/geo measures on a sphere; its distances are
// not used anywhere, so that there is one Earth only.
//
// Printing and parsing of positions for people live here and only here.
// On the wire a position is {"lat": degrees, "lon": degrees}, rounded to
// 1e-7 degree (11 mm).
//
// The package has no clock, does no input or output and keeps no state.
package nav
