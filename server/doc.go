// Package server answers the phones: HTTP and websocket routes, one place
// where errors become problem documents, and the wiring of store, feeds, hub
// and gate.
//
// Nouns:
//
//   - [Config] and [Run]: a server for one vessel, from start to stop.
//   - ledger: the one writer. What it has acknowledged is on disk, counted in
//     the book, and published, in that order.
//   - book: the incidents in memory, folded when they are asked for.
//   - live: the loop that says where the vessel is and how to steer; it never
//     waits for the disk.
//   - keeper: writes the tracks, and tells everyone how the store is.
//   - witness: writes into the log what the instruments say of wind and water.
//   - watchman: raises marks for beacons that call by themselves.
//
// # What it promises
//
// An answer of 200 or 201 to a mark or an event means that it is on disk. When
// nothing can be written the answer is 503, and guiding goes on from memory.
//
// It computes nothing about persons or drift: that is package advice's.
package server
