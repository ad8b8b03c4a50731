// Package pattern lays out the legs of a search and says how to steer them.
//
// Nouns:
//
//   - [Leg]: a straight run in the datum frame, the frame that moves with
//     where the person is believed to be. Its ends are offsets from the datum.
//   - [Water]: the vessel's speed, what the water does, what the datum does.
//   - [Run]: a leg as it is steered: heading through the water, course over
//     the ground, time, and where it lies over the ground.
//
// Patterns ride along with the datum: a person in the water moves with the
// water and a little with the wind, so a pattern pinned to the ground is a
// choice of its own ([Water.DatumDrift] nil), never the default for a person.
//
// The geometry is that of the International Aeronautical and Maritime Search
// and Rescue Manual as quoted in study texts that follow its volumes II and
// III (expanding square, sector, parallel sweep, creeping line, track line);
// each function names what was seen. The package chooses nothing: spacing,
// first course and extent are the caller's.
package pattern
