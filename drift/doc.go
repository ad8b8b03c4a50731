// Package drift says where someone in the water is now, from where and when
// they fell, the wind and the current, with an error that is never left out.
//
// Nouns:
//
//   - [Class]: what floats there, with its leeway: how the wind moves it
//     through the water. [Choose] finds one from two plain questions.
//   - [Case]: the place and time of the fall, the class, the winds and currents.
//   - [Datum]: the answer of the manuals, by vector sum, with left and right
//     datum and the total probable error, and a [Worksheet] that can be checked
//     on paper.
//   - [Cloud]: the same by many members, each with its own errors, in the
//     manner of Breivik and Allen (2008).
//   - [ColdWater]: what published tables say of people in water of a
//     temperature: planning for the recovery only.
//
// Errors have two sizes here, and names that say which. A "probable" error is a
// radius that holds half of all cases, as search planners use it. The "95"
// error is the radius that holds 95 of 100, as shown on screens.
//
// Wind is taken at 10 m and drives leeway; the current carries everything that
// floats. Both are those of the case's history, piece by piece: the newest wind
// is never used for the whole time. Published leeway holds the drift by waves
// already.
//
// Everything is worked in one [nav.Plane] around the start. East and north are
// those of its origin: near a pole the meridians turn, a wind does not.
//
// What it does not do: it reads no clock, plans no search, and no result of it
// is a reason to end one. The rescue centre's datum wins over this one.
package drift
