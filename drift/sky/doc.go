// Package sky answers what the earth's magnetism and the sun do at a place and
// a time: magnetic variation, and when there will be light to see by.
//
// Nouns:
//
//   - [VariationResult]: magnetic variation from the World Magnetic Model
//     2025, with its error and a [FieldState] that says whether a compass is
//     of any use there.
//   - [SunPosition]: where the sun stands, and the [Sector] its glare covers.
//   - [SunDay]: what the sun does in one local day: a list of [Event]s, or a
//     [DayState] that says why there are none.
//   - [Outlook]: how light it is now ([Light]) and what comes next.
//
// Caveats. Variation is that of the main field: it knows nothing of local
// anomalies, magnetic storms or the deviation of the vessel's own compass,
// which is often the largest of them. Sun times hold for a clear horizon at
// sea level; cloud, land and height of eye shift the light by minutes.
//
// The package has no clock, does no input or output and keeps no state.
package sky
