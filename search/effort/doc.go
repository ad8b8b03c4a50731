// Package effort counts what has been searched: from the track that was run,
// never from the plan, it says how likely a person would have been seen at
// each place of the drifting water, and what that leaves of the cloud.
//
// Nouns:
//
//   - [Run]: a straight piece of track in the datum frame, with the sweep
//     width that held on it.
//   - [Log]: all runs so far.
//   - [Grid]: the probability of detection over an area, for a plot.
//
// The law is the inverse cube law that chose the spacing, in its exact form
// for pieces of any length, so that a leg broken off half-way counts half-way.
//
// Searched means looked at, not empty: what this package gives is the chance
// that a person who was there was seen, in the conditions stated.
package effort
