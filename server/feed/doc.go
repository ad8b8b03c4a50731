// Package feed listens to a vessel's instruments and says what they say now.
//
// Nouns:
//
//   - Feed: one source of NMEA 0183 sentences, named by a URL (tcp, udp, serial,
//     file). Several may be given; the order is the order of preference.
//   - Feeds: all of them together, running.
//   - Reading: a value with the moment it was received, its source and its age.
//     Every value that leaves the package is one, and one past its limit says
//     that it is stale.
//   - Vessel: all readings at one moment, with what follows from them (true wind,
//     dead reckoning).
//   - Beacon: a person-overboard device, search and rescue transmitter or distress
//     beacon heard over AIS, or an on-board system's MOB sentence.
//   - Update: a new fix, beacon or target, told as it happens.
//
// # Time
//
// Ages are measured from the moment a line was received, by the clock given in
// [Config]. They never depend on what instruments believe the time to be, which is
// itself a reading. So a receiver that sends a wrong date spoils no age.
//
// # What is not believed
//
// A line with a wrong checksum is dropped and counted. A position with a status of
// "not valid" is no position. One that a simulator or a person invented is not
// used. One at 0,0, one that the vessel could not have reached, and one whose own
// time ran backwards are held back and shown: see [Held]. Nothing is repaired or
// guessed.
//
// # What it does not do
//
// It keeps no track, decides no alarm and writes nothing but its recording. It
// sends nothing to the instruments.
package feed
