// Package weather keeps wind and current as histories with error, age and
// source, and makes such observations out of what instruments and people give.
//
// Nouns:
//
//   - [Sample]: one wind or one current, from when it holds, with its error and
//     who or what said it.
//   - [History]: the samples of one kind, of wind or of current. It answers
//     what held at a moment ([History.At]), on average ([History.Mean]) or
//     piece by piece ([History.Pieces]).
//   - [Measurement]: a velocity made out of others, with its covariance.
//
// What holds when samples disagree, in this order:
//
//   - An observation (instrument, person, measured) holds from its time until
//     the next observation. The first one holds backwards too.
//   - Forecasts and tables are interpolated between their own times, component
//     by component, never the bearing alone. They fill what no observation
//     reaches: a wind observed reaches one hour, a current observed half an
//     hour ([Medium.Reach]). Where there are none, the observation holds on.
//   - The error of whatever is carried beyond its own time grows with its age
//     ([Medium.SDAt]).
//
// Of several samples of one moment that which was said last counts; all stay
// listed, none is overwritten.
//
// Conventions: the velocity of a wind is that of the air, so where it blows
// to; names with "from" are where it blows from. The velocity of a current is
// that of the water over the ground. Winds are those at 10 m above the sea.
//
// A gust is kept to be shown; it moves nothing. The package has no clock, does
// no input or output and keeps no state.
package weather
