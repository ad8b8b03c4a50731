// Package ais reads the messages of the automatic identification system that
// matter here: where vessels and beacons are, and what beacons say.
//
// Nouns:
//
//   - [Assembler]: puts the fragments of VDM sentences together.
//   - [Message]: one decoded message.
//   - [ClassOf]: what an identity (MMSI) belongs to.
//
// Field positions and scales follow the tables of ITU-R M.1371 as reproduced
// in gpsd's AIVDM.adoc. A value that a station sends as "not available" is
// absent, never zero. The package has no clock: the caller gives the time.
package ais
