// Package hub tells many listeners the same things over websockets: bytes in,
// bytes out. It knows events only by their sequence number.
//
// Nouns:
//
//   - [Hub]: everyone who listens, the last events and the newest state.
//   - [Client]: one connection, with one goroutine that reads and one that
//     writes.
//   - [Source]: where events that the hub no longer holds are read again.
//
// # Two lanes
//
// State (where the vessel is, what to steer, the tick) is worth only its
// newest word: [Hub.Show] overwrites it in place, and a slow client is sent
// what is newest when its turn comes. Events must all arrive: the hub holds the
// last [Queue] of them, every client has a place in that row, and one that
// falls behind its end is closed with [CloseResync]; it comes back with the
// last number it has.
//
// # Promises
//
// A client gets every event after the number it asked for, in order of the
// numbers, each once in a connection, and nothing in between is missing. An
// event is published only after it is on disk. State carries no promise but
// that its newest word arrives after older ones.
//
// Nothing here waits for a slow client: publishing is memory work under one
// lock, and all writing is done by the client's own goroutine with a deadline.
//
// It does not decide who may connect or say what; it does no compression: a
// boat has few clients and short messages.
package hub
