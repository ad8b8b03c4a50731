// Package nmea reads and writes NMEA 0183 sentences.
//
// Nouns:
//
//   - Sentence: one framed line whose checksum has been proved: talker,
//     formatter and the fields as text.
//   - Body: what a sentence says, one type a formatter ([RMC], [HDT], [MWV]...).
//     Every field that a talker may leave empty is a nav.Opt: absent is never
//     zero.
//   - Decoder: frames and decodes line after line without allocating.
//   - TimeOfDay, Date: what instruments say of the time. They are put together
//     by stated rules, never with the wall clock.
//
// Sentences are matched on the formatter alone; the talker (GP, GN, II, WI, HC
// and so on) is kept but decides nothing, because it varies between makers.
//
// A position, course and speed whose own status says "not valid" (RMC and GLL
// status V, GGA quality 0, GNS mode N, any mode N) are absent after decoding, so
// that they cannot be used by mistake. The first field at fault ends a decoding
// with a [FieldError] that names it.
//
// The package keeps no state between sentences, knows no clock and does no input
// or output. It does not decode waypoints, routes, autopilot or radar sentences:
// they frame, and then [ErrUnknown] says so.
//
// Field layouts: the NMEA sentence notes of the gpsd project (www/NMEA.adoc,
// www/AIVDM.adoc, commit 46977fa) and, for MOB, the header that quotes the 2013
// amendment (marnav, include/marnav/nmea/mob.hpp, commit 43728763). GNS and ZDA
// are laid out from memory of the first of these.
package nmea
