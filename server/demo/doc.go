// Package demo is an invented vessel under way, for whoever wants to try the
// program before they need it.
//
// Nouns:
//
//   - [Vessel]: the invented vessel. Her instruments speak NMEA 0183 through a
//     real TCP socket, to which the server listens as to any other.
//   - world: the truth. The vessel, the wind, the tidal stream and the persons
//     in the water move by it; the program is told of it only what instruments
//     say, with their errors.
//   - helm: what the vessel is told to do, by [Vessel.SetHelm] and its
//     siblings, or by her crew.
//   - crew: turns back by the same advice that a helm sees on a phone, and by
//     eye once the person is near: see [Vessel.FollowSteer].
//
// A person falls where the vessel was when a mark was made, and drifts by a
// leeway and a stream that differ from the program's by errors nobody is told.
//
// The vessel, her name, her crew and the weather are invented. The package
// computes nothing that a real vessel is shown.
package demo
